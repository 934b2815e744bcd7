"""Requests about networks <-> the arguments of their engine functions."""

from __future__ import annotations

from typing import Any

from interwind.codec import poles, port_figures
from interwind.codec import response as responses
from interwind.codec.array import array_from_message, array_to_message
from interwind.codec.call import Arguments, Call, column_count, point_count, size_of_network
from interwind.codec.initial import initial_from_messages, initial_to_messages
from interwind.codec.network import network_from_message, network_to_message
from interwind.codec.observable import observables_from_messages, observables_to_messages
from interwind.errors import InvalidRequest, field_path
from interwind.model.frozen import frozen_vector
from interwind.model.recording import Recording
from interwind.model.response import DEFAULT_TOLERANCE_DB, AdaptiveSweep
from interwind.v1 import network_service_pb2, response_pb2, response_service_pb2


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
            observable_count=column_count(network, observe),
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
        frequencies = AdaptiveSweep(sweep.start_hz, sweep.stop_hz, sweep.tolerance_db or DEFAULT_TOLERANCE_DB)
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
            point_count=frequency_hz.size, observable_count=3 * len(network.ports) ** 2, **size_of_network(network)
        ),
        network=network_to_message(network),
        frequency_hz=array_to_message(frequency_hz),
    )


def _ports_arguments(message: Any) -> dict[str, Any]:
    frequency_hz = frozen_vector(array_from_message(message.frequency_hz, "frequency_hz"), "frequency_hz")
    return _network_argument(message) | {"frequency_hz": frequency_hz}


def _figures_request(arguments: Arguments) -> Any:
    network = arguments["network"]
    frequency_hz = frozen_vector(_at_least_1d(arguments["frequency_hz"]), "frequency_hz")
    figures = port_figures.figures_to_messages(arguments["figures"])
    return response_service_pb2.ComputePortFiguresRequest(
        size=response_pb2.Size(
            point_count=frequency_hz.size,
            observable_count=3 * len(network.ports) ** 2 + len(figures),
            **size_of_network(network),
        ),
        network=network_to_message(network),
        frequency_hz=array_to_message(frequency_hz),
        figures=figures,
    )


def _figures_arguments(message: Any) -> dict[str, Any]:
    return _ports_arguments(message) | {"figures": port_figures.figures_from_messages(message.figures)}


def _time_request(arguments: Arguments) -> Any:
    network = arguments["network"]
    observe = observables_to_messages(arguments.get("observe"), "observe")
    stop_s, step_s, recording = float(arguments["stop_s"]), float(arguments["step_s"]), arguments.get("recording")
    message = response_service_pb2.ComputeTimeResponseRequest(
        size=response_pb2.Size(
            point_count=point_count(stop_s, step_s, recording),
            observable_count=column_count(network, observe),
            **size_of_network(network),
        ),
        network=network_to_message(network),
        stop_s=stop_s,
        step_s=step_s,
        observe=observe,
        tolerance=float(arguments.get("tolerance") or 0.0),
    )
    if recording is not None:
        message.recording.from_s, message.recording.every_count = recording.from_s, recording.every
        message.recording.envelope = recording.envelope
        if recording.until_s is not None:
            message.recording.until_s = recording.until_s
    message.steady_start = initial_to_messages(arguments.get("initial"), message.initial)
    return message


def _time_arguments(message: Any) -> dict[str, Any]:
    arguments = _network_argument(message) | {
        "stop_s": message.stop_s,
        "step_s": message.step_s,
        "observe": observables_from_messages(message.observe, "observe") or None,
        "initial": initial_from_messages(message.initial, steady_start=message.steady_start),
        "recording": _recording(message.recording) if message.HasField("recording") else None,
    }
    if message.tolerance:
        arguments["tolerance"] = message.tolerance
    return arguments


def _at_least_1d(value: Any) -> Any:
    return [value] if isinstance(value, int | float) else value


def _recording(message: Any) -> Recording:
    until_s = message.until_s if message.HasField("until_s") else None
    with field_path("recording"):
        return Recording(message.from_s, until_s, message.every_count or 1, message.envelope)


