"""The states of a network and the generator of its drives as one flow y' = M y, with jumps at the events.

A block of modes much faster than a drive follows it at once; its states then hold a large rest value that the outputs
take away again, and digits with it. So such a block is counted from that rest value: with A_f Π − Π S = −B_f U
(Sylvester 1884) z = x_f − Π ξ obeys z' = A_f z, the drive reaches the outputs through the exact rest gain, and z jumps
by −Π Δξ where ξ changes at an event.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.linalg as sl
from numpy.typing import NDArray

from interwind_service.response.drive.generator import Generator
from interwind_service.response.equations.state_space import StateSpace
from interwind_service.tolerances import REST_SEPARATION

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Flow:
    """y = (z, ξ), y' = M y between events; at an event z gains ``jump`` Δξ.

    ``M`` (n + g, n + g), 1/s; ``jump`` (n, g); ``signals`` (signals, n + g), every signal as a row on y; ``energy``
    (n, n + g): the energy coordinates q = energy y, √J; ``rest`` (n, g): Π.
    """

    states: int
    M: FloatArray
    jump: FloatArray
    signals: FloatArray
    energy: FloatArray
    rest: FloatArray

    def start(self, x: FloatArray, xi: FloatArray) -> FloatArray:
        """Return z of states x (n,) and drive states ξ (g,)."""
        return x - self.rest @ xi


def flow_of(space: StateSpace, generator: Generator) -> Flow:
    """Join the two; blocks are counted from rest against every drive that is slow beside them."""
    n, g = space.states, len(generator.S)
    rest, fast = np.zeros((n, g)), np.zeros((n, g), dtype=bool)
    gain = space.gain_at_shift @ generator.U
    M = np.zeros((n + g, n + g))
    M[:n, :n], M[:n, n:], M[n:, n:] = space.A, space.B @ generator.U, generator.S
    first = 0
    for number, size in enumerate(space.blocks):
        own = slice(first, first + size)
        first += size
        A, C, drive = space.A[own, own], space.C[:, own], M[own, n:].copy()
        shifted = np.linalg.solve(space.shift * np.eye(size) - A, drive)
        slow = np.zeros(g, dtype=bool)
        if number and size:
            slow = generator.rate * REST_SEPARATION < np.abs(np.linalg.eigvals(A)).min()
        gain[:, ~slow] -= C @ shifted[:, ~slow]
        if slow.any():
            rest[own] = sl.solve_sylvester(A, -generator.S, -drive * slow)
            gain += C @ np.linalg.solve(A, rest[own] @ generator.S - space.shift * shifted * slow)
            fast[own] = slow
    M[:n, n:][fast] = 0.0
    signals = np.hstack((space.C, gain + space.Y1 @ (generator.U @ generator.S)))
    energy = np.hstack((space.V, space.V @ rest))
    return Flow(n, M, -rest, signals, energy, rest)
