"""Answers of the solver <-> messages: stamped matrices, and the streamed responses."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from typing import Any

from interwind.codec.array import array_to_message
from interwind.codec.finding import caution_from_message, evidence_from_message, finding_from_message
from interwind.codec.observable import observable_to_message, observables_from_messages
from interwind.codec.stream import NamedArray, StreamResult, decode_stream, encode_stream
from interwind.codec.windings import frozen_from, noticed_from_message, noticed_to_messages
from interwind.model.periodic import PeriodicResponse
from interwind.model.recording import RecordFigures
from interwind.model.response import (
    EnergyLedger,
    Event,
    FrequencyResponse,
    MnaSystem,
    PortResponse,
    TimeResponse,
)
from interwind.v1 import network_service_pb2, response_pb2, response_service_pb2

Messages = Iterable[Any]
ProgressCallback = Callable[[int, int], None] | None
_FIGURES = ("means", "rmses", "peaks", "peak_times_s")
_PERIODIC_ARRAYS = ("time_s", "means", "rmses", "peaks", "peak_times_s", "harmonic_values", "multipliers")


def system_to_message(system: MnaSystem) -> network_service_pb2.StampNetworkResponse:
    """Return the message of a stamped system."""
    return network_service_pb2.StampNetworkResponse(
        conductance_matrix=array_to_message(system.G),
        storage_matrix=array_to_message(system.C),
        input_matrix=array_to_message(system.B),
        unknowns=[observable_to_message(unknown) for unknown in system.unknowns],
        inputs=system.inputs,
        **noticed_to_messages(system),
    )


def system_from_message(message: network_service_pb2.StampNetworkResponse) -> MnaSystem:
    """Return the stamped system of a message."""
    return MnaSystem(
        G=frozen_from(message.conductance_matrix, "G"),
        C=frozen_from(message.storage_matrix, "C"),
        B=frozen_from(message.input_matrix, "B"),
        unknowns=observables_from_messages(message.unknowns, "unknowns"),
        inputs=tuple(message.inputs),
        **noticed_from_message(message),
    )


def frequency_to_messages(response: FrequencyResponse) -> Iterator[Any]:
    """Yield the messages of a frequency response."""
    return encode_stream(
        response_service_pb2.ComputeFrequencyResponseResponse,
        [
            NamedArray("frequency_hz", response.frequency_hz),
            NamedArray("samples", response.samples, response.observables),
        ],
        response,
    )


def frequency_from_messages(messages: Messages, progress: ProgressCallback = None) -> FrequencyResponse:
    """Put a frequency response together."""
    result = decode_stream(messages, progress)
    return FrequencyResponse(
        result.columns["samples"],
        result.arrays["samples"],
        frequency_hz=result.arrays["frequency_hz"],
        **_noticed(result),
    )


def ports_to_messages(response: PortResponse) -> Iterator[Any]:
    """Yield the messages of a port response."""
    return encode_stream(
        response_service_pb2.ComputePortResponseResponse,
        [
            NamedArray("frequency_hz", response.frequency_hz),
            NamedArray("impedance_ohm", response.impedance_ohm, port_names=response.ports),
            NamedArray("admittance_s", response.admittance_s, port_names=response.ports),
            NamedArray("scattering", response.scattering, port_names=response.ports),
        ],
        response,
    )


def ports_from_messages(messages: Messages, progress: ProgressCallback = None) -> PortResponse:
    """Put a port response together."""
    result = decode_stream(messages, progress)
    return PortResponse(
        result.port_names["scattering"],
        result.arrays["frequency_hz"],
        result.arrays["impedance_ohm"],
        result.arrays["admittance_s"],
        result.arrays["scattering"],
        **_noticed(result),
    )


def time_to_messages(response: TimeResponse) -> Iterator[Any]:
    """Yield the messages of a time response."""
    arrays = [NamedArray("samples", response.samples, response.observables), NamedArray("time_s", response.time_s)]
    for name in ("lowest", "highest"):
        if getattr(response, name) is not None:
            arrays.append(NamedArray(name, getattr(response, name), response.observables))
    if response.figures is not None:
        arrays += [NamedArray(name, getattr(response.figures, name)) for name in _FIGURES]
    part = response_service_pb2.ComputeTimeResponseResponse
    return encode_stream(part, arrays, response, lambda trailer: time_trailer(response, trailer))


def time_trailer(response: TimeResponse, trailer: response_pb2.ResultTrailer) -> None:
    """Put the events and the ledger of a time response into its trailer."""
    _events_to_messages(response.events, trailer)
    if response.ledger is not None:
        trailer.ledger.CopyFrom(ledger_to_message(response.ledger))


def time_from_messages(messages: Messages, progress: ProgressCallback = None) -> TimeResponse:
    """Put a time response together."""
    result = decode_stream(messages, progress)
    trailer = result.trailer
    return TimeResponse(
        result.columns["samples"],
        result.arrays["samples"],
        time_s=result.arrays["time_s"],
        events=events_from_messages(trailer.events),
        ledger=ledger_from_message(trailer.ledger) if trailer.HasField("ledger") else None,
        figures=RecordFigures(**_arrays(result, _FIGURES)) if "means" in result.arrays else None,
        lowest=result.arrays.get("lowest"),
        highest=result.arrays.get("highest"),
        **_noticed(result),
    )


def periodic_to_messages(response: PeriodicResponse) -> Iterator[Any]:
    """Yield the messages of a periodic response."""

    def finish(trailer: response_pb2.ResultTrailer) -> None:
        _events_to_messages(response.events, trailer)
        if response.ledger is not None:
            trailer.ledger.CopyFrom(ledger_to_message(response.ledger))
        trailer.mean_power_w.update(response.mean_power_w)
        trailer.period_s = response.period_s

    arrays = [NamedArray(name, getattr(response, name)) for name in _PERIODIC_ARRAYS]
    return encode_stream(
        response_service_pb2.ComputePeriodicResponseResponse,
        [NamedArray("samples", response.samples, response.observables), *arrays],
        response,
        finish,
    )


def periodic_from_messages(messages: Messages, progress: ProgressCallback = None) -> PeriodicResponse:
    """Put a periodic response together."""
    result = decode_stream(messages, progress)
    trailer = result.trailer
    return PeriodicResponse(
        result.columns["samples"],
        result.arrays["samples"],
        period_s=trailer.period_s,
        mean_power_w=dict(trailer.mean_power_w),
        events=events_from_messages(trailer.events),
        ledger=ledger_from_message(trailer.ledger) if trailer.HasField("ledger") else None,
        **_arrays(result, _PERIODIC_ARRAYS),
        **_noticed(result),
    )


def _events_to_messages(events: Iterable[Event], trailer: response_pb2.ResultTrailer) -> None:
    for event in events:
        trailer.events.add(time_s=event.time_s, element=event.element, state=event.state)


def events_from_messages(messages: Messages) -> tuple[Event, ...]:
    """Return the events of a trailer."""
    return tuple(Event(event.time_s, event.element, event.state) for event in messages)


def ledger_to_message(ledger: EnergyLedger) -> response_pb2.EnergyLedger:
    """Return the message of an energy ledger."""
    return response_pb2.EnergyLedger(
        supplied_j=ledger.supplied_j,
        dissipated_j=ledger.dissipated_j,
        stored_change_j=ledger.stored_change_j,
        lost_in_jumps_j=ledger.lost_in_jumps_j,
        numerical_j=ledger.numerical_j,
        dissipated_by_element_j=dict(ledger.dissipated_by_element_j),
    )


def ledger_from_message(message: response_pb2.EnergyLedger) -> EnergyLedger:
    """Return the energy ledger of a message."""
    return EnergyLedger(
        message.supplied_j,
        message.dissipated_j,
        message.stored_change_j,
        message.lost_in_jumps_j,
        message.numerical_j,
        dict(message.dissipated_by_element_j),
    )


def _noticed(result: StreamResult) -> dict[str, Any]:
    return {
        "findings": tuple(finding_from_message(finding) for finding in result.trailer.findings),
        "cautions": tuple(caution_from_message(caution) for caution in result.trailer.cautions),
        "evidence": evidence_from_message(result.trailer.evidence),
    }


def _arrays(result: StreamResult, names: Iterable[str]) -> dict[str, Any]:
    return {name: result.arrays[name] for name in names}
