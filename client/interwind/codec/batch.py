"""Batches <-> messages: what is submitted, how far it has come, and the rows."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from interwind.codec.array import array_from_message, array_to_message
from interwind.codec.call import size_of_network
from interwind.codec.initial import initial_from_messages, initial_to_messages
from interwind.codec.network import network_from_message, network_to_message
from interwind.codec.observable import observables_from_messages, observables_to_messages
from interwind.codec.reading import reading_from_message, reading_to_message
from interwind.codec.stream import NamedArray, decode_stream, encode_stream
from interwind.errors import InvalidRequest, field_path
from interwind.model import batch as model
from interwind.model import vary
from interwind.model.finding import Evidence
from interwind.model.network import Network
from interwind.model.observables import Observable
from interwind.v1 import batch_pb2, batch_service_pb2, response_pb2

STATUSES = tuple(model.VariantStatus)  # the wire numbers are 1 + the position
_STATES = {batch_pb2.BatchState.Value(f"BATCH_STATE_{state.value}"): state for state in model.BatchState}


@dataclass(frozen=True, slots=True, eq=False)
class Submission:
    """What SubmitBatch carries."""

    network: Network
    analysis: model.Analysis
    columns: tuple[vary.Column, ...]
    request_id: str = ""
    validate_only: bool = False


def submission_to_message(submission: Submission) -> Any:
    """Return the request message of a submission."""
    analysis = submission.analysis
    observe = getattr(analysis, "observe", None)
    message = batch_service_pb2.SubmitBatchRequest(
        size=response_pb2.Size(
            variant_count=vary.variant_count(submission.columns),
            observable_count=len(observe or ()),
            point_count=model.point_count(analysis),
            **size_of_network(submission.network),
        ),
        request_id=submission.request_id,
        validate_only=submission.validate_only,
        network=network_to_message(submission.network),
        columns=[_column_to_message(column) for column in submission.columns],
    )
    if isinstance(analysis, model.FrequencyAnalysis):
        message.frequency.frequency_hz.CopyFrom(array_to_message(analysis.frequency_hz))
    elif isinstance(analysis, model.TimeAnalysis):
        message.time.stop_s, message.time.step_s = analysis.stop_s, analysis.step_s
        message.time.tolerance = analysis.tolerance
        message.time.steady_start = initial_to_messages(analysis.initial, message.time.initial)
    elif isinstance(analysis, model.PeriodicAnalysis):
        message.periodic.period_s, message.periodic.step_s = analysis.period_s, analysis.step_s
        message.periodic.tolerance = analysis.tolerance
    else:
        message.check.SetInParent()
        message.check.windings_name = analysis.windings_name or ""
    if observe:
        body = getattr(message, message.WhichOneof("analysis") or "")
        body.observe.extend(observables_to_messages(observe, "analysis.observe"))
    return message


def submission_from_message(message: Any) -> Submission:
    """Return the submission of a request message; `InvalidRequest` names the field that does not fit."""
    if len(message.request_id) > 128:
        raise InvalidRequest.at("request_id", f"{len(message.request_id)} characters found; at most 128 are allowed")
    with field_path("network"):
        network = network_from_message(message.network)
    columns = []
    for position, column in enumerate(message.columns):
        with field_path(f"columns[{position}]"):
            columns.append(_column_from_message(column))
    kind = message.WhichOneof("analysis")
    if kind is None:
        raise InvalidRequest.at("analysis", "none found; state frequency, time, periodic or check")
    with field_path(kind):
        analysis = _ANALYSES[kind](getattr(message, kind))
    return Submission(network, analysis, tuple(columns), message.request_id, message.validate_only)


def _frequency(body: Any) -> model.Analysis:
    frequency_hz = array_from_message(body.frequency_hz, "frequency_hz")
    return model.FrequencyAnalysis(frequency_hz, observables_from_messages(body.observe, "observe") or None)


def _time(body: Any) -> model.Analysis:
    initial = initial_from_messages(body.initial, steady_start=body.steady_start)
    observe = observables_from_messages(body.observe, "observe") or None
    return model.TimeAnalysis(body.stop_s, body.step_s, observe, initial, body.tolerance or 1e-6)


def _periodic(body: Any) -> model.Analysis:
    observe = observables_from_messages(body.observe, "observe") or None
    return model.PeriodicAnalysis(body.period_s, body.step_s, observe, body.tolerance or 1e-6)


_ANALYSES: dict[str, Callable[[Any], model.Analysis]] = {
    "frequency": _frequency,
    "time": _time,
    "periodic": _periodic,
    "check": lambda body: model.CheckAnalysis(body.windings_name or None),
}


def _column_to_message(column: vary.Column) -> Any:
    message = batch_pb2.OverrideColumn()
    if isinstance(column, vary.Vary):
        message.vary.element, message.vary.field = column.element, column.field
        message.vary.values.CopyFrom(array_to_message(column.values))
    elif isinstance(column, vary.VaryCoupling):
        message.coupling.windings_name = column.windings_name
        message.coupling.label_a, message.coupling.label_b = column.pair
        message.coupling.values.CopyFrom(array_to_message(column.values))
    elif isinstance(column, vary.VaryInductance):
        message.inductance.windings_name = column.windings_name
        message.inductance.label_a, message.inductance.label_b = column.pair
        message.inductance.values_h.CopyFrom(array_to_message(column.values_h))
    elif isinstance(column, vary.VaryMatrix):
        message.matrix.windings_name = column.windings_name
        message.matrix.inductance_h.CopyFrom(array_to_message(column.inductance_h))
    elif isinstance(column, vary.VaryReadings):
        message.readings.windings_name = column.windings_name
        message.readings.readings.extend(reading_to_message(reading) for reading in column.readings)
        message.readings.values.CopyFrom(array_to_message(column.values))
    else:
        message.sample.CopyFrom(
            batch_pb2.SampleWindings(
                windings_name=column.windings_name,
                variant_count=column.count,
                spread=column.spread,
                self_spread=column.self_spread,
                parameter=f"SAMPLE_PARAMETER_{column.parameter.value}",
                seed=column.seed,
            )
        )
    return message


def _column_from_message(message: Any) -> vary.Column:
    kind = message.WhichOneof("kind")
    if kind is None:
        raise InvalidRequest.at("kind", "nothing varies; state one, such as vary")
    body = getattr(message, kind)
    with field_path(kind):
        if kind == "vary":
            return vary.Vary(body.element, body.field, array_from_message(body.values, "values"))
        if kind == "matrix":
            return vary.VaryMatrix(body.windings_name, array_from_message(body.inductance_h, "inductance_h"))
        if kind == "readings":
            readings = []
            for position, reading in enumerate(body.readings):
                with field_path(f"readings[{position}]"):
                    readings.append(reading_from_message(reading))
            return vary.VaryReadings(body.windings_name, tuple(readings), array_from_message(body.values, "values"))
        if kind == "sample":
            name = batch_pb2.SampleParameter.Name(body.parameter).removeprefix("SAMPLE_PARAMETER_")
            parameter = vary.SampleParameter("LEAKAGE" if name == "UNSPECIFIED" else name)
            return vary.SampleWindings(
                body.windings_name, body.variant_count, body.spread, body.self_spread, parameter, body.seed
            )
        pair = (body.label_a, body.label_b)
        if kind == "coupling":
            return vary.VaryCoupling(body.windings_name, pair, array_from_message(body.values, "values"))
        return vary.VaryInductance(body.windings_name, pair, array_from_message(body.values_h, "values_h"))


def progress_to_message(progress: model.BatchProgress) -> Any:
    """Return the message of a batch and how far it has come."""
    message = batch_pb2.Batch(
        batch_id=progress.batch_id,
        state=f"BATCH_STATE_{progress.state.value}",
        done=progress.done,
        variant_count=progress.variant_count,
        ok_count=progress.ok_count,
        invalid_count=progress.invalid_count,
        failed_count=progress.failed_count,
        cancelled_count=progress.cancelled_count,
        sequence=progress.sequence,
        request_id=progress.request_id,
        held_reason=progress.held_reason,
    )
    for name in ("create_time", "done_time", "expire_time"):
        seconds = getattr(progress, f"{name}_s")
        if seconds is not None:
            getattr(message, name).FromNanoseconds(round(seconds * 1e3) * 1_000_000)
    if progress.forecast is not None:
        message.forecast.duration_s = progress.forecast.duration_s
        message.forecast.result_bytes = progress.forecast.result_bytes
        message.forecast.memory_bytes = progress.forecast.memory_bytes
        message.forecast.chunk_count = progress.forecast.chunk_count
    return message


def progress_from_message(message: Any) -> model.BatchProgress:
    """Return a batch and how far it has come from its message."""

    def seconds(name: str) -> float | None:
        return getattr(message, name).ToNanoseconds() / 1e9 if message.HasField(name) else None

    forecast = message.forecast
    return model.BatchProgress(
        batch_id=message.batch_id,
        state=_STATES.get(message.state, model.BatchState.WAITING),
        variant_count=message.variant_count,
        ok_count=message.ok_count,
        invalid_count=message.invalid_count,
        failed_count=message.failed_count,
        cancelled_count=message.cancelled_count,
        sequence=message.sequence,
        request_id=message.request_id,
        create_time_s=seconds("create_time") or 0.0,
        done_time_s=seconds("done_time"),
        expire_time_s=seconds("expire_time"),
        forecast=model.CostForecast(
            forecast.duration_s, forecast.result_bytes, forecast.memory_bytes, forecast.chunk_count
        )
        if message.HasField("forecast")
        else None,
        held_reason=message.held_reason,
    )


def statuses_from_message(statuses: Sequence[int]) -> NDArray[np.object_]:
    """Return the status of each row of a chunk."""
    table = np.array([None, *STATUSES], dtype=object)
    return np.asarray(table[np.asarray(statuses, dtype=np.int64)])


def header_from_message(header: Any) -> tuple[tuple[Observable | str, ...], NDArray[np.float64]]:
    """Return what the columns of a result are and its points; after a check the one column is ``eigenvalues``."""
    columns: tuple[Observable | str, ...] = observables_from_messages(header.columns, "columns")
    points = array_from_message(header.points, "points")
    return columns or ("eigenvalues",), points


def summary_to_messages(summary: model.BatchSummary) -> Iterator[Any]:
    """Yield the response messages of a summary."""
    keys = tuple(summary.quantiles)
    columns = tuple(key for key in keys if not isinstance(key, str))

    def side_by_side(name: str) -> NamedArray:
        return NamedArray(name, np.stack([getattr(summary, name)[key] for key in keys], axis=-1), columns)

    arrays = [NamedArray("levels", summary.levels), NamedArray("points", summary.points)]
    arrays += [side_by_side(name) for name in _SIDE_BY_SIDE]
    arrays.append(NamedArray("row_count", np.array(summary.row_count, dtype=np.int64)))
    yield from encode_stream(batch_service_pb2.SummarizeBatchResponse, arrays, _Plain())


def summary_from_messages(messages: Iterable[Any]) -> model.BatchSummary:
    """Return the summary of its response messages."""
    result = decode_stream(messages)
    keys: tuple[Observable | str, ...] = result.columns["quantiles"] or ("eigenvalues",)

    def by_key(name: str) -> dict[Observable | str, Any]:
        return {key: result.arrays[name][..., k] for k, key in enumerate(keys)}

    return model.BatchSummary(
        levels=result.arrays["levels"],
        points=result.arrays["points"],
        row_count=int(result.arrays["row_count"]),
        **{name: by_key(name) for name in _SIDE_BY_SIDE},
    )


_SIDE_BY_SIDE = ("quantiles", "highest_rows", "highest", "lowest_rows", "lowest")


class _Plain:
    """An answer that carries no evidence of its own."""

    evidence = Evidence()
    findings: tuple[Any, ...] = ()
    cautions: tuple[Any, ...] = ()
