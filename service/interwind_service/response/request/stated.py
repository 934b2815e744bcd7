"""The states a run is told to start from, by branch: read, and held against each other, before anything is computed."""

from __future__ import annotations

import math
from collections.abc import Sequence

from interwind.errors import InvalidRequest
from interwind.model import observables as ob
from interwind.model.finding import Finding, Severity
from interwind.model.response import Initial, SteadyStart
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology

Stated = dict[int, float] | SteadyStart
_CARRIES_CURRENT = (Kind.INDUCTOR, Kind.WINDING, Kind.SATURABLE)


def stated_of(topology: Topology, initial: Initial) -> Stated:
    """Return capacitor voltages, V, and inductor and winding currents, A, by branch; what is not stated is 0.

    Raises
    ------
    InvalidRequest : an observable that is no state, a value that is not finite, a value for something that stores
        nothing, or one state with two values, by ``initial[i]``.
    """
    if isinstance(initial, SteadyStart):
        return initial
    stated: dict[int, float] = {}
    told: dict[int, str] = {}
    for position, (item, given) in enumerate((initial or {}).items()):
        path, value = f"initial[{position}]", float(given)
        branch = _branch(topology, item, path)
        if not math.isfinite(value):
            raise InvalidRequest.at(path, f"{value!r} found for {item!r}; a finite number is expected")
        if stated.get(branch, value) != value:
            raise InvalidRequest.at(
                path,
                f"{value!r} found for {item!r}, but {told[branch]}, the same quantity, is {stated[branch]!r}: "
                f"{abs(value - stated[branch]):.6g} apart; state it once",
                reason="CONTRADICTORY_START",
            )
        if value != 0.0 and topology.value[branch] == 0.0:
            raise InvalidRequest.at(path, f"{value!r} found for {item!r}; the element is 0 and stores nothing")
        if topology.value[branch] == 0.0:
            continue
        stated[branch], told[branch] = value, f"{path}, {item!r}"
    return stated


def inconsistent_start(moved: Sequence[str], lost_j: float) -> Finding:
    """Say that the stated start contradicts the network, what moved to make it consistent, and what that cost."""
    return Finding(
        code="INCONSISTENT_START",
        severity=Severity.INFO,
        field="initial",
        message=f"the state given for t = 0 contradicts the network; with charge and flux kept it jumps: "
        f"{'; '.join(moved)}; {lost_j:.6g} J are lost in the jump",
        measured=lost_j,
        limit=0.0,
    )


def _branch(topology: Topology, item: object, path: str) -> int:
    """Return the branch that an initial value belongs to."""
    if isinstance(item, ob.WindingCurrent):
        branch = topology.winding(item.name, item.label)
        if branch < 0:
            raise InvalidRequest.at(path, f"{item!r} found; there is no such winding in the network")
        return branch
    if isinstance(item, ob.ElementVoltage | ob.ElementCurrent):
        branches = topology.branches_of(item.name)
        if not len(branches):
            raise InvalidRequest.at(path, f"{item!r} found; there is no such element in the network")
        kinds = (Kind.CAPACITOR,) if isinstance(item, ob.ElementVoltage) else _CARRIES_CURRENT
        if len(branches) == 1 and topology.kind[branches[0]] in kinds:
            return int(branches[0])
    raise InvalidRequest.at(
        path, f"{item!r} found; it is no state: state voltages of capacitors and currents of inductors or windings"
    )
