"""The matrix desk's answers <-> messages: repair, identification, characterization."""

from __future__ import annotations

from typing import Any

from interwind.codec.array import array_from_message, array_to_message
from interwind.codec.reading import reading_from_message, reading_to_message
from interwind.codec.windings import (
    frozen_from,
    noticed_from_message,
    noticed_to_messages,
    windings_from_message,
    windings_to_message,
)
from interwind.errors import InvalidRequest
from interwind.model import characterization as model
from interwind.model import connection
from interwind.model.identification import Identification, Outlier
from interwind.model.report import Change, RepairReport
from interwind.v1 import characterization_pb2, windings_service_pb2

_REPAIR_ARRAYS = (
    "leakage_before_h", "leakage_after_h", "all_shorted_leakage_before_h", "all_shorted_leakage_after_h",
)  # fmt: skip
_MODE_ARRAYS = ("inductance_h", "current_a", "energy_share", "time_constant_s", "decay_current_a")
_CHARACTER_ARRAYS = (
    "leakage_h", "leakage_uncertainty_h", "all_shorted_leakage_h", "all_shorted_leakage_uncertainty_h",
    "inverse_inductance_per_h",
)  # fmt: skip


def repair_to_message(report: RepairReport) -> windings_service_pb2.RepairWindingsResponse:
    """Return the message of a repair."""
    return windings_service_pb2.RepairWindingsResponse(
        windings=windings_to_message(report.windings),
        distance=report.distance,
        changes=[
            windings_service_pb2.CouplingChange(
                pair=windings_service_pb2.WindingPair(first=change.pair[0], second=change.pair[1]),
                before=change.before,
                after=change.after,
                change_in_uncertainties=change.change_in_uncertainties,
            )
            for change in report.changes
        ],
        **_to_arrays(report, _REPAIR_ARRAYS),
        **noticed_to_messages(report),
    )


def repair_from_message(message: windings_service_pb2.RepairWindingsResponse) -> RepairReport:
    """Return the repair of a message."""
    return RepairReport(
        windings=windings_from_message(message.windings),
        distance=message.distance,
        changes=tuple(
            Change((change.pair.first, change.pair.second), change.before, change.after, change.change_in_uncertainties)
            for change in message.changes
        ),
        **_from_arrays(message, _REPAIR_ARRAYS),
        **noticed_from_message(message),
    )


def identification_to_message(answer: Identification) -> windings_service_pb2.IdentifyWindingsResponse:
    """Return the message of an identification."""
    return windings_service_pb2.IdentifyWindingsResponse(
        windings=windings_to_message(answer.windings),
        chi_square=answer.chi_square,
        degree_of_freedom_count=answer.degrees_of_freedom,
        outliers=[
            windings_service_pb2.Outlier(position=item.position, windings=item.windings, residual=item.residual)
            for item in answer.outliers
        ],
        next_reading=None if answer.next_reading is None else reading_to_message(answer.next_reading),
        **_to_arrays(answer, ("covariance_h2", "residuals", "leakage_h", "leakage_uncertainty_h")),
        **noticed_to_messages(answer),
    )


def identification_from_message(message: windings_service_pb2.IdentifyWindingsResponse) -> Identification:
    """Return the identification of a message."""
    return Identification(
        windings=windings_from_message(message.windings),
        chi_square=message.chi_square,
        degrees_of_freedom=message.degree_of_freedom_count,
        outliers=tuple(Outlier(item.position, tuple(item.windings), item.residual) for item in message.outliers),
        next_reading=reading_from_message(message.next_reading) if message.HasField("next_reading") else None,
        **_from_arrays(message, ("covariance_h2", "residuals", "leakage_h", "leakage_uncertainty_h")),
        **noticed_from_message(message),
    )


