"""The table of calls: for each RPC, how its request and its answer become messages, on either side.

A worker decodes a request into the keyword arguments of an engine function and encodes its answer; a client does the
reverse. Nothing else in the project knows both the messages and the functions.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from interwind.codec import response as responses
from interwind.codec.array import array_from_message, array_to_message
from interwind.codec.network import network_from_message, network_to_message
from interwind.codec.observable import (
    observable_from_message,
    observable_to_message,
    observables_from_messages,
    observables_to_messages,
)
from interwind.codec.windings import verdict_from_message, verdict_to_message, windings_from_message, windings_to_message
from interwind.errors import InvalidRequest, field_path
from interwind.model.elements import Windings
from interwind.model.frozen import frozen_vector
from interwind.model.network import Network
from interwind.model.response import AdaptiveSweep, SteadyStart
from interwind.v1 import network_service_pb2, response_pb2, response_service_pb2, windings_service_pb2

Arguments = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Call:
    """One RPC: the engine function it reaches and the two directions of its request and its answer."""

    path: str
    engine: str
    request_class: type[Any]
    response_class: type[Any]
    streaming: bool
    _to_request: Callable[[Arguments], Any]
    _from_request: Callable[[Any], dict[str, Any]]
    _to_answer: Callable[[Any], Any]
    _from_answer: Callable[..., Any]

    def encode_request(self, **arguments: Any) -> Any:
        """Return the request message of the engine function's arguments."""
        return self._to_request(arguments)

    def decode(self, message: Any) -> dict[str, Any]:
        """Return the engine function's arguments of a request message."""
        return self._from_request(message)

    def encode(self, value: Any) -> Iterator[Any]:
        """Yield the response messages of the engine function's answer; exactly one unless streaming."""
        answer = self._to_answer(value)
        return iter(answer) if self.streaming else iter((answer,))

    def decode_response(self, messages: Iterable[Any], progress: Callable[[int, int], None] | None = None) -> Any:
        """Return the answer of its response messages."""
        if self.streaming:
            return self._from_answer(messages, progress)
        (message,) = messages
        return self._from_answer(message)


def size_of_network(network: Network) -> dict[str, int]:
    """Return the counts of a network that admission needs."""
    sets = [element.windings.size for element in network.elements if isinstance(element, Windings)]
    return {
        "winding_count": max(sets, default=0),
        "unknown_count": len(network.nodes) + sum(sets) + len(network.elements),
    }


def _check_request(arguments: Arguments) -> Any:
    windings = arguments["windings"]
    return windings_service_pb2.CheckWindingsRequest(
        size=response_pb2.Size(winding_count=windings.size), windings=windings_to_message(windings)
    )


def _check_arguments(message: Any) -> dict[str, Any]:
    with field_path("windings"):
        return {"windings": windings_from_message(message.windings)}


def _stamp_request(arguments: Arguments) -> Any:
    network = arguments["network"]
    return network_service_pb2.StampNetworkRequest(
        size=response_pb2.Size(**size_of_network(network)), network=network_to_message(network)
    )


def _network_argument(message: Any) -> dict[str, Any]:
    return {"network": network_from_message(message.network)}


def _frequency_request(arguments: Arguments) -> Any:
    network, frequencies = arguments["network"], arguments["frequency_hz"]
    observe = observables_to_messages(arguments.get("observe"), "observe")
    adaptive = isinstance(frequencies, AdaptiveSweep)
    frequency_hz = None if adaptive else frozen_vector(_at_least_1d(frequencies), "frequency_hz")
    message = response_service_pb2.ComputeFrequencyResponseRequest(
        size=response_pb2.Size(
            point_count=0 if frequency_hz is None else frequency_hz.size,
            observable_count=len(observe),
            **size_of_network(network),
        ),
        network=network_to_message(network),
        observe=observe,
    )
    if frequency_hz is None:
        message.adaptive_sweep.start_hz = frequencies.start_hz
        message.adaptive_sweep.stop_hz = frequencies.stop_hz
        message.adaptive_sweep.tolerance_db = frequencies.tolerance_db
    else:
        message.frequency_hz.CopyFrom(array_to_message(frequency_hz))
    return message


def _frequency_arguments(message: Any) -> dict[str, Any]:
    kind = message.WhichOneof("frequencies")
    frequencies: Any
    if kind == "adaptive_sweep":
        sweep = message.adaptive_sweep
        frequencies = AdaptiveSweep(sweep.start_hz, sweep.stop_hz, sweep.tolerance_db or AdaptiveSweep.tolerance_db)
    elif kind == "frequency_hz":
        frequencies = frozen_vector(array_from_message(message.frequency_hz, "frequency_hz"), "frequency_hz")
    else:
        raise InvalidRequest.at("frequency_hz", "no frequencies found; state frequency_hz or adaptive_sweep")
    return _network_argument(message) | {
        "frequency_hz": frequencies,
        "observe": observables_from_messages(message.observe, "observe") or None,
    }


