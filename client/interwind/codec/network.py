"""Networks and their elements <-> messages.

Most elements and their messages spell their fields alike: `_PLAIN` is the table of those, both directions in one place.
The others stand below it, each direction beside the other.
"""

from __future__ import annotations

import math
from dataclasses import fields
from typing import Any

from interwind.codec.array import array_from_message, array_to_message
from interwind.codec.waveform import waveform_from_message, waveform_to_message
from interwind.codec.windings import windings_from_message, windings_to_message
from interwind.errors import InvalidRequest, at_path, field_path
from interwind.model import devices
from interwind.model import elements as model
from interwind.model.network import Network, Port
from interwind.v1 import network_pb2

_PLAIN: dict[str, type[Any]] = {
    "resistor": model.Resistor,
    "inductor": model.Inductor,
    "capacitor": model.Capacitor,
    "arrester": devices.Arrester,
    "ideal_transformer": model.IdealTransformer,
    "voltage_by_current": model.VoltageByCurrent,
    "current_by_current": model.CurrentByCurrent,
}
_SOURCES: dict[str, type[Any]] = {"voltage_source": model.VoltageSource, "current_source": model.CurrentSource}
_BY_NODES: dict[str, type[Any]] = {
    "voltage_by_voltage": model.VoltageByVoltage,
    "current_by_voltage": model.CurrentByVoltage,
}
_KINDS = {cls: kind for table in (_PLAIN, _SOURCES, _BY_NODES) for kind, cls in table.items()} | {
    model.Windings: "windings",
    devices.Switch: "switch",
    devices.Diode: "diode",
    devices.SaturableInductor: "saturable_inductor",
}


def network_to_message(network: Network) -> network_pb2.Network:
    """Return the message of a network."""
    return network_pb2.Network(
        reference=network.reference,
        elements=[_element_to_message(element) for element in network.elements],
        ports=[
            network_pb2.Port(name=port.name, a=port.a, b=port.b, reference_ohm=port.reference_ohm)
            for port in network.ports
        ],
        references=network.references,
    )


def network_from_message(message: network_pb2.Network) -> Network:
    """Return the network of a message; `InvalidRequest` names the field, such as ``elements[3].resistance_ohm``."""
    elements: list[model.Element] = []
    try:
        for element in message.elements:
            elements.append(_element_from_message(element))
    except InvalidRequest as error:  # one handler for all: entering a context for each would cost more than decoding it
        raise at_path(f"elements[{len(elements)}]", error) from error
    ports = []
    for position, port in enumerate(message.ports):
        with field_path(f"ports[{position}]"):
            stated = {"reference_ohm": port.reference_ohm} if port.HasField("reference_ohm") else {}
            ports.append(Port(port.name, port.a, port.b, **stated))
    return Network(message.reference, tuple(elements), tuple(ports), tuple(message.references))


def _element_to_message(element: model.Element) -> network_pb2.Element:
    message = network_pb2.Element(name=element.name)
    kind = _KINDS[type(element)]
    body = getattr(message, kind)
    body.SetInParent()
    if kind in _PLAIN:
        for field in fields(element):
            if field.name != "name":
                setattr(body, field.name, getattr(element, field.name))
        return message
    if isinstance(element, model.Windings):
        body.windings.CopyFrom(windings_to_message(element.windings))
        for label, (start, finish) in element.terminals.items():
            body.terminals.add(label=label, start=start, finish=finish)
        return message
    if isinstance(element, devices.Diode):
        _diode_to_message(element, body)
        return message
    body.a, body.b = element.a, element.b
    if isinstance(element, model.VoltageSource | model.CurrentSource):
        if element.waveform is not None:
            body.waveform.CopyFrom(waveform_to_message(element.waveform))
        if element.phasor is not None:
            body.phasor.real, body.phasor.imaginary = element.phasor.real, element.phasor.imag
    elif isinstance(element, model.VoltageByVoltage | model.CurrentByVoltage):
        body.control_a, body.control_b = element.control
        name = fields(element)[-1].name
        setattr(body, name, getattr(element, name))
    elif isinstance(element, devices.Switch):
        _switch_to_message(element, body)
    elif isinstance(element, devices.SaturableInductor):
        body.current_a.CopyFrom(array_to_message(element.current_a))
        body.flux_linkage_wb.CopyFrom(array_to_message(element.flux_linkage_wb))
        body.residual_wb = element.residual_wb
    return message


