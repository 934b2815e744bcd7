"""Readings <-> messages."""

from __future__ import annotations

import math
from typing import Any

from interwind.errors import InvalidRequest, field_path
from interwind.model import readings as model
from interwind.v1 import reading_pb2

_KINDS: dict[type[Any], str] = {
    model.OpenInductance: "open_inductance",
    model.ShortedInductance: "shorted_inductance",
    model.SeriesInductance: "series_inductance",
    model.VoltageRatio: "voltage_ratio",
    model.MutualInductance: "mutual_inductance",
    model.PairLeakage: "pair_leakage",
    model.EffectiveLeakage: "effective_leakage",
    model.InverseInductance: "inverse_inductance",
}


def reading_to_message(reading: model.Reading) -> reading_pb2.Reading:
    """Return the message of a reading."""
    if type(reading) not in _KINDS:
        raise InvalidRequest.at("", f"{type(reading).__name__} found; a reading such as OpenInductance is expected")
    message = reading_pb2.Reading()
    body = getattr(message, _KINDS[type(reading)])
    body.SetInParent()
    for name in reading.__dataclass_fields__:
        value = getattr(reading, name)
        if name == "context":
            if value is not None:
                _context_to_message(value, body.context)
        elif name == "aiding":
            body.aiding.extend([sense > 0 for sense in reading.senses])  # type: ignore[union-attr]
        elif name == "windings" and not hasattr(body, "windings"):
            body.first, body.second = value
        elif name == "turns":
            body.first_turn_count, body.second_turn_count = value
        elif isinstance(value, tuple):
            getattr(body, name).extend(value)
        else:
            setattr(body, name, value)
    return message


def reading_from_message(message: reading_pb2.Reading) -> model.Reading:
    """Return the reading of a message."""
    kind = message.WhichOneof("kind")
    if kind is None:
        raise InvalidRequest.at("kind", "no reading found; state one, such as open_inductance")
    body = getattr(message, kind)
    context = _context_from_message(body) if hasattr(body, "context") else None
    if kind == "open_inductance":
        return model.OpenInductance(body.winding, body.inductance_h, body.uncertainty_h, context)
    if kind == "shorted_inductance":
        return model.ShortedInductance(
            body.winding, tuple(body.shorted), body.inductance_h, body.uncertainty_h, context
        )
    if kind == "series_inductance":
        aiding = tuple(body.aiding) or True
        return model.SeriesInductance(tuple(body.windings), aiding, body.inductance_h, body.uncertainty_h, context)
    if kind == "voltage_ratio":
        return model.VoltageRatio(body.driven, body.measured, body.ratio, body.uncertainty)
    pair = (body.first, body.second)
    if kind == "mutual_inductance":
        return model.MutualInductance(pair, body.inductance_h, body.uncertainty_h)
    if kind == "pair_leakage":
        turns = (body.first_turn_count, body.second_turn_count)
        return model.PairLeakage(pair, turns, body.inductance_h, body.uncertainty_h)
    if kind == "effective_leakage":
        return model.EffectiveLeakage(body.reference, pair, body.inductance_h, body.uncertainty_h)
    return model.InverseInductance(pair, body.inverse_inductance_per_h, body.uncertainty_per_h)


def _context_to_message(context: model.ReadingContext, body: Any) -> None:
    body.frequency_hz = context.frequency_hz
    body.form = reading_pb2.ReadingForm.Value(f"READING_FORM_{context.form.value}")
    if math.isfinite(context.quality_factor):
        body.quality_factor = context.quality_factor
    body.parallel_capacitance_f = context.parallel_capacitance_f
    body.shorted_resistance_ohm.extend(context.shorted_resistance_ohm)


def _context_from_message(body: Any) -> model.ReadingContext | None:
    if not body.HasField("context"):
        return None
    context = body.context
    parallel = context.form == reading_pb2.READING_FORM_PARALLEL
    with field_path("context"):
        return model.ReadingContext(
            context.frequency_hz,
            model.ReadingForm.PARALLEL if parallel else model.ReadingForm.SERIES,
            context.quality_factor if context.HasField("quality_factor") else math.inf,
            context.parallel_capacitance_f,
            tuple(context.shorted_resistance_ohm) or (0.0,),
        )
