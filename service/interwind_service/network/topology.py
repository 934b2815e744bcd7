"""The network as integers and arrays: nodes, branches, winding groups, galvanic parts.

Every element is one branch from its first node to its second, every winding one from its start to its finish, an ideal
transformer two (a-b, c-d). Solvers work on this value; names come back only in answers and messages.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork, InvalidRequest
from interwind.model import elements as el
from interwind.model.finding import Finding
from interwind.model.network import Network, element_nodes
from interwind_service.network.groups import WindingGroup, group_of
from interwind_service.network.kind import Kind
from interwind_service.network.parts import Parts, divide
from interwind_service.network.values import check_values

IntArray = NDArray[np.int64]
FloatArray = NDArray[np.float64]


_KINDS: dict[type, Kind] = {
    el.Resistor: Kind.RESISTOR,
    el.Inductor: Kind.INDUCTOR,
    el.Capacitor: Kind.CAPACITOR,
    el.VoltageSource: Kind.VOLTAGE_SOURCE,
    el.CurrentSource: Kind.CURRENT_SOURCE,
    el.Switch: Kind.SWITCH,
    el.Diode: Kind.DIODE,
    el.Arrester: Kind.ARRESTER,
    el.SaturableInductor: Kind.SATURABLE,
    el.VoltageByVoltage: Kind.CONTROLLED_VOLTAGE,
    el.VoltageByCurrent: Kind.CONTROLLED_VOLTAGE,
    el.CurrentByVoltage: Kind.CONTROLLED_CURRENT,
    el.CurrentByCurrent: Kind.CONTROLLED_CURRENT,
}
_VALUE = {el.Resistor: "resistance_ohm", el.Inductor: "inductance_h", el.Capacitor: "capacitance_f"}
_GAIN = {
    el.VoltageByVoltage: "gain",
    el.VoltageByCurrent: "transresistance_ohm",
    el.CurrentByVoltage: "transconductance_s",
    el.CurrentByCurrent: "gain",
}


@dataclass(frozen=True, slots=True)
class Control:
    """A controlled source: ``branch`` carries ``gain`` times its control.

    The control is the voltage of node ``start`` against ``finish``, or the current of branch ``sensed`` (then both are
    -1).
    """

    branch: int
    gain: float
    start: int
    finish: int
    sensed: int


@dataclass(frozen=True, slots=True)
class Transformer:
    """An ideal transformer: v[first] = ratio v[second], i[second] = −ratio i[first] (branch numbers)."""

    first: int
    second: int
    ratio: float


@dataclass(frozen=True, slots=True, eq=False)
class Topology:
    """A network numbered.

    Attributes
    ----------
    nodes : node names, the network's reference first.
    kind, start, finish, element : shape (branches,): `Kind`, end nodes, position in ``network.elements``.
    value : shape (branches,): ohm, H or F of resistors, inductors and capacitors, else NaN.
    names, labels : element name and winding label ("" but for windings) of each branch.
    groups : winding groups; each knows its branches.
    controls, transformers : controlled sources and ideal transformers.
    inputs, input_branch : names and branches of the independent sources, in element order.
    parts : galvanic parts, each with its own zero node. ``parts.forced`` (parts, inputs) is the net current that one
        ampere of each input drives into a part with no return; a solver refuses a drive u with forced @ u != 0.
    findings : ISOLATED_PART for each part without a path to the reference.
    """

    network: Network
    nodes: tuple[str, ...]
    kind: IntArray
    start: IntArray
    finish: IntArray
    value: FloatArray
    names: tuple[str, ...]
    labels: tuple[str, ...]
    element: IntArray
    groups: tuple[WindingGroup, ...]
    controls: tuple[Control, ...]
    transformers: tuple[Transformer, ...]
    inputs: tuple[str, ...]
    input_branch: IntArray
    parts: Parts
    findings: tuple[Finding, ...]

    def of_kind(self, *kinds: Kind) -> IntArray:
        """Return the branches of these kinds, in order."""
        wanted = np.zeros(len(Kind), dtype=bool)
        wanted[list(kinds)] = True
        return np.flatnonzero(wanted[self.kind])

    def branches_of(self, name: str) -> IntArray:
        """Return the branches of an element, in order."""
        return np.array([k for k, other in enumerate(self.names) if other == name], dtype=np.int64)

    def winding(self, name: str, label: str) -> int:
        """Return the branch of one winding, -1 when there is none of that name and label."""
        for group in self.groups:
            if group.name == name and label in group.labels:
                return int(group.branches[group.labels.index(label)])
        return -1

    def node(self, name: str) -> int:
        """Return the number of a node, -1 when no element touches it."""
        return self.nodes.index(name) if name in self.nodes else -1

    def incidence(self) -> FloatArray:
        """Return the full incidence matrix (nodes, branches): +1 at the start, −1 at the finish, every node a row."""
        matrix = np.zeros((len(self.nodes), len(self.kind)))
        np.add.at(matrix, (self.start, np.arange(len(self.kind))), 1.0)
        np.add.at(matrix, (self.finish, np.arange(len(self.kind))), -1.0)
        return matrix


def number(network: Network) -> Topology:
    """Number the nodes and branches of a network and divide it into galvanic parts.

    Raises
    ------
    InvalidRequest : a value outside its domain, an unknown control, a reference that no element touches.
    InvalidWindings : a winding set that cannot exist, or with pairs not known.
    """
    check_values(network)
    nodes = network.nodes
    index = {name: k for k, name in enumerate(nodes)}
    touched = {node for element in network.elements for node in element_nodes(element)}
    if network.reference not in touched:
        raise InvalidNetwork.at(
            "reference",
            f"{network.reference!r} found; no element touches that node; name one of {', '.join(nodes[1:6])}",
        )
    rows: list[tuple[Kind, int, int, float, str, str, int]] = []
    groups: list[WindingGroup] = []
    transformers: list[Transformer] = []
    for position, element in enumerate(network.elements):
        if isinstance(element, el.Windings):
            first = len(rows)
            for label, (begin, end) in element.terminals.items():
                rows.append((Kind.WINDING, index[begin], index[end], np.nan, element.name, label, position))
            groups.append(group_of(element, np.arange(first, len(rows)), position))
        elif isinstance(element, el.IdealTransformer):
            transformers.append(Transformer(len(rows), len(rows) + 1, element.turns_ratio))
            for begin, end in ((element.a, element.b), (element.c, element.d)):
                rows.append((Kind.TRANSFORMER, index[begin], index[end], np.nan, element.name, "", position))
        else:
            value = getattr(element, _VALUE[type(element)]) if type(element) in _VALUE else np.nan
            rows.append((_KINDS[type(element)], index[element.a], index[element.b], value, element.name, "", position))
    kinds, starts, finishes, values, names, labels, positions = zip(*rows, strict=True)
    kind = np.array(kinds, dtype=np.int64)
    start, finish = np.array(starts, dtype=np.int64), np.array(finishes, dtype=np.int64)
    input_branch = np.flatnonzero((kind == Kind.VOLTAGE_SOURCE) | (kind == Kind.CURRENT_SOURCE))
    connecting = (kind != Kind.CURRENT_SOURCE) & ~((kind == Kind.CAPACITOR) & (np.array(values) == 0.0))
    parts, findings = divide(network, nodes, start, finish, connecting, kind, input_branch)
    return Topology(
        network=network,
        nodes=nodes,
        kind=kind,
        start=start,
        finish=finish,
        value=np.array(values, dtype=np.float64),
        names=names,
        labels=labels,
        element=np.array(positions, dtype=np.int64),
        groups=tuple(groups),
        controls=_controls(network, index, names, positions),
        transformers=tuple(transformers),
        inputs=tuple(names[k] for k in input_branch),
        input_branch=input_branch,
        parts=parts,
        findings=findings,
    )


def with_current_sources(topology: Topology, sources: list[el.CurrentSource]) -> Topology:
    """Return the numbered network with sources added, each between nodes of one part, and without its ports."""
    network, size, count = topology.network, len(topology.kind), len(sources)
    forced = topology.parts.forced
    return replace(
        topology,
        network=replace(network, elements=(*network.elements, *sources), ports=()),
        kind=np.append(topology.kind, [int(Kind.CURRENT_SOURCE)] * count),
        start=np.append(topology.start, [topology.node(source.a) for source in sources]),
        finish=np.append(topology.finish, [topology.node(source.b) for source in sources]),
        value=np.append(topology.value, [np.nan] * count),
        names=(*topology.names, *(source.name for source in sources)),
        labels=topology.labels + ("",) * count,
        element=np.append(topology.element, len(network.elements) + np.arange(count)),
        inputs=(*topology.inputs, *(source.name for source in sources)),
        input_branch=np.append(topology.input_branch, size + np.arange(count)),
        parts=replace(topology.parts, forced=np.hstack((forced, np.zeros((len(forced), count), dtype=np.int64)))),
    )


def _controls(
    network: Network, index: dict[str, int], names: tuple[str, ...], positions: tuple[int, ...]
) -> tuple[Control, ...]:
    controls = []
    for position, element in enumerate(network.elements):
        if type(element) not in _GAIN:
            continue
        branch, gain = positions.index(position), float(getattr(element, _GAIN[type(element)]))
        if isinstance(element, el.VoltageByVoltage | el.CurrentByVoltage):
            for side, node in enumerate(element.control):
                if node not in index:
                    raise InvalidRequest.at(
                        f"elements[{position}].control[{side}]", f"{node!r} found; no element touches that node"
                    )
            controls.append(Control(branch, gain, index[element.control[0]], index[element.control[1]], -1))
        else:
            sensed = [k for k, name in enumerate(names) if name == element.control]
            field = f"elements[{position}].control"
            if not sensed:
                raise InvalidRequest.at(field, f"{element.control!r} found; no element of that name")
            target = network.elements[positions[sensed[0]]]
            if isinstance(target, el.Windings) and len(sensed) > 1:
                raise InvalidRequest.at(
                    field,
                    f"{element.control!r} has {len(sensed)} windings; sense a voltage source of 0 V in series instead",
                )
            if sensed[0] == branch:
                raise InvalidRequest.at(field, f"{element.control!r} found, the source itself; name what it senses")
            controls.append(Control(branch, gain, -1, -1, sensed[0]))
    return tuple(controls)
