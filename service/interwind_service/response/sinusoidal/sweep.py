"""Many frequencies for the price of one factorization a band.

In a band around s0 every signal of the network is

    q(s) = (I + (s − s0) K)⁻¹ r,   y(s) = y_r + (s − s0) (Y_1 − H q(s)),

K, r, H, y_r from one solve at s0 (`resolvent`), and the Schur form of K serves all frequencies of the band. Each band
is held against the frequency tree at its ends and where the answer is largest, and cut in two where they differ.

References: Laub 1981 (one reduction, many frequencies).
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.network.winding_coordinates import all_coordinates
from interwind_service.response.equations.reduction import StateBasis, reduce
from interwind_service.response.equations.resolvent import Resolvent, resolvent
from interwind_service.response.equations.roles import roles_of
from interwind_service.response.equations.storage import storage_of
from interwind_service.response.sinusoidal.shifted_schur import ShiftedSchur, shifted_schur

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class SweptBand:
    """Frequencies served by one resolvent.

    ``index`` (f,) positions in the list asked for; ``s`` (f,) = jω; ``t`` (n, f, drives): states in Schur coordinates,
    per unit of each drive.
    """

    basis: StateBasis
    index: IntArray
    s: ComplexArray
    own: Resolvent
    impulse: FloatArray
    U: ComplexArray
    t: ComplexArray

    @property
    def topology(self) -> Topology:
        """The network."""
        return self.basis.storage.topology

    def at(self, places: IntArray) -> SweptBand:
        """Return the band at some of its frequencies only."""
        return replace(self, index=self.index[places], s=self.s[places], t=self.t[:, places])

    def signals(self, rows: IntArray) -> ComplexArray:
        """Return signals (f, rows, drives) per unit of each drive; rows as in `Resolvent`."""
        f, m = len(self.s), self.t.shape[2]
        H, t = self.own.H[rows], self.t.reshape(len(self.t), f * m)
        moved = H @ (self.U @ t) if f * m < len(rows) else (H @ self.U) @ t
        moved = moved.reshape(len(rows), f, m).transpose(1, 0, 2)
        shift = (self.s - self.own.s0)[:, None, None]
        return self.own.y[rows][None] + shift * (self.impulse[rows][None] - moved)


def sweep(
    topology: Topology, omega: FloatArray, order: IntArray, agrees: Callable[[SweptBand], bool]
) -> Iterator[SweptBand | IntArray]:
    """Yield bands for rising ``omega`` (f,), rad/s; ``order`` (f,) are their positions in the list asked for.

    A band that ``agrees`` refuses is halved; after `SWEEP_HALVINGS` of them its positions are yielded instead, to be
    solved one by one, and so are those next to a pole.

    Raises
    ------
    InvalidNetwork : the network is singular whatever the frequency.
    """
    roles = roles_of(topology, at_zero=False)
    basis = reduce(storage_of(topology, all_coordinates(topology)), roles)
    waiting = [(part, 0) for part in _bands(omega)]
    while waiting:
        part, halvings = waiting.pop(0)
        s0 = float(np.sqrt(omega[part[0]] * omega[part[-1]]))
        own = resolvent(basis, roles, s0)
        schur = shifted_schur(own.K)
        near = schur.near(1j * omega[part] - s0, tol.SWEEP_POLE_DISTANCE)
        if near.any():
            yield order[part[near]]
            part = part[~near]
            if not part.size:
                continue
        band = _solve(basis, own, schur, order[part], 1j * omega[part])
        if agrees(band):
            yield band
        elif halvings == tol.SWEEP_HALVINGS or len(part) < 2 * tol.SWEEP_POINTS:
            yield order[part]
        else:
            middle = len(part) // 2
            waiting[:0] = [(part[:middle], halvings + 1), (part[middle:], halvings + 1)]


def check_points(band: SweptBand, size: FloatArray) -> IntArray:
    """Return where a band is held against the tree: both ends, and where ``size`` (f,) is largest."""
    return np.unique([0, len(band.s) - 1, int(np.argmax(size))])


def _bands(omega: FloatArray) -> list[IntArray]:
    """Cut rising frequencies into as few bands of at most `SWEEP_BAND` as there may be, equal in ratio."""
    span = float(omega[-1] / omega[0])
    count = max(1, int(np.ceil(np.log(span) / np.log(tol.SWEEP_BAND) - tol.SWEEP_BAND_ROUNDING)))
    edges = omega[0] * span ** (np.arange(1, count) / count)
    return [part for part in np.split(np.arange(len(omega)), np.searchsorted(omega, edges)) if len(part)]


def _solve(basis: StateBasis, own: Resolvent, schur: ShiftedSchur, index: IntArray, s: ComplexArray) -> SweptBand:
    node_impulse = own.tree.paths @ basis.voltage_impulse[own.tree.tree]
    impulse = np.vstack((basis.voltage_impulse, basis.current_impulse, node_impulse))
    t = schur.solve(own.r.astype(np.complex128), s - own.s0)
    return SweptBand(basis, index, s, own, impulse, schur.U, t)
