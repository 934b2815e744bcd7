"""The sinusoidal state that a swept band gives, and the proof that it is the state of the network.

A band is held against the frequency tree at its ends and where it is loudest: the voltages and currents of both must
agree, and the swept ones must satisfy the tree's equations.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.network.winding_coordinates import WindingCoordinates
from interwind_service.response.equations.frequency_tree import Drive, FrequencyTree, frequency_tree
from interwind_service.response.sinusoidal.spectrum import Band, solve_band, terminal_rows
from interwind_service.response.sinusoidal.sweep import SweptBand, check_points

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
ComplexArray = NDArray[np.complex128]


class Recorder:
    """A state that answers with zeros and remembers which signals it was asked for, as rows of a `SweptBand`."""

    def __init__(self, topology: Topology) -> None:
        self.topology, self.omega = topology, np.ones(1)
        self.rows: dict[int, None] = {}

    def _ask(self, rows: Iterable[int]) -> ComplexArray:
        self.rows.update(dict.fromkeys(rows))
        return np.zeros(1, dtype=np.complex128)

    def between(self, one: int, other: int) -> ComplexArray:
        """Note two nodes."""
        base = 2 * len(self.topology.kind)
        return self._ask((base + one, base + other))

    def voltage(self, branch: int) -> ComplexArray:
        """Note the voltage of a branch."""
        return self._ask((branch,))

    def current(self, branch: int) -> ComplexArray:
        """Note the current of a branch."""
        return self._ask((len(self.topology.kind) + branch,))

    def field(self, group: int) -> FloatArray:
        """Note nothing: the states are always there."""
        return np.zeros(1)

    def flux_linkages(self, group: int) -> ComplexArray:
        """Note nothing: the states are always there."""
        return np.zeros((1, self.topology.groups[group].size), dtype=np.complex128)


class SweptState:
    """A state from one resolvent; ``rows`` are fetched together, by one matrix product."""

    def __init__(
        self, band: SweptBand, u: ComplexArray, coordinates: tuple[WindingCoordinates, ...], rows: Iterable[int] = ()
    ) -> None:
        self.topology: Topology = band.topology
        self.omega: FloatArray = band.s.imag
        self._band, self._u, self._coordinates = band, u, coordinates
        driven = [band.t[:, :, k] * u[k] for k in np.flatnonzero(u)]
        self._t: ComplexArray = sum(driven[1:], driven[0]) if driven else np.zeros(band.t.shape[:2], np.complex128)
        self._base = len(self.topology.kind)
        self._places: dict[int, int] = {}
        self._signals = np.zeros((0, len(self.omega)), dtype=np.complex128)
        self._fetch(list(rows))

    def _fetch(self, rows: list[int]) -> ComplexArray:
        missing = [row for row in rows if row not in self._places]
        if missing:
            own, shift = self._band.own, self._band.s - self._band.own.s0
            moved = (own.H[missing] @ self._band.U) @ self._t
            values = (self._band.impulse[missing] @ self._u)[:, None] - moved
            values *= shift
            values += (own.y[missing] @ self._u)[:, None]
            self._places.update(zip(missing, range(len(self._signals), len(self._signals) + len(missing)), strict=True))
            self._signals = np.concatenate((self._signals, values)) if len(self._signals) else values
        return self._signals[[self._places[row] for row in rows]]

    def _one(self, row: int) -> ComplexArray:
        place = self._places.get(row)
        return self._fetch([row])[0] if place is None else self._signals[place]

    def between(self, one: int, other: int) -> ComplexArray:
        """Return the voltage of node ``one`` against node ``other``."""
        return self._one(2 * self._base + one) - self._one(2 * self._base + other)

    def voltage(self, branch: int) -> ComplexArray:
        """Return the voltage of a branch from its start to its finish."""
        return self._one(branch)

    def current(self, branch: int) -> ComplexArray:
        """Return the current of a branch from its start to its finish."""
        return self._one(self._base + branch)

    def field(self, group: int) -> FloatArray:
        """Return iᴴ L i of a winding group."""
        S, y = self._stored(group)
        return np.einsum("nf,nf->f", y.conj(), S @ y).real

    def flux_linkages(self, group: int) -> ComplexArray:
        """Return L i of a winding group, shape (f, n)."""
        S, y = self._stored(group)
        N = self._coordinates[group].N
        return np.linalg.solve(N.T, np.vstack((S @ y, np.zeros((len(N) - len(y), y.shape[1]))))).T

    def _stored(self, group: int) -> tuple[FloatArray, ComplexArray]:
        """The coordinates y of a group that store energy, shape (rank, f), and their inductances."""
        basis, own = self._band.basis, self._coordinates[group]
        rows = basis.storage.groups[group]
        y = (basis.X[rows] @ self._band.U) @ self._t + (basis.P[rows] @ self._u)[:, None]
        return own.S[: own.rank, : own.rank], y

    def node_voltages(self) -> ComplexArray:
        """Return every node voltage against its zero, shape (f, nodes)."""
        volts = self._fetch([2 * self._base + k for k in range(len(self.topology.nodes))])
        return (volts - volts[self.topology.parts.reference[self.topology.parts.of_node]]).T

    def loudest(self) -> SweptState:
        """Return the state at the few frequencies where most energy is stored: the greatest |q|, and both ends."""
        size = np.linalg.norm(self._t, axis=0)
        some = np.union1d(np.argsort(size)[-tol.LOUDEST_POINTS :], [0, len(size) - 1])
        return SweptState(self._band.at(some), self._u, self._coordinates)


@dataclass(frozen=True, slots=True, eq=False)
class Comparison:
    """``gap``: the largest difference from the tree at a point; ``residual`` of the swept one in the tree's equations.

    ``condition`` of the tree's equations; ``noise`` (1, drives): terminal entries below it are rounding.
    """

    gap: float
    residual: float
    condition: float
    noise: FloatArray


def compare(
    swept: SweptBand, coordinates: tuple[WindingCoordinates, ...], drives: tuple[Drive, ...]
) -> list[Comparison]:
    """Hold a band against the frequency tree at its ends and where it is loudest."""
    points = check_points(swept, np.linalg.norm(swept.t, axis=(0, 2)))
    return [_compare_at(swept, point, coordinates, drives) for point in points.tolist()]


def _compare_at(
    swept: SweptBand, point: int, coordinates: tuple[WindingCoordinates, ...], drives: tuple[Drive, ...]
) -> Comparison:
    """Compare at one point; a tree of thousands of unknowns is not kept."""
    one = swept.at(np.array([point]))
    tree = frequency_tree(swept.topology, coordinates, swept.own.tree.roles, float(one.s.imag[0]), drives)
    band = solve_band(tree, one.index, one.s)
    Z = _columns(one, tree)
    noise = tol.NOISE_SHARE * (band.scale @ np.abs(terminal_rows(band)).T) * band.largest
    return Comparison(_gap(band, Z), _residual(band, Z), float(band.condition.max()), noise)


def _columns(swept: SweptBand, tree: FrequencyTree) -> ComplexArray:
    """The swept signals as the columns of the tree's equations, shape (1, columns, drives).

    Coordinates that store energy are states themselves; those without leakage follow from the winding currents.
    """
    base = len(tree.topology.kind)
    T = len(tree.tree)
    rows = np.concatenate((tree.tree, base + tree.columns[T:]))
    Z = swept.signals(rows)
    basis = swept.basis
    for where, own, rows in zip(tree.groups, tree.coordinates, basis.storage.groups, strict=True):
        Z[:, where] = own.of_currents(Z[:, where])
        Z[0, where.start : where.start + own.rank] = basis.X[rows] @ (swept.U @ swept.t[:, 0]) + basis.P[rows]
    for column, ohm in tree.drops():
        Z[:, column] *= ohm
    return Z


def _gap(band: Band, Z: ComplexArray) -> float:
    """Largest difference of voltages over the largest voltage, of currents and of fluxes likewise, drive by drive."""
    tree, worst = band.tree, 0.0
    T = len(tree.tree)
    noise = tol.NOISE_SHARE * band.scale
    blocks = [(Z[:, :T], band.Z[:, :T], noise[:, :T].max(initial=0.0))]
    for where, own in zip(tree.groups, tree.coordinates, strict=True):
        floor = (noise[:, where] @ np.abs(own.N).T).max(initial=0.0)
        blocks.append((own.currents(Z[:, where]), own.currents(band.Z[:, where]), floor))
        floor = (noise[:, where] @ np.abs(own.S)).max(initial=0.0)
        blocks.append((own.S @ Z[:, where], own.S @ band.Z[:, where], floor))
    rest = np.flatnonzero(tree.current >= 0)
    if rest.size:
        places = tree.current[rest]
        blocks.append((Z[:, places], band.Z[:, places], noise[:, places].max(initial=0.0)))
    for mine, theirs, floor in blocks:
        size = np.maximum(np.abs(theirs).max(axis=1, initial=0.0), floor * band.largest)
        gap = np.abs(mine - theirs).max(axis=1, initial=0.0)
        worst = max(worst, float(np.divide(gap, size, out=gap, where=size > 0.0).max(initial=0.0)))
    return worst


def _residual(band: Band, Z: ComplexArray) -> float:
    """|b − A x|∞ / (|A|∞ |x|∞ + |b|∞) of the swept solution in the tree's equations, scaled as they are solved."""
    tree = band.tree
    M, columns = tree.matrix(band.s)[0], band.scale[0, tree.unknown]
    if not columns.size:
        return 0.0
    b = -(M[:, tree.known] @ tree.imposed + tree.J)
    A = M[:, tree.unknown] if tree.known.size else M
    x = Z[0, tree.unknown]
    weight = np.abs(A) * columns
    largest = weight.max(axis=1)
    rows = 1.0 / np.where(largest > 0.0, largest, 1.0)
    gap = b - A @ x
    x_size = np.abs(x / columns[:, None]).max(initial=0.0)
    size = (weight.sum(axis=1) * rows).max() * x_size + np.abs(b * rows[:, None]).max(initial=0.0)
    return float(np.abs(gap * rows[:, None]).max(initial=0.0) / size) if size > 0.0 else 0.0
