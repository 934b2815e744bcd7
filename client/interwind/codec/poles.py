"""Pole reports <-> messages."""

from __future__ import annotations

from typing import Any

from numpy.typing import NDArray

from interwind.codec.array import array_from_message, array_to_message
from interwind.codec.observable import observable_to_message, observables_from_messages
from interwind.codec.windings import frozen_from, noticed_from_message, noticed_to_messages
from interwind.model.poles import PoleReport
from interwind.v1 import observable_pb2, response_service_pb2


def poles_to_message(report: PoleReport) -> response_service_pb2.ComputePolesResponse:
    """Return the message of a pole report."""
    return response_service_pb2.ComputePolesResponse(
        pole_per_s=array_to_message(report.pole_per_s),
        frequency_hz=array_to_message(report.frequency_hz),
        quality_factor=array_to_message(report.quality_factor),
        observables=[observable_to_message(item) for item in report.observables],
        residue=array_to_message(report.residue),
        zeros=[response_service_pb2.ZeroList(zero_per_s=array_to_message(zeros)) for zeros in report.zero_per_s],
        participants=[observable_pb2.WindingName(name=name, label=label) for name, label in report.participants],
        participation=array_to_message(report.participation),
        **noticed_to_messages(report),
    )


def poles_from_message(message: response_service_pb2.ComputePolesResponse) -> PoleReport:
    """Return the pole report of a message."""
    return PoleReport(
        pole_per_s=_complex_from(message.pole_per_s, "pole_per_s"),
        frequency_hz=frozen_from(message.frequency_hz, "frequency_hz"),
        quality_factor=frozen_from(message.quality_factor, "quality_factor"),
        observables=observables_from_messages(message.observables, "observables"),
        residue=_complex_from(message.residue, "residue"),
        zero_per_s=tuple(_complex_from(zeros.zero_per_s, "zero_per_s") for zeros in message.zeros),
        participants=tuple((item.name, item.label) for item in message.participants),
        participation=frozen_from(message.participation, "participation"),
        **noticed_from_message(message),
    )


def _complex_from(message: Any, field: str) -> NDArray[Any]:
    array = array_from_message(message, field, real=False)
    array.setflags(write=False)
    return array
