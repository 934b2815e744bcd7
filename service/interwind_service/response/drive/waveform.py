"""Waveforms as generators: ξ' = S ξ, u = h ξ between events, ξ known in closed form at every instant.

Constants, sines, exponentials and t^n e^(−t/τ) are generators of 1, 2, 1 and n + 1 states; everything made of
straight lines is a generator (value, slope) whose state changes at its corners, the events. So every drive is exact at
any instant, and a run never depends on how its output grid falls on the waveform (Van Loan 1978).
"""

from __future__ import annotations

from collections.abc import Callable, Hashable
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest
from interwind.model import waveform as wf
from interwind_service.response.drive.corners import Corners, corners_of, snap
from interwind_service.response.drive.impulse_shapes import SHAPES
from interwind_service.tolerances import LARGEST_RATE

FloatArray = NDArray[np.float64]
_LINE = np.array([[0.0, 1.0], [0.0, 0.0]])


@dataclass(frozen=True, slots=True, eq=False)
class Channel:
    """One generator and how its source reads it.

    ``matrix`` S (g, g), 1/s; ``output`` h (g,); ``state`` maps times (T,) to ξ (T, g), limits from the right;
    ``events`` (E,) rising, s, where ξ changes otherwise than by S; channels of one ``key`` are one generator (None: its
    own).
    """

    matrix: FloatArray
    output: FloatArray
    state: Callable[[FloatArray], FloatArray]
    events: FloatArray = field(default_factory=lambda: np.empty(0))
    key: Hashable = None


def channels_of(waveform: wf.Waveform, stop_s: float, step_s: float) -> list[Channel]:
    """Return the generators whose outputs add up to a waveform from 0 to ``stop_s``.

    Corners within rounding of a multiple of ``step_s`` are put on it: a sample there is the limit from the right.

    Raises
    ------
    InvalidRequest : a number of the waveform outside its domain, or more corners than a run may have.
    """
    if isinstance(waveform, wf.Constant):
        return [_constant(waveform.value)]
    if isinstance(waveform, wf.Sine):
        _finite(waveform, "amplitude", "frequency_hz", "phase_rad", "offset")
        own = _sine(waveform.amplitude, waveform.frequency_hz, waveform.phase_rad)
        return [own] + ([_constant(waveform.offset)] if waveform.offset else [])
    if isinstance(waveform, wf.DoubleExponential):
        _finite(waveform, "amplitude")
        _positive(waveform, "tail_s", "front_s")
        return [
            _exponential(waveform.amplitude, 1.0 / waveform.tail_s),
            _exponential(-waveform.amplitude, 1.0 / waveform.front_s),
        ]
    if isinstance(waveform, wf.DampedSine):
        _finite(waveform, "amplitude", "frequency_hz", "phase_rad")
        _positive(waveform, "decay_s")
        return [_damped(waveform.amplitude, 1.0 / waveform.decay_s, waveform.frequency_hz, waveform.phase_rad)]
    if isinstance(waveform, wf.OffsetFaultCurrent):
        _finite(waveform, "amplitude", "frequency_hz", "phase_rad")
        _positive(waveform, "decay_s")
        offset = -waveform.amplitude * float(np.sin(waveform.phase_rad))
        return [
            _sine(waveform.amplitude, waveform.frequency_hz, waveform.phase_rad),
            _exponential(offset, 1.0 / waveform.decay_s),
        ]
    if isinstance(waveform, wf.StandardImpulse):
        return _impulse(waveform, step_s)
    return [_line(corners_of(waveform, stop_s, step_s))]


def _constant(value: float) -> Channel:
    if not np.isfinite(value):
        raise InvalidRequest.at("value", f"{value!r} found; a finite number is expected")
    return Channel(np.zeros((1, 1)), np.array([value]), lambda t: np.ones((len(t), 1)), key="constant")


def _sine(amplitude: float, frequency_hz: float, phase_rad: float) -> Channel:
    return _damped(amplitude, 0.0, frequency_hz, phase_rad)


