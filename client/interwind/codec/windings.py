"""Winding sets and the answers about them <-> messages."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from interwind.codec.array import array_from_message, array_to_message
from interwind.codec.finding import (
    caution_from_message,
    caution_to_message,
    evidence_from_message,
    evidence_to_message,
    finding_from_message,
    finding_to_message,
)
from interwind.errors import InvalidRequest, field_path
from interwind.model.finding import Verdict
from interwind.model.report import Culprit, ValidityReport
from interwind.model.windings import WindingSet
from interwind.v1 import windings_pb2, windings_service_pb2


def windings_to_message(windings: WindingSet) -> windings_pb2.WindingSet:
    """Return the message of a winding set, in the form its owner stated."""
    message = windings_pb2.WindingSet(labels=windings.labels)
    if windings.stated_as_coupling:
        message.coupling_form.self_inductance_h.CopyFrom(array_to_message(windings.self_inductance_h))
        message.coupling_form.coupling.CopyFrom(array_to_message(windings.coupling))
    else:
        message.inductance_h.CopyFrom(array_to_message(windings.inductance_h))
    message.resistance_ohm.CopyFrom(array_to_message(windings.resistance_ohm))
    if windings.coupling_decimals is not None:
        message.coupling_decimal_count = windings.coupling_decimals
    if windings.coupling_uncertainty is not None:
        message.coupling_uncertainty.CopyFrom(array_to_message(windings.coupling_uncertainty))
    if windings.inductance_uncertainty_h is not None:
        message.inductance_uncertainty_h.CopyFrom(array_to_message(windings.inductance_uncertainty_h))
    return message


def windings_from_message(message: windings_pb2.WindingSet) -> WindingSet:
    """Return the winding set of a message; `InvalidRequest` names the field that does not fit."""

    def given(name: str) -> Any:
        return array_from_message(getattr(message, name), name) if message.HasField(name) else None

    resistance = given("resistance_ohm")
    stated: dict[str, Any] = {
        "resistance_ohm": 0.0 if resistance is None else resistance,
        "coupling_decimals": message.coupling_decimal_count if message.HasField("coupling_decimal_count") else None,
        "coupling_uncertainty": given("coupling_uncertainty"),
        "inductance_uncertainty_h": given("inductance_uncertainty_h"),
    }
    form = message.WhichOneof("form")
    if form == "inductance_h":
        return WindingSet(tuple(message.labels), array_from_message(message.inductance_h, "inductance_h"), **stated)
    if form == "coupling_form":
        with field_path("coupling_form"):
            self_inductance = array_from_message(message.coupling_form.self_inductance_h, "self_inductance_h")
            coupling = array_from_message(message.coupling_form.coupling, "coupling")
        return WindingSet.from_coupling(tuple(message.labels), self_inductance, coupling, **stated)
    raise InvalidRequest.at("inductance_h", "no inductances found; state inductance_h or coupling_form")


def verdict_to_message(report: ValidityReport) -> windings_service_pb2.CheckWindingsResponse:
    """Return the message of a verdict."""
    return windings_service_pb2.CheckWindingsResponse(
        verdict=f"VERDICT_{report.verdict.value}",
        labels=report.labels,
        eigenvalues=array_to_message(report.eigenvalues),
        eigenvalues_h=array_to_message(report.eigenvalues_h),
        witness_current_a=array_to_message(report.witness_current_a),
        witness_energy_j=report.witness_energy_j,
        culprits=[
            windings_service_pb2.Culprit(
                first=culprit.pair[0],
                second=culprit.pair[1],
                low=culprit.low,
                high=culprit.high,
                suggested=culprit.suggested,
            )
            for culprit in report.culprits
        ],
        feasible_low=array_to_message(report.feasible_low),
        feasible_high=array_to_message(report.feasible_high),
        margin=report.margin,
        impossible_subsets=[windings_service_pb2.WindingGroup(labels=labels) for labels in report.impossible_subsets],
        blame=array_to_message(report.blame),
        **noticed_to_messages(report),
    )


def verdict_from_message(message: windings_service_pb2.CheckWindingsResponse) -> ValidityReport:
    """Return the verdict of a message."""
    return ValidityReport(
        verdict=Verdict(windings_service_pb2.Verdict.Name(message.verdict).removeprefix("VERDICT_")),
        labels=tuple(message.labels),
        eigenvalues=frozen_from(message.eigenvalues, "eigenvalues"),
        eigenvalues_h=frozen_from(message.eigenvalues_h, "eigenvalues_h"),
        witness_current_a=frozen_from(message.witness_current_a, "witness_current_a"),
        witness_energy_j=message.witness_energy_j,
        culprits=tuple(
            Culprit((culprit.first, culprit.second), culprit.low, culprit.high, culprit.suggested)
            for culprit in message.culprits
        ),
        feasible_low=frozen_from(message.feasible_low, "feasible_low"),
        feasible_high=frozen_from(message.feasible_high, "feasible_high"),
        margin=message.margin,
        impossible_subsets=tuple(tuple(group.labels) for group in message.impossible_subsets),
        blame=frozen_from(message.blame, "blame"),
        **noticed_from_message(message),
    )


def noticed_to_messages(value: Any) -> dict[str, Any]:
    """Return findings, cautions and evidence of any answer as the keyword arguments of its message."""
    return {
        "findings": [finding_to_message(finding) for finding in value.findings],
        "cautions": [caution_to_message(caution) for caution in value.cautions],
        "evidence": evidence_to_message(value.evidence),
    }


def noticed_from_message(message: Any) -> dict[str, Any]:
    """Return findings, cautions and evidence of any answer's message as keyword arguments of its value."""
    findings: Iterable[Any] = message.findings
    return {
        "findings": tuple(finding_from_message(finding) for finding in findings),
        "cautions": tuple(caution_from_message(caution) for caution in message.cautions),
        "evidence": evidence_from_message(message.evidence),
    }


def frozen_from(message: Any, field: str) -> NDArray[np.float64]:
    """Return the array of an answer, read-only."""
    array = array_from_message(message, field)
    array.setflags(write=False)
    return array
