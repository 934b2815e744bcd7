"""The resolvent of a network at one real s0, in energy coordinates: K = (s0 − A)⁻¹ without ever forming A.

One solve in the tree of the frequency s0 gives what unit states and unit inputs do there,

    q(s) = (I + (s − s0) K)⁻¹ r,   y(s) = y_r + (s − s0) (Y_1 − H q(s)),

for any branch voltage, branch current or node voltage y. Modes near s0 and slower keep all their digits; A itself,
formed from element values that span twelve decades, would lose them.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.response.equations.factor import solve
from interwind_service.response.equations.frequency_tree import Drive, FrequencyTree, frequency_tree
from interwind_service.response.equations.reduction import StateBasis
from interwind_service.response.equations.roles import Role, Roles

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Resolvent:
    """What unit states and unit inputs do at s0, 1/s.

    ``K`` (n, n), ``r`` (n, inputs); ``H`` (signals, n) and ``y`` (signals, inputs), the signals being the branch
    voltages, the branch currents and the node voltages, in this order; ``residual`` and ``condition`` of the solve in
    ``tree``.
    """

    s0: float
    tree: FrequencyTree
    K: FloatArray
    r: FloatArray
    H: FloatArray
    y: FloatArray
    residual: float
    condition: float


def drives_of(topology: Topology) -> tuple[Drive, ...]:
    """Return one drive an input: the voltage of a source, or the current it takes from its first node to its second."""
    return tuple(
        Drive(int(k), int(topology.start[k]), int(topology.finish[k]))
        if topology.kind[k] == Kind.CURRENT_SOURCE
        else Drive(int(k))
        for k in topology.input_branch
    )


def resolvent(basis: StateBasis, roles: Roles, s0: float) -> Resolvent:
    """Solve for every state of the basis and every input at s0.

    Raises
    ------
    InvalidNetwork : the equations are singular at s0.
    """
    storage = basis.storage
    topology, coordinates = storage.topology, storage.coordinates
    tree = frequency_tree(topology, coordinates, roles, s0, drives_of(topology))
    inputs, states = len(tree.drives), basis.X.shape[1]
    M = tree.matrix(np.array([s0]))[0]
    right = np.zeros((len(M), inputs + states))
    right[:, :inputs] = -tree.J - M[:, tree.known] @ tree.imposed
    right[:, inputs:] = _initial(tree, basis, s0)
    answer = solve(np.take(M, tree.unknown, axis=1)[None], right[None])
    if not np.isfinite(answer.x).all():
        raise InvalidNetwork.at("elements", f"no unique solution at s = {s0:.3g} 1/s", reason="SINGULAR_NETWORK")
    z = np.zeros((M.shape[1], inputs + states))
    z[tree.unknown] = answer.x[0]
    z[tree.known, :inputs] = tree.imposed
    signals = _signals(tree, basis, s0, z)
    values = np.vstack(
        (
            signals[storage.capacitors],
            signals[len(topology.kind) + storage.inductors],
            *(z[columns][: own.rank] for columns, own in zip(tree.groups, coordinates, strict=True)),
        )
    )
    q = basis.coordinates(values)
    return Resolvent(
        s0, tree, q[:, inputs:], q[:, :inputs], signals[:, inputs:], signals[:, :inputs],
        float(answer.residual[0]), float(answer.condition[0]),
    )  # fmt: skip


def _initial(tree: FrequencyTree, basis: StateBasis, s0: float) -> FloatArray:
    """Right sides of unit states: charges enter the current law, fluxes the windings, both what senses their flow."""
    storage = basis.storage
    value = storage.topology.value
    right = np.zeros((len(tree.M[0]), basis.X.shape[1]))
    cuts = len(tree.Q)
    charge = value[storage.capacitors][:, None] * basis.X[storage.capacitor_rows]
    right[:cuts] = tree.Q[:, storage.capacitors] @ charge
    right[:cuts] -= tree.Q[:, storage.inductors] @ basis.X[storage.inductor_rows] / s0
    for columns, rows, own in zip(tree.groups, storage.groups, storage.coordinates, strict=True):
        right[columns.start : columns.start + own.rank] = own.S[: own.rank, : own.rank] @ basis.X[rows]
    charges = dict(zip(storage.capacitors.tolist(), charge, strict=True))
    currents = dict(zip(storage.inductors.tolist(), basis.X[storage.inductor_rows] / s0, strict=True))
    first = len(right) - len(storage.topology.controls)
    for row, control in enumerate(storage.topology.controls, first):
        if control.sensed in charges:
            right[row] -= control.gain * charges[control.sensed]
        elif control.sensed in currents:
            right[row] += control.gain * currents[control.sensed]
    return right


def _signals(tree: FrequencyTree, basis: StateBasis, s0: float, z: FloatArray) -> FloatArray:
    """Branch voltages, branch currents and node voltages of solutions z (columns, inputs + states)."""
    storage, roles, topology = basis.storage, tree.roles, tree.topology
    inputs = len(tree.drives)
    tree_voltage = z[: len(tree.tree)]
    voltage = tree.Q.T @ tree_voltage
    own = roles.conductance + s0 * roles.capacitance + roles.reciprocal_inductance / s0
    current = own[:, None] * voltage
    current[storage.capacitors, inputs:] -= (
        topology.value[storage.capacitors][:, None] * basis.X[storage.capacitor_rows]
    )
    current[storage.inductors, inputs:] += basis.X[storage.inductor_rows] / s0
    for group, columns, coordinates in zip(topology.groups, tree.groups, storage.coordinates, strict=True):
        current[group.branches] = coordinates.currents(z[columns])
    carried = np.flatnonzero(tree.current >= 0)
    current[carried] = z[tree.current[carried]]
    for transformer in topology.transformers:
        current[transformer.second] = -transformer.ratio * current[transformer.first]
    for column, drive in enumerate(tree.drives):
        if roles.role[drive.branch] == Role.CURRENT:
            current[drive.branch] = 0.0
            current[drive.branch, column] = 1.0
    return np.vstack((voltage, current, tree.paths @ tree_voltage))
