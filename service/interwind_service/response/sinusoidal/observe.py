"""What may be asked of a network, and the answer from its phasors."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork, InvalidRequest, field_path
from interwind.model import observables as ob
from interwind.model.elements import Windings
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.response.sinusoidal.phasors import Readable

ComplexArray = NDArray[np.complex128]


def resolve(topology: Topology, observe: Sequence[ob.Observable] | None) -> tuple[ob.Observable, ...]:
    """Return what is asked for, each checked against the network; None = all node voltages and winding currents.

    Raises
    ------
    InvalidRequest : an unknown node, element or winding, by its path such as ``observe[2].node``.
    """
    if observe is None:
        windings = topology.of_kind(Kind.WINDING)
        nodes: list[ob.Observable] = [ob.NodeVoltage(name) for name in topology.nodes]
        return (*nodes, *(ob.WindingCurrent(topology.names[k], topology.labels[k]) for k in windings))
    for position, item in enumerate(observe):
        with field_path(f"observe[{position}]"):
            _check(topology, item)
    return tuple(observe)


def _check(topology: Topology, item: ob.Observable) -> None:
    if not isinstance(item, ob.OBSERVABLES):
        raise InvalidRequest.at("", f"{type(item).__name__} found; an observable is expected")
    if isinstance(item, ob.NodeVoltage):
        for field in ("node", "to"):
            name = getattr(item, field)
            if (field, name) != ("to", None) and topology.node(name) < 0:
                raise InvalidRequest.at(field, f"{name!r} found; no element touches that node")
        if item.to is not None:
            parts = topology.parts.of_node
            if parts[topology.node(item.node)] != parts[topology.node(item.to)]:
                raise InvalidNetwork.at(
                    "to",
                    f"{item.to!r} and {item.node!r} have no conducting path between them; no voltage is defined there",
                )
        return
    if item.name not in topology.names:
        raise InvalidRequest.at("name", f"{item.name!r} found; no element of that name")
    if isinstance(item, ob.WindingVoltage | ob.WindingCurrent | ob.FluxLinkage):
        if topology.winding(item.name, item.label) < 0:
            element = topology.network.element(item.name)
            known = (
                ", ".join(element.windings.labels) if isinstance(element, Windings) else "none; it is no winding set"
            )
            raise InvalidRequest.at("label", f"{item.label!r} found; windings of {item.name!r}: {known}")
    elif isinstance(item, ob.ElementVoltage | ob.ElementCurrent):
        element = topology.network.element(item.name)
        if isinstance(element, Windings) and element.windings.size > 1:
            raise InvalidRequest.at(
                "name", f"{item.name!r} has {element.windings.size} windings; ask for WindingVoltage or WindingCurrent"
            )


def evaluate(phasors: Readable, item: ob.Observable) -> ComplexArray:
    """Return one observable over frequency, shape (f,), complex peak; power ½ V conj(I), energy the mean.

    A winding group absorbs ½ iᴴ (R + jωL) i with its full resistance matrix, so that no small loss is left over from
    large reactive products.
    """
    topology = phasors.topology
    if isinstance(item, ob.NodeVoltage):
        node = topology.node(item.node)
        zero = topology.parts.reference[topology.parts.of_node[node]] if item.to is None else topology.node(item.to)
        return phasors.between(node, int(zero))
    if isinstance(item, ob.ElementPower):
        return sum(
            (_power(phasors, k) for k in _units(topology, item.name)), np.zeros(len(phasors.omega), np.complex128)
        )
    if isinstance(item, ob.StoredEnergy):
        return sum(
            (_energy(phasors, k) for k in _units(topology, item.name)), np.zeros(len(phasors.omega), np.complex128)
        )
    if isinstance(item, ob.FluxLinkage):
        place = _group(topology, item.name)
        return phasors.flux_linkages(place)[:, topology.groups[place].labels.index(item.label)]
    if isinstance(item, ob.WindingVoltage | ob.WindingCurrent):
        branch = topology.winding(item.name, item.label)
        return phasors.voltage(branch) if isinstance(item, ob.WindingVoltage) else phasors.current(branch)
    branch = int(topology.branches_of(item.name)[0])
    return phasors.voltage(branch) if isinstance(item, ob.ElementVoltage) else phasors.current(branch)


def _units(topology: Topology, name: str) -> list[int]:
    branches = topology.branches_of(name).tolist()
    return branches[:1] if topology.kind[branches[0]] == Kind.WINDING else branches


def _group(topology: Topology, name: str) -> int:
    return next(k for k, group in enumerate(topology.groups) if group.name == name)


def _power(phasors: Readable, branch: int) -> ComplexArray:
    topology, kind = phasors.topology, phasors.topology.kind[branch]
    value = topology.value[branch]
    if kind == Kind.WINDING:
        place = _group(topology, topology.names[branch])
        group = topology.groups[place]
        i = np.stack([phasors.current(int(k)) for k in group.branches], axis=1)
        loss = np.einsum("fi,fi->f", i.conj(), i @ group.resistance_ohm)
        return 0.5 * (loss + 1j * phasors.omega * phasors.field(place))
    if kind == Kind.RESISTOR:
        return 0.5 * value * np.abs(phasors.current(branch)) ** 2 + 0j
    if kind == Kind.INDUCTOR:
        return 0.5j * phasors.omega * value * np.abs(phasors.current(branch)) ** 2
    if kind == Kind.CAPACITOR:
        return -0.5j * phasors.omega * value * np.abs(phasors.voltage(branch)) ** 2
    return 0.5 * phasors.voltage(branch) * np.conj(phasors.current(branch))


def _energy(phasors: Readable, branch: int) -> ComplexArray:
    topology, kind = phasors.topology, phasors.topology.kind[branch]
    value = topology.value[branch]
    if kind == Kind.WINDING:
        return 0.25 * phasors.field(_group(topology, topology.names[branch])) + 0j
    if kind == Kind.INDUCTOR:
        return 0.25 * value * np.abs(phasors.current(branch)) ** 2 + 0j
    if kind == Kind.CAPACITOR:
        return 0.25 * value * np.abs(phasors.voltage(branch)) ** 2 + 0j
    return np.zeros(len(phasors.omega), dtype=np.complex128)