def _element_from_message(message: network_pb2.Element) -> model.Element:
    kind = message.WhichOneof("kind")
    if kind is None:
        raise InvalidRequest.at("kind", "no kind of element found; state one, such as resistor")
    body = getattr(message, kind)
    if kind in _PLAIN:
        cls = _PLAIN[kind]
        given = {field.name: getattr(body, field.name) for field in fields(cls) if field.name != "name"}
        element: model.Element = cls(message.name, **given)
        return element
    if kind in _SOURCES:
        source: model.Element = _source_from_message(_SOURCES[kind], message.name, body)
        return source
    if kind in _BY_NODES:
        cls = _BY_NODES[kind]
        name = fields(cls)[-1].name
        by_nodes: model.Element = cls(
            message.name, body.a, body.b, (body.control_a, body.control_b), getattr(body, name)
        )
        return by_nodes
    if kind == "windings":
        terminals: dict[str, tuple[str, str]] = {}
        for position, pair in enumerate(body.terminals):
            if pair.label in terminals:
                raise InvalidRequest.at(f"terminals[{position}].label", f"{pair.label!r} stands twice")
            terminals[pair.label] = (pair.start, pair.finish)
        with field_path("windings"):
            windings = windings_from_message(body.windings)
        return model.Windings(message.name, windings, terminals)
    if kind == "switch":
        return _switch_from_message(message.name, body)
    if kind == "diode":
        return _diode_from_message(message.name, body)
    return devices.SaturableInductor(
        message.name,
        body.a,
        body.b,
        array_from_message(body.current_a, "current_a"),
        array_from_message(body.flux_linkage_wb, "flux_linkage_wb"),
        body.residual_wb,
    )


def _source_from_message(cls: type[Any], name: str, body: Any) -> Any:
    waveform = phasor = None
    if body.HasField("waveform"):
        with field_path("waveform"):
            waveform = waveform_from_message(body.waveform)
    if body.HasField("phasor"):
        phasor = complex(body.phasor.real, body.phasor.imaginary)
    return cls(name, body.a, body.b, waveform, phasor)


def _switch_to_message(element: devices.Switch, body: Any) -> None:
    if isinstance(element.closed, devices.Gate):
        for field in fields(element.closed):
            setattr(body.gate, field.name, getattr(element.closed, field.name))
        body.gate.SetInParent()
    else:
        body.gate_times.toggle_s.CopyFrom(array_to_message(element.closed.toggle_s))
        body.gate_times.initially_closed = element.closed.initially_closed
    body.conducting_resistance_ohm = element.conducting_resistance_ohm
    body.blocking_resistance_ohm = element.blocking_resistance_ohm


def _switch_from_message(name: str, body: Any) -> devices.Switch:
    drive = body.WhichOneof("closed")
    if drive is None:
        raise InvalidRequest.at("closed", "the switch has no drive; state gate or gate_times")
    with field_path(drive):
        closed: devices.Gate | devices.GateTimes
        if drive == "gate":
            closed = devices.Gate(body.gate.period_s, body.gate.on_s, body.gate.delay_s)
        else:
            toggle = array_from_message(body.gate_times.toggle_s, "toggle_s")
            closed = devices.GateTimes(toggle, body.gate_times.initially_closed)
    return devices.Switch(name, body.a, body.b, closed, body.conducting_resistance_ohm, _blocking(body))


def _diode_to_message(element: devices.Diode, body: Any) -> None:
    body.anode, body.cathode = element.anode, element.cathode
    if element.exponential:
        body.exponential.saturation_current_a = element.saturation_current_a
        body.exponential.thermal_voltage_v = element.thermal_voltage_v
    else:
        law = body.piecewise_linear
        law.forward_voltage_v = element.forward_voltage_v
        law.conducting_resistance_ohm = element.conducting_resistance_ohm
        law.blocking_resistance_ohm = element.blocking_resistance_ohm


def _diode_from_message(name: str, body: Any) -> devices.Diode:
    if body.WhichOneof("law") == "exponential":
        law = body.exponential
        return devices.Diode(
            name,
            body.anode,
            body.cathode,
            saturation_current_a=law.saturation_current_a,
            thermal_voltage_v=law.thermal_voltage_v,
        )
    law = body.piecewise_linear
    return devices.Diode(
        name, body.anode, body.cathode, law.forward_voltage_v, law.conducting_resistance_ohm, _blocking(law)
    )


def _blocking(body: Any) -> float:
    return float(body.blocking_resistance_ohm) if body.HasField("blocking_resistance_ohm") else math.inf
