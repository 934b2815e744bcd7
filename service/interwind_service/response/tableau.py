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
from interwind_service.response.device import Device, device_of, is_smooth
from interwind_service.response.drives import Drives
from interwind_service.response.ideal_limit import IdealLimit, winding_factor

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
    branches = len(topology.kind)
    zero = np.zeros(len(topology.nodes), dtype=bool)
    zero[topology.parts.reference] = True
    column_of_node = np.full(len(topology.nodes), -1)
    column_of_node[~zero] = np.arange(np.count_nonzero(~zero))
    nodes = int(np.count_nonzero(~zero))
    current = nodes + np.arange(branches)

    factors: dict[int, tuple[slice, FloatArray]] = {}
    members: list[tuple[NDArray[np.int64], FloatArray, FloatArray]] = []
    for group in topology.groups:
        members.append((group.branches, winding_factor(group), limit.winding_resistance(group)))
    for branch in topology.of_kind(Kind.INDUCTOR):
        if topology.value[branch] > 0.0:
            members.append((np.array([branch]), np.sqrt([[topology.value[branch]]]), np.zeros((1, 1))))
    rates = sum(S.shape[1] for _, S, _ in members)
    size = nodes + branches + rates
    capacitors = [int(k) for k in topology.of_kind(Kind.CAPACITOR) if topology.value[k] > 0.0]
    saturable = [int(k) for k in topology.of_kind(Kind.SATURABLE)]
    states = rates + len(capacitors) + len(saturable)
    M, N = np.zeros((size, size)), np.zeros((size, states))
    F, P = np.zeros((size, len(drives.exponent)), dtype=complex), np.zeros((states, size))

    def voltage(branch: int) -> FloatArray:
        row = np.zeros(size)
        for node, sign in ((topology.start[branch], 1.0), (topology.finish[branch], -1.0)):
            if column_of_node[node] >= 0:
                row[column_of_node[node]] += sign
        return row

    for branch in range(branches):  # Kirchhoff's current law, currents leaving the node
        M[:nodes, current[branch]] = voltage(branch)[:nodes]
    for node, leak_s in limit.leaks:
        M[column_of_node[node], column_of_node[node]] += leak_s
    row_of_branch = nodes + np.arange(branches)

    state = 0
    for own, S, R in members:
        rank = S.shape[1]
        columns = slice(state, state + rank)
        rate = nodes + branches + np.arange(state, state + rank)
        for k, branch in enumerate(own):
            M[row_of_branch[branch]] = voltage(branch)
            M[row_of_branch[branch], current[own]] -= R[k]
            M[row_of_branch[branch], rate] -= S[k]
            factors[int(branch)] = (columns, S[k])
        for k in range(rank):
            M[rate[k], current[own]] = S[:, k]
            N[rate[k], state + k] = 1.0
            P[state + k, rate[k]] = 1.0
        state += rank
    capacitor_state: dict[int, int] = {}
    for branch in capacitors:
        root = np.sqrt(topology.value[branch])
        row = row_of_branch[branch]
        M[row] = voltage(branch)
        M[row, current[branch]] -= limit.series_ohm[branch]
        N[row, state] = 1.0 / root
        P[state, current[branch]] = 1.0 / root
        capacitor_state[branch] = state
        state += 1
    devices = []
    for branch in topology.of_kind(Kind.SWITCH, Kind.DIODE, Kind.SATURABLE):
        if is_smooth(topology, int(branch)):
            continue  # no modes: its row is filled in by the nonlinear solver
        own_state = -1
        if topology.kind[branch] == Kind.SATURABLE:
            own_state = state
            state += 1
        device = device_of(topology, int(branch), own_state, limit)
        if own_state >= 0:
            P[own_state] = voltage(int(branch)) / device.root
        devices.append(device)

    U = drives.U
    for position, branch in enumerate(topology.input_branch):
        row = row_of_branch[branch]
        if topology.kind[branch] == Kind.VOLTAGE_SOURCE:
            M[row] = voltage(int(branch))
        else:
            M[row, current[branch]] = 1.0
        F[row] = U[position]
    for branch in range(branches):
        row = row_of_branch[branch]
        kind, value = topology.kind[branch], topology.value[branch]
        if kind == Kind.RESISTOR or (kind == Kind.INDUCTOR and value == 0.0):
            M[row] = voltage(branch)
            M[row, current[branch]] = -(value if value > 0.0 else limit.short_ohm)
        elif kind == Kind.CAPACITOR and value == 0.0:
            M[row, current[branch]] = 1.0
    for pair in topology.transformers:
        M[row_of_branch[pair.first]] = voltage(pair.first) - pair.ratio * voltage(pair.second)
        M[row_of_branch[pair.first], current[pair.first]] -= limit.series_ohm[pair.first]
        M[row_of_branch[pair.second], current[pair.second]] = 1.0
        M[row_of_branch[pair.second], current[pair.first]] = pair.ratio
    for control in topology.controls:
        row = row_of_branch[control.branch]
        if topology.kind[control.branch] == Kind.CONTROLLED_VOLTAGE:
            M[row] = voltage(control.branch)
        else:
            M[row, current[control.branch]] = 1.0
        if control.sensed >= 0:
            M[row, current[control.sensed]] -= control.gain
        else:
            for node, sign in ((control.start, 1.0), (control.finish, -1.0)):
                if column_of_node[node] >= 0:
                    M[row, column_of_node[node]] -= sign * control.gain
    return Tableau(
        topology, drives, limit, M, N, F, P, column_of_node, current, row_of_branch, factors, capacitor_state,
        tuple(devices),
    )  # fmt: skip