def connection_to_message(value: connection.Connection) -> characterization_pb2.Connection:
    """Return the message of a connection."""
    message = characterization_pb2.Connection()
    if isinstance(value, connection.InSeries | connection.InParallel):
        body = message.in_series if isinstance(value, connection.InSeries) else message.in_parallel
        body.label = value.label
        body.windings.extend(value.windings)
        body.aiding.extend(value.aiding or ())
    elif isinstance(value, connection.Shorted):
        message.shorted = value.winding
    elif isinstance(value, connection.Open):
        message.open = value.winding
    else:
        raise InvalidRequest.at("", f"{type(value).__name__} found; a connection such as InSeries is expected")
    return message


def connection_from_message(message: characterization_pb2.Connection) -> connection.Connection:
    """Return the connection of a message."""
    kind = message.WhichOneof("kind")
    if kind is None:
        raise InvalidRequest.at("kind", "no connection found; state one, such as in_series")
    if kind == "shorted":
        return connection.Shorted(message.shorted)
    if kind == "open":
        return connection.Open(message.open)
    body = message.in_series if kind == "in_series" else message.in_parallel
    cls = connection.InSeries if kind == "in_series" else connection.InParallel
    return cls(body.label, tuple(body.windings), tuple(body.aiding) or None)


def characterization_to_message(answer: model.Characterization) -> windings_service_pb2.CharacterizeWindingsResponse:
    """Return the message of a characterization."""
    return windings_service_pb2.CharacterizeWindingsResponse(
        windings=windings_to_message(answer.windings),
        modes=characterization_pb2.Modes(**_to_arrays(answer.modes, _MODE_ARRAYS)),
        equivalents=[
            characterization_pb2.EquivalentCircuit(
                kind=f"EQUIVALENT_KIND_{circuit.kind.value}",
                reference=circuit.reference,
                branches=[
                    characterization_pb2.EquivalentBranch(windings=branch.windings, inductance_h=branch.inductance_h)
                    for branch in circuit.branches
                ],
                **_to_arrays(circuit, ("turns_ratio", "leakage_error")),
            )
            for circuit in answer.equivalents
        ],
        sharing=[
            characterization_pb2.CurrentSharing(
                label=item.label,
                windings=item.windings,
                **_to_arrays(item, ("frequency_hz", "share", "direct_share", "inductive_share")),
            )
            for item in answer.sharing
        ],
        **_to_arrays(answer, _CHARACTER_ARRAYS),
        **noticed_to_messages(answer),
    )


def characterization_from_message(
    message: windings_service_pb2.CharacterizeWindingsResponse,
) -> model.Characterization:
    """Return the characterization of a message."""
    return model.Characterization(
        windings=windings_from_message(message.windings),
        modes=model.Modes(**_from_arrays(message.modes, _MODE_ARRAYS)),
        equivalents=tuple(
            model.EquivalentCircuit(
                kind=model.EquivalentKind(
                    characterization_pb2.EquivalentKind.Name(circuit.kind).removeprefix("EQUIVALENT_KIND_")
                ),
                reference=circuit.reference,
                branches=tuple(
                    model.EquivalentBranch(tuple(branch.windings), branch.inductance_h) for branch in circuit.branches
                ),
                **_from_arrays(circuit, ("turns_ratio", "leakage_error")),
            )
            for circuit in message.equivalents
        ),
        sharing=tuple(
            model.CurrentSharing(
                label=item.label,
                windings=tuple(item.windings),
                share=array_from_message(item.share, "share", real=False),
                **_from_arrays(item, ("frequency_hz", "direct_share", "inductive_share")),
            )
            for item in message.sharing
        ),
        **_from_arrays(message, _CHARACTER_ARRAYS),
        **noticed_from_message(message),
    )


def _to_arrays(value: Any, names: tuple[str, ...]) -> dict[str, Any]:
    return {name: array_to_message(getattr(value, name)) for name in names}


def _from_arrays(message: Any, names: tuple[str, ...]) -> dict[str, Any]:
    return {name: frozen_from(getattr(message, name), name) for name in names}
