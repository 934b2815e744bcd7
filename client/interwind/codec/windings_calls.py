"""Requests about windings <-> the arguments of their engine functions."""

from __future__ import annotations

from typing import Any

from interwind.codec import desk
from interwind.codec.array import array_from_message, array_to_message
from interwind.codec.call import Arguments, Call
from interwind.codec.reading import reading_from_message, reading_to_message
from interwind.codec.windings import (
    verdict_from_message,
    verdict_to_message,
    windings_from_message,
    windings_to_message,
)
from interwind.errors import InvalidRequest, field_path
from interwind.model.frozen import frozen_floats, frozen_vector, labels_of
from interwind.model.report import RepairMethod
from interwind.v1 import response_pb2, windings_service_pb2


def _check_request(arguments: Arguments) -> Any:
    windings = arguments["windings"]
    return windings_service_pb2.CheckWindingsRequest(
        size=response_pb2.Size(winding_count=windings.size), windings=windings_to_message(windings)
    )


def _check_arguments(message: Any) -> dict[str, Any]:
    with field_path("windings"):
        return {"windings": windings_from_message(message.windings)}


def _repair_request(arguments: Arguments) -> Any:
    windings = arguments["windings"]
    message = windings_service_pb2.RepairWindingsRequest(
        size=response_pb2.Size(winding_count=windings.size),
        windings=windings_to_message(windings),
        method=f"REPAIR_METHOD_{arguments.get('method', RepairMethod.COMPLETION).value}",
    )
    for position, pair in enumerate(arguments.get("trusted") or ()):
        with field_path(f"trusted[{position}]"):
            first, second = _pair(pair)
        message.trusted.add(first=first, second=second)
    if arguments.get("weights") is not None:
        message.weights.CopyFrom(array_to_message(frozen_vector(arguments["weights"], "weights")))
    if arguments.get("floor") is not None:
        message.floor = float(arguments["floor"])
    return message


def _repair_arguments(message: Any) -> dict[str, Any]:
    name = windings_service_pb2.RepairMethod.Name(message.method).removeprefix("REPAIR_METHOD_")
    return _check_arguments(message) | {
        "trusted": tuple((pair.first, pair.second) for pair in message.trusted),
        "weights": array_from_message(message.weights, "weights") if message.HasField("weights") else None,
        "floor": message.floor if message.HasField("floor") else None,
        "method": RepairMethod(name) if name in RepairMethod.__members__ else RepairMethod.COMPLETION,
    }


def _pair(value: Any) -> tuple[str, str]:
    pair = tuple(value)
    if len(pair) != 2 or not all(isinstance(label, str) for label in pair):
        raise InvalidRequest.at("", f"{value!r} found; two labels are expected")
    return pair


def _identify_request(arguments: Arguments) -> Any:
    labels = labels_of(arguments["labels"], "labels")
    message = windings_service_pb2.IdentifyWindingsRequest(
        size=response_pb2.Size(winding_count=len(labels), point_count=len(arguments["readings"])), labels=labels
    )
    for position, reading in enumerate(arguments["readings"]):
        with field_path(f"readings[{position}]"):
            message.readings.append(reading_to_message(reading))
    if arguments.get("aim") is not None:
        with field_path("aim"):
            message.aim.extend(_pair(arguments["aim"]))
    return message


def _identify_arguments(message: Any) -> dict[str, Any]:
    readings = []
    for position, reading in enumerate(message.readings):
        with field_path(f"readings[{position}]"):
            readings.append(reading_from_message(reading))
    aim = tuple(message.aim) or None
    return {"labels": labels_of(tuple(message.labels), "labels"), "readings": tuple(readings), "aim": aim}


def _characterize_request(arguments: Arguments) -> Any:
    windings = arguments["windings"]
    message = windings_service_pb2.CharacterizeWindingsRequest(
        size=response_pb2.Size(winding_count=windings.size), windings=windings_to_message(windings)
    )
    for position, value in enumerate(arguments.get("connections") or ()):
        with field_path(f"connections[{position}]"):
            message.connections.append(desk.connection_to_message(value))
    if arguments.get("frequency_hz") is not None:
        frequency_hz = frozen_floats(arguments["frequency_hz"], "frequency_hz")
        message.frequency_hz.CopyFrom(array_to_message(frequency_hz.reshape(-1)))
    return message


def _characterize_arguments(message: Any) -> dict[str, Any]:
    connections = []
    for position, value in enumerate(message.connections):
        with field_path(f"connections[{position}]"):
            connections.append(desk.connection_from_message(value))
    given = message.HasField("frequency_hz")
    return _check_arguments(message) | {
        "connections": tuple(connections),
        "frequency_hz": array_from_message(message.frequency_hz, "frequency_hz") if given else (),
    }


WINDINGS_CALLS = (
    Call(
        "/interwind.v1.WindingsService/CheckWindings", "check",
        windings_service_pb2.CheckWindingsRequest, windings_service_pb2.CheckWindingsResponse, False,
        _check_request, _check_arguments, verdict_to_message, verdict_from_message,
    ),
    Call(
        "/interwind.v1.WindingsService/RepairWindings", "repair",
        windings_service_pb2.RepairWindingsRequest, windings_service_pb2.RepairWindingsResponse, False,
        _repair_request, _repair_arguments, desk.repair_to_message, desk.repair_from_message,
    ),
    Call(
        "/interwind.v1.WindingsService/IdentifyWindings", "identify",
        windings_service_pb2.IdentifyWindingsRequest, windings_service_pb2.IdentifyWindingsResponse, False,
        _identify_request, _identify_arguments, desk.identification_to_message, desk.identification_from_message,
    ),
    Call(
        "/interwind.v1.WindingsService/CharacterizeWindings", "characterize",
        windings_service_pb2.CharacterizeWindingsRequest, windings_service_pb2.CharacterizeWindingsResponse, False,
        _characterize_request, _characterize_arguments,
        desk.characterization_to_message, desk.characterization_from_message,
    ),
)  # fmt: skip
