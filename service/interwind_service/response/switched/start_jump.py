"""What a switched run does to the state it was told to start from: its jump at 0, read off the trajectory."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind.model.finding import Finding
from interwind_service import tolerances as tol
from interwind_service.network.kind import Kind
from interwind_service.response.request.stated import inconsistent_start
from interwind_service.response.switched.device import SaturableBranch
from interwind_service.response.switched.tableau import Tableau
from interwind_service.response.switched.trajectory import Rows, Trajectory

FloatArray = NDArray[np.float64]


def start_findings(tableau: Tableau, record: Trajectory, x: FloatArray, settle_s: float) -> tuple[Finding, ...]:
    """Name the states that jump at 0, x (n,) being those stated; ½ |x₊ − x|² is lost, what is smaller is rounding."""
    states = np.eye(tableau.unknowns + tableau.states)[tableau.unknowns :]
    rows = {piece.number: Rows(states, np.zeros(tableau.states)) for piece in record.distinct()}
    after = record.samples(rows, np.zeros(1), settle_s, lambda _, sampled: sampled)[0]
    energy = 0.5 * (after - x) ** 2
    least = tol.INCONSISTENT_START * 0.5 * max(float(x @ x), float(after @ after))
    if energy.sum() <= least:
        return ()
    moved = [(float(energy[own].sum()), told) for own, told in _described(tableau, x, after)]
    moved.sort(reverse=True)
    return (inconsistent_start([told for lost, told in moved[:4] if lost > least], float(energy.sum())),)


def _described(tableau: Tableau, x: FloatArray, after: FloatArray) -> list[tuple[slice, str]]:
    """Return the states of each store, and what to say of their jump."""
    topology = tableau.topology
    found = []
    for branch, state in tableau.capacitor_state.items():
        root, own = float(np.sqrt(topology.value[branch])), slice(state, state + 1)
        found.append((own, f"{topology.names[branch]} from {x[state] / root:.6g} to {after[state] / root:.6g} V"))
    for branch in topology.of_kind(Kind.INDUCTOR).tolist():
        if branch in tableau.factors:
            own, root = tableau.factors[branch][0], float(np.sqrt(topology.value[branch]))
            before, then = float(x[own][0]) / root, float(after[own][0]) / root
            found.append((own, f"{topology.names[branch]} from {before:.6g} to {then:.6g} A"))
    for group in topology.groups:
        found.append((tableau.factors[int(group.branches[0])][0], f"the currents of {group.name}"))
    for device in tableau.devices:
        if isinstance(device, SaturableBranch):
            found.append((slice(device.state, device.state + 1), f"the flux of {device.name}"))
    return found