def _ports_request(arguments: Arguments) -> Any:
    network = arguments["network"]
    frequency_hz = frozen_vector(_at_least_1d(arguments["frequency_hz"]), "frequency_hz")
    return response_service_pb2.ComputePortResponseRequest(
        size=response_pb2.Size(
            point_count=frequency_hz.size, observable_count=len(network.ports) ** 2, **size_of_network(network)
        ),
        network=network_to_message(network),
        frequency_hz=array_to_message(frequency_hz),
    )


def _ports_arguments(message: Any) -> dict[str, Any]:
    frequency_hz = frozen_vector(array_from_message(message.frequency_hz, "frequency_hz"), "frequency_hz")
    return _network_argument(message) | {"frequency_hz": frequency_hz}


def _time_request(arguments: Arguments) -> Any:
    network, initial = arguments["network"], arguments.get("initial")
    observe = observables_to_messages(arguments.get("observe"), "observe")
    stop_s, step_s = float(arguments["stop_s"]), float(arguments["step_s"])
    message = response_service_pb2.ComputeTimeResponseRequest(
        size=response_pb2.Size(
            point_count=point_count(stop_s, step_s), observable_count=len(observe), **size_of_network(network)
        ),
        network=network_to_message(network),
        stop_s=stop_s,
        step_s=step_s,
        observe=observe,
        steady_start=isinstance(initial, SteadyStart),
        tolerance=float(arguments.get("tolerance") or 0.0),
    )
    if initial is not None and not isinstance(initial, SteadyStart):
        for observable, value in initial.items():
            with field_path("initial"):
                message.initial.add(observable=observable_to_message(observable), value=float(value))
    return message


def _time_arguments(message: Any) -> dict[str, Any]:
    initial: Any = None
    if message.steady_start:
        if message.initial:
            raise InvalidRequest.at("initial", "values found beside steady_start; state one or the other")
        initial = SteadyStart()
    elif message.initial:
        initial = {}
        for position, item in enumerate(message.initial):
            with field_path(f"initial[{position}].observable"):
                observable = observable_from_message(item.observable)
                if observable in initial:
                    raise InvalidRequest.at("", f"{observable!r} is given twice; give each state once")
                initial[observable] = item.value
    arguments = _network_argument(message) | {
        "stop_s": message.stop_s,
        "step_s": message.step_s,
        "observe": observables_from_messages(message.observe, "observe") or None,
        "initial": initial,
    }
    if message.tolerance:
        arguments["tolerance"] = message.tolerance
    return arguments


def point_count(stop_s: float, step_s: float) -> int:
    """Return about how many samples a run has, for admission; 0 where the numbers make no sense (the engine says why)."""
    ratio = stop_s / step_s if step_s > 0 and stop_s >= 0 else 0.0
    return int(ratio) + 1 if 0.0 <= ratio < 2.0**62 else 0


def _at_least_1d(value: Any) -> Any:
    return [value] if isinstance(value, int | float) else value


_CALLS = (
    Call(
        "/interwind.v1.WindingsService/CheckWindings", "check",
        windings_service_pb2.CheckWindingsRequest, windings_service_pb2.CheckWindingsResponse, False,
        _check_request, _check_arguments, verdict_to_message, verdict_from_message,
    ),
    Call(
        "/interwind.v1.NetworkService/StampNetwork", "stamp",
        network_service_pb2.StampNetworkRequest, network_service_pb2.StampNetworkResponse, False,
        _stamp_request, _network_argument, responses.system_to_message, responses.system_from_message,
    ),
    Call(
        "/interwind.v1.ResponseService/ComputeFrequencyResponse", "frequency_response",
        response_service_pb2.ComputeFrequencyResponseRequest, response_service_pb2.ComputeFrequencyResponseResponse, True,
        _frequency_request, _frequency_arguments, responses.frequency_to_messages, responses.frequency_from_messages,
    ),
    Call(
        "/interwind.v1.ResponseService/ComputePortResponse", "port_response",
        response_service_pb2.ComputePortResponseRequest, response_service_pb2.ComputePortResponseResponse, True,
        _ports_request, _ports_arguments, responses.ports_to_messages, responses.ports_from_messages,
    ),
    Call(
        "/interwind.v1.ResponseService/ComputeTimeResponse", "time_response",
        response_service_pb2.ComputeTimeResponseRequest, response_service_pb2.ComputeTimeResponseResponse, True,
        _time_request, _time_arguments, responses.time_to_messages, responses.time_from_messages,
    ),
)  # fmt: skip

CALLS: dict[str, Call] = {call.path: call for call in _CALLS}
BY_ENGINE: dict[str, Call] = {call.engine: call for call in _CALLS}