def _periodic_request(arguments: Arguments) -> Any:
    network = arguments["network"]
    observe = observables_to_messages(arguments.get("observe"), "observe")
    period_s, step_s = float(arguments["period_s"]), float(arguments["step_s"])
    return response_service_pb2.ComputePeriodicResponseRequest(
        size=response_pb2.Size(
            point_count=point_count(period_s, step_s),
            observable_count=column_count(network, observe),
            **size_of_network(network),
        ),
        network=network_to_message(network),
        period_s=period_s,
        step_s=step_s,
        observe=observe,
        tolerance=float(arguments.get("tolerance") or 0.0),
    )


def _periodic_arguments(message: Any) -> dict[str, Any]:
    arguments = _network_argument(message) | {
        "period_s": message.period_s,
        "step_s": message.step_s,
        "observe": observables_from_messages(message.observe, "observe") or None,
    }
    if message.tolerance:
        arguments["tolerance"] = message.tolerance
    return arguments


def _poles_request(arguments: Arguments) -> Any:
    network = arguments["network"]
    observe = observables_to_messages(arguments.get("observe"), "observe")
    message = response_service_pb2.ComputePolesRequest(
        size=response_pb2.Size(observable_count=len(observe), **size_of_network(network)),
        network=network_to_message(network),
        observe=observe,
    )
    if arguments.get("around_hz") is not None:
        message.around_hz = float(arguments["around_hz"])
    return message


def _poles_arguments(message: Any) -> dict[str, Any]:
    return _network_argument(message) | {
        "observe": observables_from_messages(message.observe, "observe") or None,
        "around_hz": message.around_hz if message.HasField("around_hz") else None,
    }


RESPONSE_CALLS = (
    Call(
        "/interwind.v1.ResponseService/ComputePoles", "poles",
        response_service_pb2.ComputePolesRequest, response_service_pb2.ComputePolesResponse, False,
        _poles_request, _poles_arguments, poles.poles_to_message, poles.poles_from_message,
    ),
    Call(
        "/interwind.v1.NetworkService/StampNetwork", "stamp",
        network_service_pb2.StampNetworkRequest, network_service_pb2.StampNetworkResponse, False,
        _stamp_request, _network_argument, responses.system_to_message, responses.system_from_message,
    ),
    Call(
        "/interwind.v1.ResponseService/ComputeFrequencyResponse", "frequency_response",
        response_service_pb2.ComputeFrequencyResponseRequest,
        response_service_pb2.ComputeFrequencyResponseResponse, True,
        _frequency_request, _frequency_arguments, responses.frequency_to_messages, responses.frequency_from_messages,
    ),
    Call(
        "/interwind.v1.ResponseService/ComputePortResponse", "port_response",
        response_service_pb2.ComputePortResponseRequest, response_service_pb2.ComputePortResponseResponse, True,
        _ports_request, _ports_arguments, responses.ports_to_messages, responses.ports_from_messages,
    ),
    Call(
        "/interwind.v1.ResponseService/ComputePortFigures", "port_figures",
        response_service_pb2.ComputePortFiguresRequest, response_service_pb2.ComputePortFiguresResponse, False,
        _figures_request, _figures_arguments,
        port_figures.port_figures_to_message, port_figures.port_figures_from_message,
    ),
    Call(
        "/interwind.v1.ResponseService/ComputeTimeResponse", "time_response",
        response_service_pb2.ComputeTimeResponseRequest, response_service_pb2.ComputeTimeResponseResponse, True,
        _time_request, _time_arguments, responses.time_to_messages, responses.time_from_messages,
    ),
    Call(
        "/interwind.v1.ResponseService/ComputePeriodicResponse", "periodic_response",
        response_service_pb2.ComputePeriodicResponseRequest, response_service_pb2.ComputePeriodicResponseResponse, True,
        _periodic_request, _periodic_arguments, responses.periodic_to_messages, responses.periodic_from_messages,
    ),
)  # fmt: skip
