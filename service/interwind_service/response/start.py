"""Where a switched run starts: stated voltages and currents, residual fluxes, or the state of rest."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork, InvalidRequest
from interwind.model import observables as ob
from interwind.model.response import Initial, SteadyStart
from interwind_service import tolerances as tol
from interwind_service.network.kind import Kind
from interwind_service.response.device import SaturableBranch
from interwind_service.response.switched_network import SwitchedNetwork
from interwind_service.response.tableau import Mode, Tableau

FloatArray = NDArray[np.float64]


def start_state(network: SwitchedNetwork, initial: Initial) -> FloatArray:
    """Return the state x at t = 0 in energy units; whatever is not stated is 0, a saturable branch its residual flux.

    Raises
    ------
    InvalidRequest : an observable that is no state, or a value that is not finite, by its path.
    InvalidNetwork : no state of rest (``SteadyStart``).
    """
    if isinstance(initial, SteadyStart):
        return _at_rest(network)
    tableau = network.tableau
    x = residual_state(tableau)
    currents: dict[int, float] = {}
    for position, (item, value) in enumerate((initial or {}).items()):
        path = f"initial[{position}]"
        if not np.isfinite(value):
            raise InvalidRequest.at(path, f"{value!r} found for {item!r}; a finite number is expected")
        branch = _branch(tableau, item, path)
        if branch in tableau.capacitor_state:
            x[tableau.capacitor_state[branch]] = np.sqrt(tableau.topology.value[branch]) * value
        elif branch in tableau.factors:
            currents[branch] = float(value)
        else:
            device = next(d for d in tableau.devices if d.branch == branch)
            x[device.state] = (
                float(np.interp(abs(value), device.current_a, device.flux_wb)) * np.sign(value) / device.root
            )
    for branch, value in currents.items():
        columns, row = tableau.factors[branch]
        x[columns] += row * value  # z = S' i
    return x


def residual_state(tableau: Tableau) -> FloatArray:
    """Return the state with everything at 0 but the residual fluxes."""
    x = np.zeros(tableau.states)
    for device in tableau.devices:
        if isinstance(device, SaturableBranch):
            x[device.state] = device.residual_wb / device.root
    return x


def _branch(tableau: Tableau, item: object, path: str) -> int:
    topology = tableau.topology
    if isinstance(item, ob.WindingCurrent):
        branch = topology.winding(item.name, item.label)
        if branch >= 0:
            return branch
    elif isinstance(item, ob.ElementVoltage | ob.ElementCurrent):
        branches = topology.branches_of(item.name)
        kinds = (
            (Kind.CAPACITOR,) if isinstance(item, ob.ElementVoltage) else (Kind.INDUCTOR, Kind.WINDING, Kind.SATURABLE)
        )
        if len(branches) == 1 and topology.kind[branches[0]] in kinds:
            return int(branches[0])
    raise InvalidRequest.at(
        path,
        f"{item!r} is no state; state the voltage of a capacitor or the current of an inductor or winding",
    )


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
