"""Networks of thousands of nodes with little coupling: sparse LU of the nodal equations, the ordering done once.

    (G + s C) x = B u

The pattern is the same at every frequency, so the order that keeps the factors sparse is found for the first one and
used for all. Each solution carries its residual, is refined where that is worse than rounding, and is factored anew
with full pivoting where it is not good enough.

References: Ho, Ruehli & Brennan 1975 (the equations); Demmel, Eisenstat, Gilbert, Li & Liu 1999 (the factorization);
Liu 1985 (minimum degree).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import sparse
from scipy.sparse import linalg as sla

from interwind_service import tolerances as tol
from interwind_service.network.kind import Kind
from interwind_service.network.stamps import Stamps, Triplets
from interwind_service.network.system import Plan, assemble, plan_of
from interwind_service.network.topology import Topology
from interwind_service.response.equations.frequency_tree import Drive

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class NodalBand:
    """Solutions of the nodal equations at some frequencies.

    ``index`` (f,) positions in the list asked for; ``s`` (f,) = jω; ``x`` (f, unknowns, drives) per unit of each drive,
    NaN where singular; ``residual``, ``condition`` (f,), the condition inf where singular, else not estimated (1).
    """

    topology: Topology
    plan: Plan
    index: IntArray
    s: ComplexArray
    x: ComplexArray
    residual: FloatArray
    condition: FloatArray


def is_sparse(topology: Topology) -> bool:
    """Whether a network is large and its windings couple in small groups."""
    unknowns = len(topology.nodes) + len(topology.kind)
    coupled = sum(group.size**2 for group in topology.groups)
    return unknowns > tol.SPARSE_UNKNOWNS and coupled < tol.SPARSE_COUPLING * unknowns


def nodal_spectrum(topology: Topology, frequency_hz: FloatArray, drives: tuple[Drive, ...]) -> Iterator[NodalBand]:
    """Solve for every drive at every frequency, in bands of bounded memory."""
    plan = plan_of(topology)
    stamps = assemble(topology, plan, Stamps(len(plan.unknowns), len(topology.inputs), Triplets))
    system = _Ordered(stamps.G.sparse(), stamps.C.sparse())
    right = _right_sides(topology, plan, stamps.B, drives)
    order = np.argsort(frequency_hz, kind="stable")
    share = max(1, tol.STACK_ENTRIES // max(1, right.size))
    for begin in range(0, len(order), share):
        index = order[begin : begin + share]
        s = 2j * np.pi * frequency_hz[index]
        x = np.empty((len(s), *right.shape), dtype=np.complex128)
        residual = np.empty(len(s))
        for k, value in enumerate(s.tolist()):
            x[k], residual[k] = system.solve(value, right)
        yield NodalBand(topology, plan, index, s, x, residual, np.where(np.isfinite(residual), 1.0, np.inf))


def _right_sides(topology: Topology, plan: Plan, B: FloatArray, drives: tuple[Drive, ...]) -> ComplexArray:
    """One column a drive: a source per unit, or a current from one node into another."""
    column = {int(branch): k for k, branch in enumerate(topology.input_branch)}
    right = np.zeros((len(plan.unknowns), len(drives)), dtype=np.complex128)
    for k, drive in enumerate(drives):
        if drive.branch >= 0:
            right[:, k] = B[:, column[drive.branch]]
            continue
        for node, value in ((drive.into, 1.0), (drive.out_of, -1.0)):
            if plan.rows[node] >= 0:
                right[plan.rows[node], k] += value
    return right


class _Ordered:
    """G + s C on one pattern, rows and columns in the order found by the first factorization.

    A symmetric order (minimum degree of A + Aᵀ) keeps the factors of a nodal matrix sparsest where its diagonal may
    serve as pivots; the order of AᵀA takes any pivots. The first factorization tries both and keeps the smaller.
    """

    def __init__(self, G: sparse.csc_matrix, C: sparse.csc_matrix) -> None:
        pattern = (abs(G) + abs(C)).tocsc()
        pattern.sort_indices()
        self._size = pattern.shape[0]
        self._set(pattern.indices, pattern.indptr, _on_pattern(G, pattern), _on_pattern(C, pattern))
        self._rows = self._columns = np.arange(self._size)
        self._pivot_share = 0.0

    def solve(self, s: complex, right: ComplexArray) -> tuple[ComplexArray, float]:
        """Return x and |b − A x|∞ / (|A|∞ |x|∞ + |b|∞); NaN where A is singular."""
        data = self._G + s * self._C
        A = sparse.csc_matrix((data, self._indices, self._indptr), shape=(self._size, self._size))
        try:
            if not self._pivot_share:
                self._order_by(A)
                return self.solve(s, right)
            y, residual = self._refined(A, right[self._rows], self._pivot_share)
            if not residual <= tol.RESIDUAL_LIMIT and self._pivot_share < 1.0:
                y, residual = self._refined(A, right[self._rows], 1.0)
        except RuntimeError:  # SuperLU says so when a pivot is exactly zero
            return np.full(right.shape, np.nan, dtype=np.complex128), np.nan
        x = np.empty_like(y)
        x[self._columns] = y
        return x, residual

    def _refined(self, A: sparse.csc_matrix, b: ComplexArray, pivot_share: float) -> tuple[ComplexArray, float]:
        spec = "NATURAL" if pivot_share == self._pivot_share else "COLAMD"
        factors = sla.splu(A, permc_spec=spec, diag_pivot_thresh=pivot_share)
        norm = np.bincount(self._indices, np.abs(A.data), self._size).max()
        y = factors.solve(b)
        residual, gap = _residual(A, norm, y, b)
        if residual > tol.SPARSE_REFINED_RESIDUAL:
            y = y + factors.solve(gap)
            residual, _ = _residual(A, norm, y, b)
        return y, residual

    def _order_by(self, A: sparse.csc_matrix) -> None:
        """Put rows and columns into the better order once and for all."""
        best = sla.splu(A)
        columns, rows, self._pivot_share = np.argsort(best.perm_c), self._rows, 1.0
        symmetric = sla.splu(A, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=tol.SPARSE_PIVOT_SHARE)
        if symmetric.nnz < best.nnz:
            columns = rows = np.argsort(symmetric.perm_c)
            self._pivot_share = tol.SPARSE_PIVOT_SHARE
        places = sparse.csc_matrix((np.arange(len(self._indices)), self._indices, self._indptr), shape=A.shape)
        moved = places[rows][:, columns].tocsc()
        moved.sort_indices()
        self._set(moved.indices, moved.indptr, self._G[moved.data], self._C[moved.data])
        self._rows, self._columns = rows, columns

    def _set(self, indices: IntArray, indptr: IntArray, G: FloatArray, C: FloatArray) -> None:
        self._indices, self._indptr, self._G, self._C = indices, indptr, G, C


def _residual(A: sparse.csc_matrix, norm: float, y: ComplexArray, right: ComplexArray) -> tuple[float, ComplexArray]:
    gap = right - A @ y
    size = norm * np.abs(y).max(initial=0.0) + np.abs(right).max(initial=0.0)
    return float(np.abs(gap).max(initial=0.0) / size) if size > 0.0 else 0.0, gap


def _on_pattern(matrix: sparse.csc_matrix, pattern: sparse.csc_matrix) -> FloatArray:
    """Return the values of a matrix at the places of a pattern that holds its own."""
    size = pattern.shape[0]
    columns = np.repeat(np.arange(size), np.diff(pattern.indptr))
    places = columns * size + pattern.indices
    own = matrix.tocoo()
    values = np.zeros(len(places))
    np.add.at(values, np.searchsorted(places, own.col.astype(np.int64) * size + own.row), own.data)
    return values


class NodalPhasors:
    """The sinusoidal state of one band as functions of branch and node numbers, each (f,); ``omega`` (f,), rad/s."""

    def __init__(self, band: NodalBand, u: ComplexArray, sources: dict[int, complex]) -> None:
        self.topology, self.omega = band.topology, band.s.imag
        self._plan, self._s, self._x, self._sources = band.plan, band.s, band.x @ u, sources

    def _node(self, node: int) -> ComplexArray:
        row = self._plan.rows[node]
        return self._x[:, row] if row >= 0 else np.zeros(len(self._x), dtype=np.complex128)

    def between(self, one: int, other: int) -> ComplexArray:
        """Return the voltage of node ``one`` against node ``other``."""
        return self._node(one) - self._node(other)

    def voltage(self, branch: int) -> ComplexArray:
        """Return the voltage of a branch from its start to its finish."""
        return self.between(int(self.topology.start[branch]), int(self.topology.finish[branch]))

    def current(self, branch: int) -> ComplexArray:
        """Return the current of a branch from its start to its finish."""
        plan, topology = self._plan, self.topology
        if branch in plan.currents:
            return self._x[:, plan.currents[branch]]
        if branch in plan.resistance_ohm:
            return self.voltage(branch) / plan.resistance_ohm[branch]
        kind = topology.kind[branch]
        if kind == Kind.CAPACITOR:
            return self._s * topology.value[branch] * self.voltage(branch)
        if kind == Kind.CURRENT_SOURCE:
            return np.full(len(self._x), self._sources[branch], dtype=np.complex128)
        transformer = next((t for t in topology.transformers if branch == t.second), None)
        if transformer is not None:
            return -transformer.ratio * self.current(transformer.first)
        control = next(c for c in topology.controls if c.branch == branch)
        if control.sensed >= 0:
            return control.gain * self.current(control.sensed)
        return control.gain * self.between(control.start, control.finish)

    def field(self, group: int) -> FloatArray:
        """Return iᴴ L i of a winding group."""
        own = self.topology.groups[group]
        i = self._currents(group)
        return np.einsum("fi,fi->f", i.conj(), i @ own.inductance_h).real

    def flux_linkages(self, group: int) -> ComplexArray:
        """Return L i of a winding group, shape (f, n)."""
        return self._currents(group) @ self.topology.groups[group].inductance_h

    def node_voltages(self) -> ComplexArray:
        """Return every node voltage against its zero, shape (f, nodes)."""
        rows = self._plan.rows[:-1]
        volts = np.zeros((len(self._x), len(rows)), dtype=np.complex128)
        volts[:, rows >= 0] = self._x[:, rows[rows >= 0]]
        return volts

    def _currents(self, group: int) -> ComplexArray:
        return np.stack([self.current(int(k)) for k in self.topology.groups[group].branches], axis=1)


def nodal_terminal(band: NodalBand, drives: tuple[Drive, ...]) -> ComplexArray:
    """Return the hybrid matrix (f, d, d) of the drives: current into the network per volt, voltage per ampere."""
    H = np.zeros((len(band.s), len(drives), len(drives)), dtype=np.complex128)
    for k, drive in enumerate(drives):
        if drive.out_of < 0:
            H[:, k] = -band.x[:, band.plan.currents[drive.branch]]
            continue
        for node, sign in ((drive.into, 1.0), (drive.out_of, -1.0)):
            if band.plan.rows[node] >= 0:
                H[:, k] += sign * band.x[:, band.plan.rows[node]]
    return H


def nodal_suspects(band: NodalBand, drives: tuple[Drive, ...], place: int) -> str:
    """Name what is largest next to a singular point: there the solution is the null vector."""
    aside = np.array([band.s[place].imag / (2.0 * np.pi) * (1.0 + tol.ASIDE)])
    x = next(iter(nodal_spectrum(band.topology, aside, drives))).x[0]
    size = np.abs(np.nan_to_num(x)).max(axis=1, initial=0.0)
    if not size.any():
        return "some of its elements"
    large = np.flatnonzero(size > tol.NULL_VECTOR_SHARE * size.max())
    return ", ".join(str(band.plan.unknowns[k]) for k in large[:8])
