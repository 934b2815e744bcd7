"""Combinations of device states that no ideal network survives, and the elements that make them.

A voltage source closed on itself by ideal closed switches has no finite current; a current source that ideal open
switches leave without a path has no finite voltage. The stand-ins of ideal elements would give some number for both.
"""

from __future__ import annotations

import numpy as np

from interwind.errors import InvalidNetwork
from interwind_service.network.forest import components, spanning_forest
from interwind_service.network.kind import Kind
from interwind_service.response.switched.device import LinearDiode, TimedSwitch
from interwind_service.response.switched.tableau import Mode, Tableau


def shorted_sources(tableau: Tableau, mode: Mode) -> tuple[int, ...]:
    """Return the voltage sources (branches) whose two ends ideally conducting devices join."""
    topology, links = tableau.topology, _links(tableau, mode)
    of_node = components(len(topology.nodes), topology.start[links], topology.finish[links])
    sources = topology.of_kind(Kind.VOLTAGE_SOURCE)
    return tuple(int(k) for k in sources if of_node[topology.start[k]] == of_node[topology.finish[k]])


def refuse_short(tableau: Tableau, mode: Mode, branch: int, time_s: float) -> None:
    """Raise InvalidNetwork for a shorted voltage source, naming the devices that short it."""
    topology = tableau.topology
    names = _path(tableau, _links(tableau, mode), int(topology.start[branch]), int(topology.finish[branch]))
    raise InvalidNetwork.at(
        f"elements[{topology.element[branch]}]",
        f"{topology.names[branch]!r} is shorted at {time_s:.9g} s by {', '.join(map(repr, names))}, all ideal; "
        "give one of them its resistance or put time between them",
        reason="SOURCE_SHORTED",
    )


def _links(tableau: Tableau, mode: Mode) -> np.ndarray:
    topology = tableau.topology
    closed = [
        device.branch
        for device, own in zip(tableau.devices, mode, strict=True)
        if own == 1 and isinstance(device, TimedSwitch | LinearDiode) and device.ideal_in(1)
    ]
    wires = [int(k) for k in topology.of_kind(Kind.RESISTOR) if topology.value[k] == 0.0]
    return np.array([*wires, *closed], dtype=np.int64)


def _path(tableau: Tableau, links: np.ndarray, start: int, finish: int) -> list[str]:
    """Return the names along the links between two nodes."""
    topology = tableau.topology
    kept = links[spanning_forest(len(topology.nodes), topology.start[links], topology.finish[links], range(len(links)))]
    for branch in kept.tolist():  # a link that can go without parting the two nodes is not on the path
        rest = kept[kept != branch]
        of_node = components(len(topology.nodes), topology.start[rest], topology.finish[rest])
        if of_node[start] == of_node[finish]:
            kept = rest
    return [topology.names[k] for k in kept.tolist()]


def stranded_sources(tableau: Tableau, mode: Mode) -> tuple[int, ...]:
    """Return the current sources (branches) whose two ends only ideal open devices join."""
    topology = tableau.topology
    open_now = {
        device.branch for device, own in zip(tableau.devices, mode, strict=True) if own == 0 and device.ideal_in(0)
    }
    sources = topology.of_kind(Kind.CURRENT_SOURCE)
    joined = np.array([k for k in range(len(topology.kind)) if k not in open_now and k not in sources], dtype=np.int64)
    of_node = components(len(topology.nodes), topology.start[joined], topology.finish[joined])
    return tuple(int(k) for k in sources if of_node[topology.start[k]] != of_node[topology.finish[k]])


def refuse_stranded(tableau: Tableau, mode: Mode, branch: int, time_s: float) -> None:
    """Raise InvalidNetwork for a current source without a path, naming the open devices."""
    names = [device.name for device, own in zip(tableau.devices, mode, strict=True) if own == 0 and device.ideal_in(0)]
    raise InvalidNetwork.at(
        f"elements[{tableau.topology.element[branch]}]",
        f"{tableau.topology.names[branch]!r} has no path at {time_s:.9g} s while {', '.join(map(repr, names))} are "
        "open, all ideal; give one of them its blocking resistance, or the current another path",
        reason="CURRENT_WITHOUT_PATH",
    )
