"""Values <-> JSON text, in protobuf's own mapping; field names as in the contract, arrays as plain numbers."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from google.protobuf import json_format

from interwind.codec import desk
from interwind.codec.array import typed_arrays
from interwind.codec.network import network_from_message, network_to_message
from interwind.codec.windings import (
    verdict_from_message,
    verdict_to_message,
    windings_from_message,
    windings_to_message,
)
from interwind.errors import InvalidRequest
from interwind.model.characterization import Characterization
from interwind.model.identification import Identification
from interwind.model.network import Network
from interwind.model.report import RepairReport, ValidityReport
from interwind.model.windings import WindingSet
from interwind.v1 import network_pb2, windings_pb2, windings_service_pb2

FORMS: dict[type[Any], tuple[type[Any], Callable[[Any], Any], Callable[[Any], Any]]] = {
    WindingSet: (windings_pb2.WindingSet, windings_to_message, windings_from_message),
    Network: (network_pb2.Network, network_to_message, network_from_message),
    RepairReport: (windings_service_pb2.RepairWindingsResponse, desk.repair_to_message, desk.repair_from_message),
    Identification: (
        windings_service_pb2.IdentifyWindingsResponse,
        desk.identification_to_message,
        desk.identification_from_message,
    ),
    Characterization: (
        windings_service_pb2.CharacterizeWindingsResponse,
        desk.characterization_to_message,
        desk.characterization_from_message,
    ),
    ValidityReport: (windings_service_pb2.CheckWindingsResponse, verdict_to_message, verdict_from_message),
}


def value_to_json(value: Any) -> str:
    """Return a value as JSON text."""
    _, to_message, _ = FORMS[type(value)]
    with typed_arrays():
        return message_to_json(to_message(value))


def value_from_json(cls: type[Any], text: str) -> Any:
    """Return the value of JSON text; `InvalidRequest` says what does not fit."""
    message_class, _, from_message = FORMS[cls]
    return from_message(message_from_json(message_class(), text))


def message_to_json(message: Any) -> str:
    """Return any message as JSON text with the field names of the contract."""
    return str(json_format.MessageToJson(message, preserving_proto_field_name=True))


def message_from_json(message: Any, text: str) -> Any:
    """Fill a message from JSON text; `InvalidRequest` says what does not fit."""
    try:
        return json_format.Parse(text, message)
    except json_format.ParseError as error:
        raise InvalidRequest.at("json", f"{error}; see proto/README.md for the fields") from error