def _damped(amplitude: float, rate: float, frequency_hz: float, phase_rad: float) -> Channel:
    if not abs(frequency_hz) <= LARGEST_RATE:
        raise InvalidRequest.at("frequency_hz", f"{frequency_hz!r} found; at most {LARGEST_RATE:g} Hz is expected")
    omega = 2.0 * np.pi * frequency_hz

    def state(time_s: FloatArray) -> FloatArray:
        angle = 2.0 * np.pi * np.remainder(frequency_hz * time_s, 1.0)
        envelope = np.exp(-rate * time_s)
        return np.stack((envelope * np.sin(angle), envelope * np.cos(angle)), axis=1)

    return Channel(
        np.array([[-rate, omega], [-omega, -rate]]),
        amplitude * np.array([np.cos(phase_rad), np.sin(phase_rad)]),
        state,
        key=("damped", rate, frequency_hz),
    )


def _exponential(amplitude: float, rate: float) -> Channel:
    return Channel(
        np.array([[-rate]]),
        np.array([amplitude]),
        lambda t: np.exp(-rate * t)[:, None],
        key=("exponential", rate),
    )


def _power(amplitude: float, power: int, decay_s: float) -> Channel:
    """Amplitude (t/decay)^power e^(−t/decay): a Jordan chain of power + 1 states."""
    orders = np.arange(power + 1)
    matrix = (np.diag(orders[1:].astype(float), -1) - np.eye(power + 1)) / decay_s
    output = np.zeros(power + 1)
    output[-1] = amplitude
    return Channel(
        matrix,
        output,
        lambda t: (t[:, None] / decay_s) ** orders * np.exp(-t / decay_s)[:, None],
        key=("power", power, decay_s),
    )


def _line(corners: Corners) -> Channel:
    if len(corners.time_s) == 1 and corners.slope_per_s[0] == 0.0:
        return _constant(float(corners.value[0]))
    key = ("line", corners.time_s.tobytes(), corners.value.tobytes())
    return Channel(_LINE, np.array([1.0, 0.0]), corners.state, corners.time_s[1:], key)


def _impulse(impulse: wf.StandardImpulse, step_s: float) -> list[Channel]:
    _finite(impulse, "peak")
    channels = [
        _power(impulse.peak * term.amplitude, term.power, term.decay_s)
        if term.power
        else _damped(impulse.peak * term.amplitude, 1.0 / term.decay_s, term.frequency_hz, 0.5 * np.pi)
        if term.frequency_hz
        else _exponential(impulse.peak * term.amplitude, 1.0 / term.decay_s)
        for term in SHAPES[impulse.shape]
    ]
    if impulse.chopped_at_s is None:
        return channels
    _positive(impulse, "chopped_at_s")
    if not (np.isfinite(impulse.collapse_s) and impulse.collapse_s >= 0.0):
        raise InvalidRequest.at("collapse_s", f"{impulse.collapse_s!r} s found; 0 or a finite time is expected")
    chop = snap(np.array([impulse.chopped_at_s]), step_s)
    level = sum(float(channel.state(chop)[0] @ channel.output) for channel in channels)
    chopped = [_until(channel, chop) for channel in channels]
    end = snap(chop + impulse.collapse_s, step_s)
    if end[0] > chop[0]:
        slope = -level / float(end[0] - chop[0])
        fall = Corners(np.array([0.0, chop[0], end[0]]), np.array([0.0, level, 0.0]), np.array([0.0, slope, 0.0]))
        chopped.append(_line(fall))
    return chopped


def _until(channel: Channel, end: FloatArray) -> Channel:
    return Channel(channel.matrix, channel.output, lambda t: channel.state(t) * (t < end[0])[:, None], end)


def _finite(waveform: wf.Waveform, *fields: str) -> None:
    for name in fields:
        if not np.isfinite(getattr(waveform, name)):
            raise InvalidRequest.at(name, f"{getattr(waveform, name)!r} found; a finite number is expected")


def _positive(waveform: wf.Waveform, *fields: str) -> None:
    for name in fields:
        value = getattr(waveform, name)
        if not (np.isfinite(value) and value * LARGEST_RATE >= 1.0):
            raise InvalidRequest.at(
                name, f"{value!r} found; a finite time from {1.0 / LARGEST_RATE:g} s on is expected"
            )
