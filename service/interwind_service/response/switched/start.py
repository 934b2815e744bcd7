"""Where a switched run starts: stated voltages and currents, residual fluxes, or the state of rest."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind.model.response import Initial, SteadyStart
from interwind_service.response.request.stated import stated_of
from interwind_service.response.switched.device import has_smooth
from interwind_service.response.switched.rest import residual_state, smooth_rest, switched_rest
from interwind_service.response.switched.switched_network import SwitchedNetwork

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
        return smooth_rest(network) if has_smooth(network.tableau.topology) else switched_rest(network)
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
