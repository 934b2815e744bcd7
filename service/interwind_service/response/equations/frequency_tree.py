"""Equations in the voltages of a spanning tree chosen at the working frequency.

At each angular frequency the branches of largest admittance form a spanning tree T. With v_T its branch voltages every
branch voltage is v = Qᵀ v_T and the current law is Q i = 0; Q, the fundamental cut-set matrix, holds 0, +1 and −1 only.
No sum then mixes an admittance with one that would swallow it: a chord is no larger than the tree branches it loops
with, and no voltage appears as a difference of node voltages. The equations are

    M(s) z + J u = 0,   M(s) = M0 + s M1 + M2 / s,   z = (v_T, y, i),

y the coordinates of the winding groups, i the currents of imposed voltages, ideal transformers and controlled sources,
u the drives: voltages of sources, currents of sources, currents into ports. In a tight group whose resistances differ
by orders, i also holds the drop e of each large one, e/R = N_w y, which would swamp the others in Nᵀ R N.

References: Bryant 1962 (fundamental cut-sets); Stewart 1989 and Vavasis 1994 (stable methods for the weighted problem).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.network.forest import path_matrix, spanning_forest
from interwind_service.network.topology import Topology
from interwind_service.network.winding_coordinates import WindingCoordinates
from interwind_service.response.equations.roles import Role, Roles

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True)
class Drive:
    """One column of u: the voltage of source ``branch``, else (branch −1) a current taken from one node to another."""

    branch: int
    out_of: int = -1
    into: int = -1


@dataclass(frozen=True, slots=True, eq=False)
class FrequencyTree:
    """The equations of a network in one tree.

    Attributes
    ----------
    tree : (T,) branches of the tree. ``Q`` (T, branches). ``paths`` (nodes, T): node voltages = paths @ v_T, the
        first node of each tree being zero.
    M : three matrices (n, columns); ``J`` (n, drives).
    unknown, known : columns sought, columns of imposed tree voltages; ``imposed`` (known, drives): their values per
        unit of each drive.
    columns : the branch of each column; the first T are voltages, the others currents.
    groups : columns of each winding group. ``current`` (branches,): the column of a current, −1 without one.
    loops : branches of imposed voltage that close a loop of such branches.
    """

    topology: Topology
    coordinates: tuple[WindingCoordinates, ...]
    roles: Roles
    drives: tuple[Drive, ...]
    tree: IntArray
    Q: FloatArray
    paths: FloatArray
    M: tuple[FloatArray, FloatArray, FloatArray]
    J: FloatArray
    unknown: IntArray
    known: IntArray
    imposed: FloatArray
    columns: IntArray
    groups: tuple[slice, ...]
    current: IntArray
    loops: IntArray

    def matrix(self, s: ComplexArray | FloatArray) -> ComplexArray:
        """Return M(s), shape (f, n, columns), real where s is."""
        M0, M1, M2 = self.M
        stack = M1[None] * s[:, None, None]
        stack += M0[None]
        if np.any(M2):
            stack += M2[None] * (1.0 / s)[:, None, None]
        return stack

    def drops(self) -> list[tuple[int, float]]:
        """Return the columns that are drops of resistances written apart, and those resistances, ohm."""
        apart = _apart(self.topology, self.coordinates)
        first = len(self.columns) - len(apart)
        return [(first + k, float(self.topology.groups[g].resistance_ohm[w, w])) for k, (g, w) in enumerate(apart)]

    def voltage(self, branch: int, z: ComplexArray) -> ComplexArray:
        """Return the voltage of a branch, z (f, columns) being solutions."""
        return z[:, : len(self.tree)] @ self.Q[:, branch]

    def branch_current(self, branch: int, z: ComplexArray, s: ComplexArray, u: ComplexArray) -> ComplexArray:
        """Return the current of a branch, u (drives,) being the drives that made z."""
        role = self.roles.role[branch]
        if role == Role.ADMITTANCE:
            return self.roles.admittance(branch, s) * self.voltage(branch, z)
        if role == Role.WINDING:
            group, row = _place(self.topology, branch)
            return z[:, self.groups[group]] @ self.coordinates[group].N[row]
        if role == Role.TRANSFORMER:
            transformer = next(t for t in self.topology.transformers if branch in (t.first, t.second))
            own = z[:, self.current[transformer.first]]
            return own if branch == transformer.first else -transformer.ratio * own
        if role == Role.CURRENT:
            a, b = int(self.topology.start[branch]), int(self.topology.finish[branch])
            value = sum((u[k] for k, d in enumerate(self.drives) if (d.out_of, d.into, d.branch) == (a, b, branch)), 0j)
            return np.full(len(z), value, dtype=np.complex128)
        if self.current[branch] >= 0:
            return z[:, self.current[branch]]
        return np.zeros(len(z), dtype=np.complex128)


def frequency_tree(
    topology: Topology,
    coordinates: tuple[WindingCoordinates, ...],
    roles: Roles,
    omega: float,
    drives: tuple[Drive, ...],
) -> FrequencyTree:
    """Choose the tree at ``omega``, rad/s, and write the equations."""
    size, nodes, role = len(topology.kind), len(topology.nodes), roles.role
    tree = spanning_forest(nodes, topology.start, topology.finish, _order(topology, roles, omega))
    paths = path_matrix(nodes, topology.start, topology.finish, tree)
    Q = (paths[topology.start] - paths[topology.finish]).T

    columns = tree.tolist()
    groups = []
    for group in topology.groups:
        groups.append(slice(len(columns), len(columns) + group.size))
        columns += group.branches.tolist()
    known = np.flatnonzero(role[tree] == Role.VOLTAGE)
    imposing = tree[known].tolist()
    current = np.full(size, -1, dtype=np.int64)
    for branch in [*imposing, *(t.first for t in topology.transformers), *(c.branch for c in topology.controls)]:
        current[branch] = len(columns)
        columns.append(int(branch))
    apart = _apart(topology, coordinates)
    columns += [int(topology.groups[g].branches[w]) for g, w in apart]
    unknown = np.ones(len(columns), dtype=bool)
    unknown[known] = False
    loops = role == Role.VOLTAGE
    loops[tree] = False
    imposed = np.array([[float(d.branch == branch) for d in drives] for branch in imposing])
    imposed = imposed.reshape(len(imposing), len(drives))
    equations = _Equations(topology, coordinates, roles, drives, Q, paths, groups, current, apart, len(columns))
    M, J = equations.write(imposing)
    return FrequencyTree(
        topology, coordinates, roles, drives, tree, Q, paths, M, J,
        np.flatnonzero(unknown), known, imposed,
        np.array(columns, dtype=np.int64), tuple(groups), current, np.flatnonzero(loops),
    )  # fmt: skip


def _order(topology: Topology, roles: Roles, omega: float) -> list[int]:
    """Order the branches by admittance, largest first; ideal ones at the ends; what does not conduct is left out."""
    role = roles.role
    with np.errstate(divide="ignore", invalid="ignore"):
        size = roles.conductance + omega * roles.capacitance
        size += np.where(roles.reciprocal_inductance > 0.0, roles.reciprocal_inductance / omega, 0.0)
        for group in topology.groups:
            impedance = omega * group.inductance_h.diagonal() + group.resistance_ohm.diagonal()
            size[group.branches] = np.where(impedance > 0.0, 1.0 / impedance, np.inf)
    rank = np.where(role >= Role.TRANSFORMER, 3, 2)
    rank[role == Role.VOLTAGE], rank[role == Role.CONTROLLED_VOLTAGE] = 0, 1
    order = np.lexsort((-size, rank))
    conducts = (role != Role.CURRENT) & (role != Role.OPEN)
    return order[conducts[order]].tolist()


def _apart(topology: Topology, coordinates: tuple[WindingCoordinates, ...]) -> list[tuple[int, int]]:
    """Return (group, winding) of the resistances that are written apart: those well above the least of their group."""
    apart = []
    for g, (group, own) in enumerate(zip(topology.groups, coordinates, strict=True)):
        plain = np.count_nonzero(group.resistance_ohm) == np.count_nonzero(group.resistance_ohm.diagonal())
        if plain and np.count_nonzero(own.N) > group.size:
            weight = group.resistance_ohm.diagonal() * np.abs(own.N).max(axis=1) ** 2
            apart += [(g, int(w)) for w in np.flatnonzero(weight > tol.RESISTANCE_SPREAD * weight.min())]
    return apart


def _place(topology: Topology, branch: int) -> tuple[int, int]:
    for k, group in enumerate(topology.groups):
        if group.branches[0] <= branch <= group.branches[-1]:
            return k, int(branch - group.branches[0])
    raise ValueError(f"branch {branch} is no winding")


class _Equations:
    """Writes M0, M1, M2 and J; rows: the cut-sets, the groups, the transformers, the controlled sources."""

    def __init__(
        self,
        topology: Topology,
        coordinates: tuple[WindingCoordinates, ...],
        roles: Roles,
        drives: tuple[Drive, ...],
        Q: FloatArray,
        paths: FloatArray,
        groups: list[slice],
        current: IntArray,
        apart: list[tuple[int, int]],
        columns: int,
    ) -> None:
        self.topology, self.coordinates, self.roles, self.drives = topology, coordinates, roles, drives
        self.Q, self.paths, self.groups, self.current, self.columns = Q, paths, groups, current, columns
        self.apart = apart

    def write(self, imposing: list[int]) -> tuple[tuple[FloatArray, FloatArray, FloatArray], FloatArray]:
        Q, roles, T = self.Q, self.roles, len(self.Q)
        n = self.columns - len(imposing)
        M0, M1, M2 = (np.zeros((n, self.columns)) for _ in range(3))
        J = np.zeros((n, len(self.drives)))
        for target, value in ((M0, roles.conductance), (M1, roles.capacitance), (M2, roles.reciprocal_inductance)):
            part = value != 0.0
            target[:T, :T] = (Q[:, part] * value[part]) @ Q[:, part].T
        self._write_groups(M0, M1)
        for branch in imposing:
            M0[:T, self.current[branch]] = Q[:, branch]
        row = self.groups[-1].stop if self.groups else T
        for transformer in self.topology.transformers:
            cut = Q[:, transformer.first] - transformer.ratio * Q[:, transformer.second]
            M0[:T, self.current[transformer.first]], M0[row, :T] = cut, -cut
            row += 1
        for column, drive in enumerate(self.drives):
            if drive.out_of >= 0:
                J[:T, column] = self.paths[drive.out_of] - self.paths[drive.into]
        for control in self.topology.controls:
            own = int(self.current[control.branch])
            M0[:T, own] = Q[:, control.branch]
            if roles.role[control.branch] == Role.CONTROLLED_VOLTAGE:
                M0[row, :T] = Q[:, control.branch]
            else:
                M0[row, own] = 1.0
            if control.sensed < 0:
                M0[row, :T] -= control.gain * (self.paths[control.start] - self.paths[control.finish])
            else:
                self._subtract_current(control.sensed, control.gain, row, (M0, M1, M2), J)
            row += 1
        return (M0, M1, M2), J

    def _write_groups(self, M0: FloatArray, M1: FloatArray) -> None:
        T, own_row, own_column = len(self.Q), len(M0) - len(self.apart), self.columns - len(self.apart)
        for g, (group, where, own) in enumerate(zip(self.topology.groups, self.groups, self.coordinates, strict=True)):
            cuts = own.columns(self.Q[:, group.branches])
            M0[:T, where], M0[where, :T] = cuts, -cuts.T
            resistance = group.resistance_ohm
            for w in [w for one, w in self.apart if one == g]:
                resistance = resistance * (np.arange(group.size) != w)
                M0[where, own_column], M0[own_row, where] = own.N[w], -own.N[w]
                M0[own_row, own_column] = 1.0 / group.resistance_ohm[w, w]
                own_row, own_column = own_row + 1, own_column + 1
            M0[where, where] = own.losses(resistance)
            M1[where, where] = own.S

    def _subtract_current(
        self, branch: int, gain: float, row: int, M: tuple[FloatArray, FloatArray, FloatArray], J: FloatArray
    ) -> None:
        role, T = self.roles.role[branch], len(self.Q)
        if role == Role.ADMITTANCE:
            parts = (self.roles.conductance, self.roles.capacitance, self.roles.reciprocal_inductance)
            for target, value in zip(M, parts, strict=True):
                target[row, :T] -= gain * value[branch] * self.Q[:, branch]
        elif role == Role.WINDING:
            group, place = _place(self.topology, branch)
            M[0][row, self.groups[group]] -= gain * self.coordinates[group].N[place]
        elif role == Role.CURRENT:
            for column, drive in enumerate(self.drives):
                if drive.branch == branch:
                    J[row, column] -= gain
        elif self.current[branch] >= 0:
            M[0][row, self.current[branch]] -= gain
