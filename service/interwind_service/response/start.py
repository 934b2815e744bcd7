"""Where a switched run starts: stated voltages and currents, residual fluxes, or the state of rest."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind.model.response import Initial, SteadyStart
from interwind_service import tolerances as tol
from interwind_service.response.device import SaturableBranch
from interwind_service.response.stated import stated_of
from interwind_service.response.switched_network import SwitchedNetwork
from interwind_service.response.tableau import Mode, Tableau

FloatArray = NDArray[np.float64]


def start_state(network: SwitchedNetwork, initial: Initial) -> FloatArray:
    """Return the state x at t = 0 in energy units; whatever is not stated is 0, a saturable branch its residual flux.

    Raises
    ------
    InvalidRequest : as `stated_of`.
    InvalidNetwork : no state of rest (``SteadyStart``).
    """
    stated = stated_of(network.tableau.topology, initial)
    if isinstance(stated, SteadyStart):
        return _at_rest(network)
    tableau = network.tableau
    x = residual_state(tableau)
    flux = np.zeros(tableau.states)
    for branch, value in stated.items():
        if branch in tableau.capacitor_state:
            x[tableau.capacitor_state[branch]] = np.sqrt(tableau.topology.value[branch]) * value
        elif branch in tableau.factors:
            columns, row = tableau.factors[branch]
            flux[columns] += row * value  # z = S' i
        else:
            device = next(d for d in tableau.devices if d.branch == branch)
            x[device.state] = (
                float(np.interp(abs(value), device.current_a, device.flux_wb)) * np.sign(value) / device.root
            )
    return x + flux


def residual_state(tableau: Tableau) -> FloatArray:
    """Return the state with everything at 0 but the residual fluxes."""
    x = np.zeros(tableau.states)
    for device in tableau.devices:
        if isinstance(device, SaturableBranch):
            x[device.state] = device.residual_wb / device.root
    return x


def _at_rest(network: SwitchedNetwork) -> FloatArray:
    """Return x with dx/dt = 0 under the drives at 0, the diodes found with it."""
    tableau = network.tableau
    w = tableau.drives.state(0.0)
    mode: Mode = network.mode_at(network.start_mode(residual_state(tableau)), 0.0, float(network.breakpoint_s[1]))
    x = np.zeros(tableau.states)
    for _ in range(tol.PIVOTS):
        M, N, F = tableau.with_modes(mode)
        size = tableau.unknowns
        system = np.zeros((size + tableau.states, size + tableau.states))
        system[:size, :size], system[:size, size:], system[size:, :size] = M, -N, tableau.P
        right = np.concatenate([(F @ w).real, np.zeros(tableau.states)])
        row = np.abs(system).max(axis=1)
        row[row == 0.0] = 1.0  # an element with both ends on one node asks nothing
        solution, *_ = np.linalg.lstsq(system / row[:, None], right / row, rcond=tol.REST_RANK)
        x = solution[size:]
        following = network.consistent(mode, x, w)
        following = tuple(
            device.mode_at(device.root * x[device.state]) if isinstance(device, SaturableBranch) else own
            for device, own in zip(tableau.devices, following, strict=True)
        )
        if following == mode:
            return x
        mode = following
    raise InvalidNetwork.at("initial", "no state of rest was found; start from stated values instead of SteadyStart")
