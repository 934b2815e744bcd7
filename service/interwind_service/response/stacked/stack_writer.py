"""Writes down, for one tree, how a stack of variants is solved and observed (`straight_line`, `tape`)."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.model import observables as ob
from interwind.model.observables import Observable
from interwind_service.response.equations.frequency_tree import FrequencyTree
from interwind_service.response.equations.roles import Role
from interwind_service.response.stacked.straight_line import (
    ZERO,
    Cell,
    Part,
    add,
    minus,
    multiply,
    plus,
    scaled,
    solve_stack,
    subtract,
    times,
)
from interwind_service.response.stacked.tape import Node, Number, Tape
from interwind_service.response.stacked.variants import Name, Variants

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


class StackWriter:
    """The equations of one tree, z = (v_T, y, i) of every variant; ``given``: the inputs of the tape by name."""

    def __init__(self, tree: FrequencyTree, variants: Variants, drives: ComplexArray) -> None:
        self._tree, self._variants = tree, variants
        self.tape = Tape()
        self.omega = self.tape.input(over_variants=False)
        self.given: dict[Name, Node] = {}
        self._u = [
            _constant(complex(value)) if own is None else Cell(self.input("drive", k), None)
            for k, (value, own) in enumerate(zip(drives, variants.drives, strict=True))
        ]
        self._z: dict[int, Cell] = {}

    def input(self, *name: str | int) -> Node:
        """Return the node of a number that varies."""
        if name not in self.given:
            self.given[name] = self.tape.input(over_variants=True)
        return self.given[name]

    def reactive(self, first: Part, second: Part) -> Part:
        """Return ω first − second / ω."""
        return subtract(multiply(self.omega, first), None if second is None else second / self.omega)

    def solve(self, order: list[tuple[int, int]]) -> Number:
        """Write down the solution; return what is above 0 where it is not to be trusted."""
        tree = self._tree
        cells = _template(tree, self._variants).matrix(self)
        known = {int(column): _combination(tree.imposed[k], self._u) for k, column in enumerate(tree.known)}
        unknown = {int(column): k for k, column in enumerate(tree.unknown)}
        A, b = [], []
        for row in range(len(tree.J)):
            right = scaled(_combination(tree.J[row], self._u), -1.0)
            A.append({unknown[j]: cell for j, cell in cells[row].items() if j in unknown})
            for j, cell in cells[row].items():
                if j in known:
                    right = minus(right, times(cell, known[j]))
            b.append(right)
        solved = solve_stack(A, b, order)
        self._z = known | {column: solved.x[k] for column, k in unknown.items()}
        return solved.excess

    def observe(self, item: Observable) -> Cell:
        """Return one observable."""
        topology = self._tree.topology
        if isinstance(item, ob.NodeVoltage):
            node = topology.node(item.node)
            zero = topology.parts.reference[topology.parts.of_node[node]] if item.to is None else topology.node(item.to)
            return self._between(node, int(zero))
        if isinstance(item, ob.FluxLinkage):
            return self._flux(item)
        if isinstance(item, ob.WindingVoltage | ob.WindingCurrent):
            branch = topology.winding(item.name, item.label)
        else:
            branch = int(topology.branches_of(item.name)[0])
        wants_voltage = isinstance(item, ob.WindingVoltage | ob.ElementVoltage)
        return self._voltage(branch) if wants_voltage else self._current(branch)

    def _between(self, one: int, other: int) -> Cell:
        return _combination(self._tree.paths[one] - self._tree.paths[other], self._z)

    def _voltage(self, branch: int) -> Cell:
        return _combination(self._tree.Q[:, branch], self._z)

    def _current(self, branch: int) -> Cell:
        tree, topology = self._tree, self._tree.topology
        role = tree.roles.role[branch]
        if role == Role.ADMITTANCE:
            return times(self._admittance(branch), self._voltage(branch))
        if role == Role.WINDING:
            group = next(k for k, g in enumerate(topology.groups) if branch in g.branches)
            row = tree.coordinates[group].N[branch - int(topology.groups[group].branches[0])]
            start = tree.groups[group].start
            return _combination(np.concatenate([np.zeros(start), row]), self._z)
        if role == Role.TRANSFORMER:
            transformer = next(t for t in topology.transformers if branch in (t.first, t.second))
            own = self._z[int(tree.current[transformer.first])]
            return own if branch == transformer.first else scaled(own, -transformer.ratio)
        if role == Role.CURRENT:
            return next((self._u[k] for k, d in enumerate(tree.drives) if d.branch == branch), ZERO)
        return self._z[int(tree.current[branch])] if tree.current[branch] >= 0 else ZERO

    def _admittance(self, branch: int) -> Cell:
        roles = self._tree.roles
        base = (roles.conductance[branch], roles.capacitance[branch], roles.reciprocal_inductance[branch])
        varies = branch in self._variants.values
        g, c, w = (None if part == 0.0 else self.input("value", branch) if varies else float(part) for part in base)
        return Cell(g, self.reactive(c, w))

    def _flux(self, item: ob.FluxLinkage) -> Cell:
        topology = self._tree.topology
        group = next(k for k, g in enumerate(topology.groups) if g.name == item.name)
        base = topology.groups[group]
        row, total = base.labels.index(item.label), ZERO
        for k, branch in enumerate(base.branches.tolist()):
            varies = group in self._variants.inductance_h
            own: Number = self.input("inductance", group, row, k) if varies else float(base.inductance_h[row, k])
            total = plus(total, scaled(self._current(branch), own))
        return total


@dataclass(frozen=True, slots=True, eq=False)
class _Template:
    """M(s) of the base network without what varies, and where that goes.

    ``base``: by (row, column) the constants of M0, M1, M2. ``shares``: by (row, column) what adds to them, each (which
    of the three, branch, ±1); ``groups``: by (row, column) the (group, entry) that M1 holds.
    """

    base: dict[tuple[int, int], tuple[float, float, float]]
    shares: dict[tuple[int, int], list[tuple[int, int, float]]]
    groups: dict[tuple[int, int], tuple[int, tuple[int, int]]]

    def matrix(self, writer: StackWriter) -> list[dict[int, Cell]]:
        """Write down M(s) by rows: real part M0, imaginary part ω M1 − M2 / ω."""
        rows: dict[int, dict[int, Cell]] = {}
        for at in sorted({*self.base, *self.shares, *self.groups}):
            parts: list[Part] = [None if value == 0.0 else value for value in self.base.get(at, (0.0, 0.0, 0.0))]
            for which, branch, sign in self.shares.get(at, ()):
                parts[which] = add(parts[which], multiply(sign, writer.input("value", branch)))
            if at in self.groups:
                group, entry = self.groups[at]
                parts[1] = writer.input("group", group, *entry)
            real, first, second = parts
            rows.setdefault(at[0], {})[at[1]] = Cell(real, writer.reactive(first, second))
        return [rows[k] for k in range(len(rows))]


def _template(tree: FrequencyTree, variants: Variants) -> _Template:
    M = [part.copy() for part in tree.M]
    T, roles = len(tree.tree), tree.roles
    varied = np.zeros(len(roles.role), dtype=bool)
    varied[list(variants.values)] = True
    shares: dict[tuple[int, int], list[tuple[int, int, float]]] = {}
    for which, weights in enumerate((roles.conductance, roles.capacitance, roles.reciprocal_inductance)):
        gone = varied & (weights != 0.0)
        kept = ~varied & (weights != 0.0)
        if gone.any():
            M[which][:T, :T] = (tree.Q[:, kept] * weights[kept]) @ tree.Q[:, kept].T
        for branch in np.flatnonzero(gone).tolist():
            outer = np.outer(tree.Q[:, branch], tree.Q[:, branch])
            for i, j in np.argwhere(outer).tolist():
                shares.setdefault((i, j), []).append((which, branch, float(outer[i, j])))
    groups = {}
    for group, entries in variants.groups.items():
        start = tree.groups[group].start
        for i, j in entries:
            M[1][start + i, start + j] = 0.0
            groups[start + i, start + j] = (group, (i, j))
    filled = np.argwhere((M[0] != 0.0) | (M[1] != 0.0) | (M[2] != 0.0)).tolist()
    base = {(i, j): (float(M[0][i, j]), float(M[1][i, j]), float(M[2][i, j])) for i, j in filled}
    return _Template(base, shares, groups)


def _constant(value: complex) -> Cell:
    return Cell(value.real or None, value.imag or None)


def _combination(weights: FloatArray, cells: Sequence[Cell] | Mapping[int, Cell]) -> Cell:
    total = ZERO
    for k in np.flatnonzero(weights):
        total = plus(total, scaled(cells[int(k)], float(weights[k])))
    return total
