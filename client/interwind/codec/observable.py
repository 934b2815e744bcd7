"""Observables and start values <-> messages."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

from interwind.errors import InvalidRequest, field_path
from interwind.model.observables import (
    ElementCurrent,
    ElementPower,
    ElementVoltage,
    FluxLinkage,
    NodeVoltage,
    Observable,
    StoredEnergy,
    WindingCurrent,
    WindingVoltage,
)
from interwind.v1 import observable_pb2

_OF_ELEMENT: dict[str, type[Any]] = {
    "element_voltage": ElementVoltage,
    "element_current": ElementCurrent,
    "element_power": ElementPower,
    "stored_energy": StoredEnergy,
}
_OF_WINDING: dict[str, type[Any]] = {
    "winding_voltage": WindingVoltage,
    "winding_current": WindingCurrent,
    "flux_linkage": FluxLinkage,
}
_NAMES: dict[type, str] = {cls: name for name, cls in (*_OF_ELEMENT.items(), *_OF_WINDING.items())}


def observable_to_message(observable: Observable) -> observable_pb2.Observable:
    """Return the message of an observable."""
    message = observable_pb2.Observable()
    if isinstance(observable, NodeVoltage):
        message.node_voltage.node = observable.node
        message.node_voltage.to = observable.to or ""
    elif isinstance(observable, WindingVoltage | WindingCurrent | FluxLinkage):
        named = getattr(message, _NAMES[type(observable)])
        named.name, named.label = observable.name, observable.label
    elif type(observable) in _NAMES:
        setattr(message, _NAMES[type(observable)], observable.name)
    else:
        raise InvalidRequest.at("", f"{observable!r} found; an observable such as NodeVoltage is expected")
    return message


def observable_from_message(message: observable_pb2.Observable) -> Observable:
    """Return the observable of a message."""
    quantity = message.WhichOneof("quantity")
    if quantity is None:
        raise InvalidRequest.at("quantity", "nothing is asked for; state one, such as node_voltage")
    if quantity == "node_voltage":
        return NodeVoltage(message.node_voltage.node, message.node_voltage.to or None)
    if quantity in _OF_WINDING:
        named = getattr(message, quantity)
        of_winding: Observable = _OF_WINDING[quantity](named.name, named.label)
        return of_winding
    of_element: Observable = _OF_ELEMENT[quantity](getattr(message, quantity))
    return of_element


def observables_to_messages(observe: Iterable[Observable] | None, field: str) -> list[observable_pb2.Observable]:
    """Return the messages of a list of observables; None is the empty list, which asks for the usual ones."""
    messages = []
    for position, observable in enumerate(observe or ()):
        with field_path(f"{field}[{position}]"):
            messages.append(observable_to_message(observable))
    return messages


def observables_from_messages(messages: Iterable[observable_pb2.Observable], field: str) -> tuple[Observable, ...]:
    """Return the observables of a list of messages."""
    found = []
    for position, message in enumerate(messages):
        with field_path(f"{field}[{position}]"):
            found.append(observable_from_message(message))
    return tuple(found)


def observable_heading(observable: Observable) -> str:
    """Spell an observable as a column heading: ``node_voltage out``, ``winding_current T1 rail``."""
    quantity = observable_to_message(observable).WhichOneof("quantity") or ""
    words = [getattr(observable, name) for name in observable.__dataclass_fields__]
    return " ".join([quantity, *(word for word in words if word)])
