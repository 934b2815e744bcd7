"""The tableau of a switched network: every branch current an unknown, so that no conductance is lost beside another.

Unknowns s = (e, i, dz/dt): node voltages, branch currents, rates of the winding states. States x in energy units:
z = S' i with L = S S' (windings), y = sqrt(C) v (capacitors), φ / sqrt(L0) (saturable), stored energy x'x/2. Then

    M s = N x + F w,    dx/dt = P s

where only the rows of switches, diodes and saturable branches depend on their mode. Ho, Ruehli & Brennan 1975 give
the stamps; keeping each branch current is the sparse tableau of Hachtel, Brayton & Gustavson 1971 (from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.response.drive.drives import Drives
from interwind_service.response.switched.device import Device, SaturableBranch, device_of, is_smooth
from interwind_service.response.switched.ideal_limit import IdealLimit, winding_factor

FloatArray = NDArray[np.float64]
Mode = tuple[int, ...]


@dataclass(frozen=True, slots=True, eq=False)
class Tableau:
    """The equations that do not depend on device modes, and the devices whose rows do.

    ``column_of_node`` (nodes,) -1 at zero nodes; ``column_of_current`` (branches,); ``row_of_branch`` (branches,);
    ``state_of_branch`` branch -> state columns that store its energy (a winding group shares its rows).
    """

    topology: Topology
    drives: Drives
    limit: IdealLimit
    M: FloatArray
    N: FloatArray
    F: FloatArray
    P: FloatArray
    column_of_node: NDArray[np.int64]
    column_of_current: NDArray[np.int64]
    row_of_branch: NDArray[np.int64]
    factors: dict[int, tuple[slice, FloatArray]]
    capacitor_state: dict[int, int]
    devices: tuple[Device, ...]

    @property
    def unknowns(self) -> int:
        """Number of unknowns s."""
        return self.M.shape[0]

    @property
    def states(self) -> int:
        """Number of states x."""
        return self.N.shape[1]

    def voltage_row(self, start: int, finish: int) -> FloatArray:
        """Return the row over s that gives the voltage from one node to another."""
        row = np.zeros(self.unknowns)
        for node, sign in ((start, 1.0), (finish, -1.0)):
            if self.column_of_node[node] >= 0:
                row[self.column_of_node[node]] += sign
        return row

    def branch_voltage_row(self, branch: int) -> FloatArray:
        """Return the row over s that gives the voltage of a branch."""
        return self.voltage_row(self.topology.start[branch], self.topology.finish[branch])

    def stand_ins(self, mode: Mode) -> tuple[FloatArray, FloatArray]:
        """Return what stands for ideal elements: weights (q,) and rows over s (q, m); power Σ weight |row s|²."""
        weight, rows = [], []

        def put(ohm: float, branch: int) -> None:
            row = np.zeros(self.unknowns)
            row[self.column_of_current[branch]] = 1.0
            weight.append(ohm)
            rows.append(row)

        for device, own in zip(self.devices, mode, strict=True):
            if device.ideal_in(own):
                put(-device.law(own)[1], device.branch)
        for branch in np.flatnonzero(self.limit.series_ohm):
            put(float(self.limit.series_ohm[branch]), int(branch))
        for branch in self.topology.of_kind(Kind.RESISTOR, Kind.INDUCTOR):
            if self.topology.value[branch] == 0.0:
                put(self.limit.short_ohm, int(branch))
        for group in self.topology.groups:
            added = (self.limit.winding_resistance(group) - group.resistance_ohm).diagonal()
            for k in np.flatnonzero(added):
                put(float(added[k]), int(group.branches[k]))
        for node, leak_s in self.limit.leaks:
            row = np.zeros(self.unknowns)
            row[self.column_of_node[node]] = 1.0
            weight.append(leak_s)
            rows.append(row)
        return np.array(weight), np.array(rows).reshape(len(rows), self.unknowns)

    def with_modes(self, mode: Mode) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Return M, N, F with the device rows of these modes filled in."""
        M, N, F = self.M.copy(), self.N.copy(), self.F.copy()
        for device, own in zip(self.devices, mode, strict=True):
            row = self.row_of_branch[device.branch]
            voltage, current, state, constant = device.law(own)
            M[row] = voltage * self.branch_voltage_row(device.branch)
            M[row, self.column_of_current[device.branch]] += current
            if device.state >= 0:
                N[row, device.state] = state
            F[row, 0] = constant
        return M, N, F


