"""The modified nodal equations of a network: G x + C dx/dt = B u."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind.model import elements as el
from interwind.model.finding import Evidence
from interwind.model.network import Network
from interwind.model.observables import ElementCurrent, NodeVoltage, Observable, WindingCurrent
from interwind.model.response import MnaSystem
from interwind_service import tolerances as tol
from interwind_service.network.hazards import hazards
from interwind_service.network.kind import Kind
from interwind_service.network.stamps import Stamps
from interwind_service.network.topology import Topology, number
from interwind_service.network.values import switch_closed_at_zero

_NO_STAMP = {Kind.DIODE: "a diode", Kind.ARRESTER: "an arrester", Kind.SATURABLE: "a saturable inductor"}


def stamp(network: Network) -> MnaSystem:
    """Write the modified nodal equations of a network.

    G x + C dx/dt = B u (Ho, Ruehli & Brennan 1975). x holds the node voltages (zero nodes left out), then the currents
    of windings, inductors and voltage sources, then those of short circuits, ideal transformers, controlled voltages
    and of elements that a controlled source senses. Node rows sum the currents leaving the node; signs of the other
    rows are those of `stamps`.

    Parameters
    ----------
    network : Network
        Of linear elements; a switch stands as at t = 0.

    Returns
    -------
    MnaSystem
        Dense ``G``, ``C`` (m, m), ``B`` (m, inputs); ``unknowns`` in row order, ``inputs`` by element name.

    Raises
    ------
    InvalidNetwork
        An element without a linear stamp, or more unknowns than dense matrices are given for.
    """
    topology = number(network)
    plan = plan_of(topology)
    if len(plan.unknowns) > tol.DENSE_UNKNOWNS:
        raise InvalidNetwork.at(
            "elements",
            f"{len(plan.unknowns)} unknowns found; dense matrices are given up to {tol.DENSE_UNKNOWNS}; ask for a "
            "response instead",
        )
    stamps = assemble(topology, plan, Stamps(len(plan.unknowns), len(topology.inputs)))
    return MnaSystem(
        stamps.G, stamps.C, stamps.B, plan.unknowns, topology.inputs, topology.findings, hazards(topology),
        evidence=Evidence(method="modified nodal analysis"),
    )  # fmt: skip


@dataclass(frozen=True, slots=True, eq=False)
class Plan:
    """Where everything stands: ``rows`` (nodes + 1,) of node voltages, −1 for zero nodes; ``currents`` by branch;
    ``resistance_ohm`` of resistors and switches by branch; ``unknowns`` in row order.
    """

    rows: NDArray[np.int64]
    currents: dict[int, int]
    resistance_ohm: dict[int, float]
    unknowns: tuple[Observable, ...]


def plan_of(topology: Topology) -> Plan:
    """Number the unknowns of a network; an element without a linear stamp is refused."""
    resistance = _resistances(topology)
    rows, currents, unknowns = _unknowns(topology, resistance)
    return Plan(rows, currents, resistance, tuple(unknowns))


def assemble(topology: Topology, plan: Plan, stamps: Stamps) -> Stamps:
    """Let every element write its stamp."""
    rows, currents, resistance = plan.rows, plan.currents, plan.resistance_ohm
    a, b = rows[topology.start].tolist(), rows[topology.finish].tolist()
    column = {int(branch): k for k, branch in enumerate(topology.input_branch)}
    for k in range(len(topology.kind)):
        _stamp_branch(stamps, topology, k, a[k], b[k], currents, column, resistance)
    for group in topology.groups:
        members = group.branches.tolist()
        stamps.windings([a[k] for k in members], [b[k] for k in members], [currents[k] for k in members], group)
    for t in topology.transformers:
        stamps.ideal_transformer(a[t.first], b[t.first], a[t.second], b[t.second], currents[t.first], t.ratio)
    for control in topology.controls:
        k, voltage = control.branch, topology.kind[control.branch] == Kind.CONTROLLED_VOLTAGE
        pair = (int(rows[control.start]), int(rows[control.finish]))
        if k in currents and not voltage:
            stamps.sensed_current(a[k], b[k], currents[k])
            a[k], b[k] = currents[k], -1
        if control.sensed < 0 and voltage:
            stamps.voltage_by_voltage(a[k], b[k], currents[k], pair, control.gain)
        elif control.sensed < 0:
            stamps.current_by_voltage(a[k], b[k], pair, -control.gain if k in currents else control.gain)
        elif voltage:
            stamps.voltage_by_current(a[k], b[k], currents[k], currents[control.sensed], control.gain)
        else:
            gain = -control.gain if k in currents else control.gain
            stamps.current_by_current(a[k], b[k], currents[control.sensed], gain)
    return stamps


def _resistances(topology: Topology) -> dict[int, float]:
    """Return the resistance of each resistor and switch; refuse elements that have no linear stamp."""
    found: dict[int, float] = {}
    for k, number_ in enumerate(topology.kind.tolist()):
        kind = Kind(number_)
        if kind in _NO_STAMP:
            raise InvalidNetwork.at(
                f"elements[{topology.element[k]}]",
                f"{topology.names[k]!r} is {_NO_STAMP[kind]}; it has no linear stamp; replace it by its working point",
            )
        if kind == Kind.RESISTOR:
            found[k] = float(topology.value[k])
        element = topology.network.elements[topology.element[k]]
        if isinstance(element, el.Switch):
            closed = switch_closed_at_zero(element)
            found[k] = element.conducting_resistance_ohm if closed else element.blocking_resistance_ohm
    return found


def _unknowns(topology: Topology, resistance: dict[int, float]) -> tuple[np.ndarray, dict[int, int], list[Observable]]:
    rows = np.full(len(topology.nodes) + 1, -1, dtype=np.int64)  # the last entry serves index -1: no node
    kept = np.setdiff1d(np.arange(len(topology.nodes)), topology.parts.reference)
    rows[kept] = np.arange(len(kept))
    unknowns: list[Observable] = [NodeVoltage(topology.nodes[k]) for k in kept]
    sensed = {control.sensed for control in topology.controls}
    first = [t.first for t in topology.transformers]
    classes = (
        topology.of_kind(Kind.WINDING),
        topology.of_kind(Kind.INDUCTOR),
        topology.of_kind(Kind.VOLTAGE_SOURCE),
        [
            k
            for k in range(len(topology.kind))
            if resistance.get(k) == 0.0 or k in first or topology.kind[k] == Kind.CONTROLLED_VOLTAGE or k in sensed
        ],
    )
    currents: dict[int, int] = {}
    for members in classes:
        for k in (int(k) for k in members):
            if k in currents:
                continue
            currents[k] = len(unknowns)
            winding = topology.kind[k] == Kind.WINDING
            name = topology.names[k]
            unknowns.append(WindingCurrent(name, topology.labels[k]) if winding else ElementCurrent(name))
    return rows, currents, unknowns


def _stamp_branch(
    stamps: Stamps,
    topology: Topology,
    k: int,
    a: int,
    b: int,
    currents: dict[int, int],
    column: dict[int, int],
    resistance: dict[int, float],
) -> None:
    kind, value = topology.kind[k], float(topology.value[k])
    if k in resistance:
        ohm = resistance[k]
        if k in currents:
            stamps.branch_resistor(a, b, currents[k], ohm)
        elif np.isfinite(ohm):
            stamps.resistor(a, b, ohm)
    elif kind == Kind.CAPACITOR:
        if k in currents:
            stamps.branch_capacitor(a, b, currents[k], value)
        else:
            stamps.capacitor(a, b, value)
    elif kind == Kind.INDUCTOR:
        stamps.inductor(a, b, currents[k], value)
    elif kind == Kind.VOLTAGE_SOURCE:
        stamps.voltage_source(a, b, currents[k], column[k])
    elif kind == Kind.CURRENT_SOURCE and k in currents:
        stamps.sensed_current(a, b, currents[k])
        stamps.current_source(-1, currents[k], column[k])
    elif kind == Kind.CURRENT_SOURCE:
        stamps.current_source(a, b, column[k])
