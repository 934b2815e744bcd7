"""Waveforms of independent sources. Values take the unit of their source (V or A); times are in seconds.

Each class states its function of time; a source is 0 before t = 0 only where the function says so.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum
from typing import Any

import numpy as np

from interwind.errors import InvalidRequest
from interwind.model.frozen import FloatArray, frozen_vector, plain_float


class _Numbers:
    """Checks that every field of a waveform is one number; what the numbers may be is the service's judgement."""

    __slots__ = ()

    def __post_init__(self) -> None:
        for name in self.__dataclass_fields__:  # type: ignore[attr-defined]
            object.__setattr__(self, name, plain_float(getattr(self, name), name))


@dataclass(frozen=True, slots=True)
class Constant(_Numbers):
    """``value`` at all times."""

    value: float


@dataclass(frozen=True, slots=True)
class Step(_Numbers):
    """0 before ``at_s``, ``value`` from ``at_s`` on."""

    value: float
    at_s: float = 0.0


@dataclass(frozen=True, slots=True)
class Ramp(_Numbers):
    """0 before ``at_s``, then ``slope_per_s`` (t − at_s)."""

    slope_per_s: float
    at_s: float = 0.0


@dataclass(frozen=True, slots=True)
class Sine(_Numbers):
    """``offset`` + ``amplitude`` sin(2π ``frequency_hz`` t + ``phase_rad``)."""

    amplitude: float
    frequency_hz: float
    phase_rad: float = 0.0
    offset: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Trapezoid(_Numbers):
    """Repeats every ``period_s``: from ``delay_s`` on rises in ``rise_s``, stays high ``high_s``, falls in ``fall_s``.

    Before ``delay_s`` the train already repeats, so a delay is a phase.
    """

    low: float
    high: float
    period_s: float
    rise_s: float
    high_s: float
    fall_s: float
    delay_s: float = 0.0


@dataclass(frozen=True, slots=True)
class DoubleExponential(_Numbers):
    """0 before 0, then ``amplitude`` (e^(−t/tail_s) − e^(−t/front_s))."""

    amplitude: float
    tail_s: float
    front_s: float


@dataclass(frozen=True, slots=True, eq=False)
class PiecewiseLinear:
    """Straight lines through (``time_s``, ``value``); the first value before them, the last one after.

    ``time_s`` shape (n,), s, never falling; two equal times are a jump. ``value`` shape (n,).
    """

    time_s: FloatArray
    value: FloatArray

    def __post_init__(self) -> None:
        time_s = frozen_vector(self.time_s, "time_s")
        value = frozen_vector(self.value, "value")
        if time_s.size == 0 or time_s.shape != value.shape:
            raise InvalidRequest.at("value", f"{value.size} values found for {time_s.size} times; as many are expected")
        if np.any(np.diff(time_s) < 0):
            position = int(np.flatnonzero(np.diff(time_s) < 0)[0]) + 1
            raise InvalidRequest.at(f"time_s[{position}]", f"{time_s[position]!r} s falls back; times never fall")
        object.__setattr__(self, "time_s", time_s)
        object.__setattr__(self, "value", value)

    def __eq__(self, other: object) -> bool:
        return (
            isinstance(other, PiecewiseLinear)
            and np.array_equal(self.time_s, other.time_s)
            and np.array_equal(self.value, other.value)
        )

    def __hash__(self) -> int:
        return hash((self.time_s.tobytes(), self.value.tobytes()))


class ImpulseShape(Enum):
    """The standard impulses, by their front and tail in µs."""

    LIGHTNING_1_2_50 = "LIGHTNING_1_2_50"
    SWITCHING_250_2500 = "SWITCHING_250_2500"
    CURRENT_8_20 = "CURRENT_8_20"
    SURGE_10_1000 = "SURGE_10_1000"
    RING_100_KHZ = "RING_100_KHZ"


@dataclass(frozen=True, slots=True)
class StandardImpulse:
    """A standard impulse of crest ``peak``, 0 before 0.

    ``chopped_at_s`` (None: a full wave) is where it collapses, within ``collapse_s`` along a straight line, to 0.
    """

    shape: ImpulseShape
    peak: float
    chopped_at_s: float | None = None
    collapse_s: float = 0.0

    def __post_init__(self) -> None:
        if not isinstance(self.shape, ImpulseShape):
            raise InvalidRequest.at("shape", f"{self.shape!r} found; an ImpulseShape is expected")
        object.__setattr__(self, "peak", plain_float(self.peak, "peak"))
        object.__setattr__(self, "collapse_s", plain_float(self.collapse_s, "collapse_s"))
        if self.chopped_at_s is not None:
            object.__setattr__(self, "chopped_at_s", plain_float(self.chopped_at_s, "chopped_at_s"))


@dataclass(frozen=True, slots=True)
class DampedSine(_Numbers):
    """``amplitude`` e^(−t/decay_s) sin(2π ``frequency_hz`` t + ``phase_rad``)."""

    amplitude: float
    frequency_hz: float
    decay_s: float
    phase_rad: float = 0.0


@dataclass(frozen=True, slots=True)
class OffsetFaultCurrent(_Numbers):
    """``amplitude`` (sin(2π ``frequency_hz`` t + ``phase_rad``) − sin(``phase_rad``) e^(−t/decay_s)): starts at 0."""

    amplitude: float
    frequency_hz: float
    decay_s: float
    phase_rad: float = -1.5707963267948966


@dataclass(frozen=True, slots=True, eq=False)
class SampledRecord:
    """Straight lines through ``value`` (n,) sampled every ``interval_s`` from ``start_s`` on; the ends hold outside."""

    interval_s: float
    value: FloatArray
    start_s: float = 0.0

    def __post_init__(self) -> None:
        object.__setattr__(self, "interval_s", plain_float(self.interval_s, "interval_s"))
        object.__setattr__(self, "start_s", plain_float(self.start_s, "start_s"))
        object.__setattr__(self, "value", frozen_vector(self.value, "value"))
        if self.value.size == 0:
            raise InvalidRequest.at("value", "no sample found; at least one is expected")

    def __eq__(self, other: object) -> bool:
        return (
            isinstance(other, SampledRecord)
            and (self.interval_s, self.start_s) == (other.interval_s, other.start_s)
            and np.array_equal(self.value, other.value)
        )

    def __hash__(self) -> int:
        return hash((self.interval_s, self.start_s, self.value.tobytes()))


Waveform = (
    Constant | Step | Ramp | Sine | Trapezoid | DoubleExponential | PiecewiseLinear
    | StandardImpulse | DampedSine | OffsetFaultCurrent | SampledRecord
)  # fmt: skip
WAVEFORMS: tuple[type[Any], ...] = (
    Constant, Step, Ramp, Sine, Trapezoid, DoubleExponential, PiecewiseLinear,
    StandardImpulse, DampedSine, OffsetFaultCurrent, SampledRecord,
)  # fmt: skip