def tableau_of(topology: Topology, drives: Drives, limit: IdealLimit) -> Tableau:
    """Assemble the tableau of a numbered network; ``limit`` says what stands in for ideal elements."""
    return _Assembly(topology, drives, limit).tableau()


class _Assembly:
    """The rows and columns of a tableau while they are filled in, one kind of element after another."""

    def __init__(self, topology: Topology, drives: Drives, limit: IdealLimit) -> None:
        self.topology, self.drives, self.limit = topology, drives, limit
        self.members = self._inductive()
        kept = np.setdiff1d(np.arange(len(topology.nodes)), topology.parts.reference)
        self.column_of_node = np.full(len(topology.nodes), -1)
        self.column_of_node[kept] = np.arange(len(kept))
        self.nodes, self.branches = len(kept), len(topology.kind)
        self.current = self.row = self.nodes + np.arange(self.branches)
        self.capacitors = [int(k) for k in topology.of_kind(Kind.CAPACITOR) if topology.value[k] > 0.0]
        rates = sum(S.shape[1] for _, S, _ in self.members)
        self.size = self.nodes + self.branches + rates
        self.states = rates + len(self.capacitors) + len(topology.of_kind(Kind.SATURABLE))
        self.M, self.N = np.zeros((self.size, self.size)), np.zeros((self.size, self.states))
        self.F = np.zeros((self.size, len(drives.exponent)), dtype=complex)
        self.P = np.zeros((self.states, self.size))

    def tableau(self) -> Tableau:
        """Fill in all rows."""
        for branch in range(self.branches):  # Kirchhoff's current law, currents leaving the node
            self.M[: self.nodes, self.current[branch]] = self.voltage(branch)[: self.nodes]
        for node, leak_s in self.limit.leaks:
            self.M[self.column_of_node[node], self.column_of_node[node]] += leak_s
        factors = self._windings()
        capacitor_state = self._capacitors(sum(S.shape[1] for _, S, _ in self.members))
        devices = self._devices(self.states - len(self.topology.of_kind(Kind.SATURABLE)))
        self._sources()
        self._resistive()
        self._transformers()
        self._controlled()
        return Tableau(
            self.topology, self.drives, self.limit, self.M, self.N, self.F, self.P, self.column_of_node, self.current,
            self.row, factors, capacitor_state, devices,
        )  # fmt: skip

    def voltage(self, branch: int) -> FloatArray:
        """Return the row over s that gives the voltage of a branch."""
        row = np.zeros(self.size)
        for node, sign in ((self.topology.start[branch], 1.0), (self.topology.finish[branch], -1.0)):
            if self.column_of_node[node] >= 0:
                row[self.column_of_node[node]] += sign
        return row

    def _inductive(self) -> list[tuple[NDArray[np.int64], FloatArray, FloatArray]]:
        """Return (branches, S, R) of every winding group and inductor."""
        found = [(g.branches, winding_factor(g), self.limit.winding_resistance(g)) for g in self.topology.groups]
        for branch in self.topology.of_kind(Kind.INDUCTOR):
            value = self.topology.value[branch]
            if value > 0.0:
                found.append((np.array([branch]), np.sqrt([[value]]), np.zeros((1, 1))))
        return found

    def _windings(self) -> dict[int, tuple[slice, FloatArray]]:
        """V − R i − S dz/dt = 0 and S' i = z."""
        factors: dict[int, tuple[slice, FloatArray]] = {}
        state = 0
        for own, S, R in self.members:
            rank = S.shape[1]
            rate = self.nodes + self.branches + np.arange(state, state + rank)
            for k, branch in enumerate(own):
                self.M[self.row[branch]] = self.voltage(int(branch))
                self.M[self.row[branch], self.current[own]] -= R[k]
                self.M[self.row[branch], rate] -= S[k]
                factors[int(branch)] = (slice(state, state + rank), S[k])
            for k in range(rank):
                self.M[rate[k], self.current[own]] = S[:, k]
                self.N[rate[k], state + k] = 1.0
                self.P[state + k, rate[k]] = 1.0
            state += rank
        return factors

    def _capacitors(self, first: int) -> dict[int, int]:
        """V − r i = y / sqrt(C) and dy/dt = i / sqrt(C)."""
        place = {}
        for state, branch in enumerate(self.capacitors, start=first):
            root = np.sqrt(self.topology.value[branch])
            self.M[self.row[branch]] = self.voltage(branch)
            self.M[self.row[branch], self.current[branch]] -= self.limit.series_ohm[branch]
            self.N[self.row[branch], state] = 1.0 / root
            self.P[state, self.current[branch]] = 1.0 / root
            place[branch] = state
        return place

    def _devices(self, first: int) -> tuple[Device, ...]:
        """Their rows depend on their modes; smooth laws have none, and are filled in by the nonlinear solver."""
        devices, state = [], first
        for branch in self.topology.of_kind(Kind.SWITCH, Kind.DIODE, Kind.SATURABLE).tolist():
            if is_smooth(self.topology, branch):
                continue
            saturable = self.topology.kind[branch] == Kind.SATURABLE
            device = device_of(self.topology, branch, state if saturable else -1, self.limit)
            if isinstance(device, SaturableBranch):
                self.P[state] = self.voltage(branch) / device.root
                state += 1
            devices.append(device)
        return tuple(devices)

    def _sources(self) -> None:
        for position, branch in enumerate(self.topology.input_branch.tolist()):
            if self.topology.kind[branch] == Kind.VOLTAGE_SOURCE:
                self.M[self.row[branch]] = self.voltage(branch)
            else:
                self.M[self.row[branch], self.current[branch]] = 1.0
            self.F[self.row[branch]] = self.drives.U[position]

    def _resistive(self) -> None:
        """Resistors, and what a value of 0 turns inductors and capacitors into: a short, nothing."""
        for branch in range(self.branches):
            kind, value = self.topology.kind[branch], self.topology.value[branch]
            if kind == Kind.RESISTOR or (kind == Kind.INDUCTOR and value == 0.0):
                self.M[self.row[branch]] = self.voltage(branch)
                self.M[self.row[branch], self.current[branch]] = -(value if value > 0.0 else self.limit.short_ohm)
            elif kind == Kind.CAPACITOR and value == 0.0:
                self.M[self.row[branch], self.current[branch]] = 1.0

    def _transformers(self) -> None:
        for pair in self.topology.transformers:
            self.M[self.row[pair.first]] = self.voltage(pair.first) - pair.ratio * self.voltage(pair.second)
            self.M[self.row[pair.first], self.current[pair.first]] -= self.limit.series_ohm[pair.first]
            self.M[self.row[pair.second], self.current[pair.second]] = 1.0
            self.M[self.row[pair.second], self.current[pair.first]] = pair.ratio

    def _controlled(self) -> None:
        for control in self.topology.controls:
            row = self.row[control.branch]
            if self.topology.kind[control.branch] == Kind.CONTROLLED_VOLTAGE:
                self.M[row] = self.voltage(control.branch)
            else:
                self.M[row, self.current[control.branch]] = 1.0
            if control.sensed >= 0:
                self.M[row, self.current[control.sensed]] -= control.gain
                continue
            for node, sign in ((control.start, 1.0), (control.finish, -1.0)):
                if self.column_of_node[node] >= 0:
                    self.M[row, self.column_of_node[node]] -= sign * control.gain
