"""The state equations of a network in blocks of modes of like speed, each taken from a resolvent at its own s0.

    x' = A x + B u,    y = C x + D u + Y_1 u',    A block diagonal

An s0 shows the modes up to some decades above it with all their digits; faster ones drown in the rounding of the slow
ones. So the spectrum is cut at its gaps, and each block is the invariant subspace (real Schur form) of the resolvent at
an s0 of its own, A_b = s0 − T_b⁻¹. Slow modes keep their decay and fast ones their gain, however far apart.

References: Golub & Van Loan 2013, section 7.6 (invariant subspaces and decoupling); Schur form by LAPACK.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import scipy.linalg as sl
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.equations.reduction import StateBasis
from interwind_service.response.equations.resolvent import Resolvent

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class StateSpace:
    """x' = A x + B u, y = C x + D u + Y_1 u'; the energy coordinates are q = V x and x = W q.

    ``A`` (n, n), 1/s; ``B`` (n, inputs); ``C`` (signals, n); ``Y1`` (signals, inputs); ``V``, ``W`` (n, n). D is stated
    by what it makes exact: ``gain_at_shift`` (signals, inputs) = C (s0 − A)⁻¹ B + D at s0 = ``shift``. ``blocks`` :
    sizes; ``shifts`` : the s0 of each block; ``residual``, ``condition`` : worst of the solves.
    """

    basis: StateBasis
    A: FloatArray
    B: FloatArray
    C: FloatArray
    Y1: FloatArray
    shift: float
    gain_at_shift: FloatArray
    V: FloatArray
    W: FloatArray
    blocks: tuple[int, ...]
    shifts: tuple[float, ...]
    residual: float
    condition: float

    @property
    def states(self) -> int:
        """Number of states n."""
        return len(self.A)


@dataclass(frozen=True, slots=True, eq=False)
class _Block:
    resolvent: Resolvent
    V: FloatArray
    T: FloatArray


def state_space(basis: StateBasis, resolvent_at: Callable[[float], Resolvent], s0: float) -> StateSpace:
    """Gather the blocks, the slowest from the resolvent at s0, 1/s, and join them."""
    main = resolvent_at(s0)
    blocks = _blocks(resolvent_at, main, basis.X.shape[1])
    V = np.hstack([block.V for block in blocks])
    W = np.linalg.inv(V)
    A_parts, B_parts, C_parts = [], [], []
    first = 0
    for block in blocks:
        size = block.T.shape[0]
        rows = W[first : first + size]
        inverse = sl.lu_factor(block.T) if size else None
        own = block.resolvent
        A_parts.append(own.s0 * np.eye(size) - np.linalg.inv(block.T))
        B_parts.append(sl.lu_solve(inverse, rows @ own.r) if size else rows @ own.r)
        C_parts.append(sl.lu_solve(inverse, (own.H @ block.V).T, trans=1).T if size else own.H @ block.V)
        first += size
    A, B, C = sl.block_diag(*A_parts), np.vstack(B_parts), np.hstack(C_parts)
    node_impulse = main.tree.paths @ basis.voltage_impulse[main.tree.tree]
    Y1 = np.vstack((basis.voltage_impulse, basis.current_impulse, node_impulse))
    return StateSpace(
        basis, A, B, C, Y1, s0, main.y - s0 * Y1, V, W,
        tuple(len(block.T) for block in blocks), tuple(block.resolvent.s0 for block in blocks),
        max(block.resolvent.residual for block in blocks), max(block.resolvent.condition for block in blocks),
    )  # fmt: skip


def _blocks(resolvent_at: Callable[[float], Resolvent], main: Resolvent, states: int) -> list[_Block]:
    blocks: list[_Block] = []
    own, done, slower = main, 0, -1.0
    while True:
        shift = own.s0
        speed = np.sort(_speed(np.linalg.eigvals(own.K), shift)) if states else np.zeros(0)
        left = speed[done:]
        cut = _cut(left, shift)
        size = int((left <= cut).sum())
        if size == states:
            return [_Block(own, np.eye(states), own.K)]
        if size:
            T, Q, found = sl.schur(
                own.K, sort=lambda re, im, a=slower, b=cut, s=shift: a < _speed(np.array([complex(re, im)]), s)[0] <= b
            )
            if found != size:  # active networks only: no cut holds, so one block, and the residual judges it
                return [_Block(main, np.eye(states), main.K)]
            blocks.append(_Block(own, Q[:, :size], T[:size, :size]))
        done += size
        if done == states:
            return blocks
        slower = cut
        own = resolvent_at(min(float(left[size]), shift * tol.BAND_REACH**2) * tol.BAND_LEAD)


def _speed(mu: NDArray[np.complex128], shift: float) -> FloatArray:
    """|λ| of resolvent eigenvalues μ = 1/(s0 − λ)."""
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(mu == 0.0, np.inf, np.abs(shift - 1.0 / mu))


def _cut(left: FloatArray, shift: float) -> float:
    """Where to end the block that starts at the slowest mode left: nowhere when all are in reach, else at a gap."""
    reach = shift * tol.BAND_REACH
    if not left.size or left[-1] <= reach:
        return np.inf
    inside = left[left <= reach]
    if not inside.size:
        return float(np.sqrt(reach * left[0])) if left[0] > reach else reach
    ends = np.append(inside, left[len(inside)])
    gaps = np.log(np.maximum(ends[1:], np.finfo(float).tiny) / np.maximum(ends[:-1], shift))
    where = len(gaps) - 1 - int(np.argmax(gaps[::-1]))
    return float(np.sqrt(max(ends[where], shift) * ends[where + 1]))
