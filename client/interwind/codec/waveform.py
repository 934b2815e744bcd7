"""Waveforms <-> messages. Classes and messages spell their fields alike, so one table serves both directions."""

from __future__ import annotations

from dataclasses import fields
from typing import Any

from interwind.codec.array import array_from_message, array_to_message
from interwind.errors import InvalidRequest, field_path
from interwind.model import waveform as model
from interwind.v1 import waveform_pb2

_SHAPES: dict[str, type[Any]] = {
    "constant": model.Constant,
    "step": model.Step,
    "ramp": model.Ramp,
    "sine": model.Sine,
    "trapezoid": model.Trapezoid,
    "double_exponential": model.DoubleExponential,
    "damped_sine": model.DampedSine,
    "offset_fault_current": model.OffsetFaultCurrent,
}
_NAMES = {cls: name for name, cls in _SHAPES.items()}


def waveform_to_message(waveform: model.Waveform) -> waveform_pb2.Waveform:
    """Return the message of a waveform."""
    message = waveform_pb2.Waveform()
    if isinstance(waveform, model.PiecewiseLinear):
        message.piecewise_linear.time_s.CopyFrom(array_to_message(waveform.time_s))
        message.piecewise_linear.value.CopyFrom(array_to_message(waveform.value))
        return message
    if isinstance(waveform, model.SampledRecord):
        message.sampled_record.interval_s, message.sampled_record.start_s = waveform.interval_s, waveform.start_s
        message.sampled_record.value.CopyFrom(array_to_message(waveform.value))
        return message
    if isinstance(waveform, model.StandardImpulse):
        message.standard_impulse.CopyFrom(
            waveform_pb2.StandardImpulse(
                shape=f"IMPULSE_SHAPE_{waveform.shape.value}",
                peak=waveform.peak,
                chopped_at_s=waveform.chopped_at_s,
                collapse_s=waveform.collapse_s,
            )
        )
        return message
    shape = getattr(message, _NAMES[type(waveform)])
    shape.SetInParent()
    for field in fields(waveform):
        setattr(shape, field.name, getattr(waveform, field.name))
    return message


def waveform_from_message(message: waveform_pb2.Waveform) -> model.Waveform:
    """Return the waveform of a message."""
    name = message.WhichOneof("shape")
    if name is None:
        raise InvalidRequest.at("shape", "no waveform found; state one, such as step")
    shape = getattr(message, name)
    with field_path(name):
        if name == "piecewise_linear":
            return model.PiecewiseLinear(
                array_from_message(shape.time_s, "time_s"), array_from_message(shape.value, "value")
            )
        if name == "sampled_record":
            return model.SampledRecord(shape.interval_s, array_from_message(shape.value, "value"), shape.start_s)
        if name == "standard_impulse":
            return _impulse_from_message(shape)
        cls = _SHAPES[name]
        waveform: model.Waveform = cls(**{field.name: getattr(shape, field.name) for field in fields(cls)})
        return waveform


def _impulse_from_message(message: waveform_pb2.StandardImpulse) -> model.StandardImpulse:
    name = waveform_pb2.ImpulseShape.Name(message.shape).removeprefix("IMPULSE_SHAPE_") if message.shape else ""
    if name not in model.ImpulseShape.__members__:
        raise InvalidRequest.at("shape", "no impulse found; state one, such as IMPULSE_SHAPE_LIGHTNING_1_2_50")
    chopped = message.chopped_at_s if message.HasField("chopped_at_s") else None
    return model.StandardImpulse(model.ImpulseShape(name), message.peak, chopped, message.collapse_s)
