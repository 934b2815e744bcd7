"""Waveforms made of straight lines, as their corners."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest
from interwind.model import waveform as wf
from interwind_service.tolerances import CORNERS_TOGETHER, MAX_WAVEFORM_CORNERS

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Corners:
    """From ``time_s[j]`` on the value is ``value[j]`` + ``slope_per_s[j]`` (t − time_s[j]); ``time_s[0]`` <= 0."""

    time_s: FloatArray
    value: FloatArray
    slope_per_s: FloatArray

    def state(self, time_s: FloatArray) -> FloatArray:
        """Return (value, slope) at times (T,), shape (T, 2), limits from the right."""
        low = int(np.searchsorted(self.time_s, time_s[0])) if len(time_s) else 0
        own = slice(low, low + len(time_s))
        if np.array_equal(self.time_s[own], time_s):  # the corners in turn, as a record on the grid is asked for
            return np.stack((self.value[own], self.slope_per_s[own]), axis=1)
        piece = np.maximum(np.searchsorted(self.time_s, time_s, side="right") - 1, 0)
        slope = self.slope_per_s[piece]
        return np.stack((self.value[piece] + slope * (time_s - self.time_s[piece]), slope), axis=1)


def corners_of(waveform: wf.Waveform, stop_s: float, step_s: float) -> Corners:
    """Return the corners of a Step, Ramp, Trapezoid, PiecewiseLinear or SampledRecord from 0 to ``stop_s``.

    Raises
    ------
    InvalidRequest : a time that is not finite or negative where it may not be, or too many corners.
    """
    if isinstance(waveform, wf.Step | wf.Ramp):
        slope = waveform.slope_per_s if isinstance(waveform, wf.Ramp) else 0.0
        value = waveform.value if isinstance(waveform, wf.Step) else 0.0
        for field, found in (("at_s", waveform.at_s), ("value", value), ("slope_per_s", slope)):
            if not np.isfinite(found):
                raise InvalidRequest.at(field, f"{found!r} found; a finite number is expected")
        if waveform.at_s <= 0.0:
            time_s, level, rate = [waveform.at_s], [value], [slope]
        else:
            time_s, level, rate = [0.0, waveform.at_s], [0.0, value], [0.0, slope]
        return _within(np.array(time_s), np.array(level), np.array(rate), stop_s, step_s)
    if isinstance(waveform, wf.Trapezoid):
        return _train(waveform, stop_s, step_s)
    if isinstance(waveform, wf.SampledRecord):
        if not (np.isfinite(waveform.interval_s) and waveform.interval_s > 0.0):
            raise InvalidRequest.at("interval_s", f"{waveform.interval_s!r} s found; a finite time above 0 is expected")
        time_s = waveform.start_s + waveform.interval_s * np.arange(len(waveform.value))
        return _through(time_s, waveform.value, stop_s, step_s, gap_s=waveform.interval_s)
    if isinstance(waveform, wf.PiecewiseLinear):
        return _through(waveform.time_s, waveform.value, stop_s, step_s)
    raise InvalidRequest.at("", f"{type(waveform).__name__} found; a waveform is expected")


def _through(
    time_s: FloatArray, value: FloatArray, stop_s: float, step_s: float, *, gap_s: float | None = None
) -> Corners:
    """Return the lines through points ``gap_s`` apart; None: as far apart as their times."""
    for field, array in (("time_s", time_s), ("value", value)):
        if not np.isfinite(array).all():
            position = int(np.flatnonzero(~np.isfinite(array))[0])
            raise InvalidRequest.at(f"{field}[{position}]", f"{array[position]!r} found; a finite number is expected")
    gap = np.diff(time_s) if gap_s is None else np.float64(gap_s)
    slope = np.zeros(len(value))
    np.divide(np.diff(value), gap, out=slope[:-1], where=gap > 0.0)
    if time_s[0] > 0.0:  # before its first corner a line stands at its first value
        time_s, value = np.concatenate(([0.0], time_s)), np.concatenate((value[:1], value))
        slope = np.concatenate(([0.0], slope))
    return _within(time_s, value, slope, stop_s, step_s)


def _train(train: wf.Trapezoid, stop_s: float, step_s: float) -> Corners:
    spans = {"rise_s": train.rise_s, "high_s": train.high_s, "fall_s": train.fall_s}
    for field in ("low", "high", "delay_s"):
        if not np.isfinite(getattr(train, field)):
            raise InvalidRequest.at(field, f"{getattr(train, field)!r} found; a finite number is expected")
    for field, found in spans.items():
        if not (np.isfinite(found) and found >= 0.0):
            raise InvalidRequest.at(field, f"{found!r} s found; 0 or a finite time is expected")
    if not (np.isfinite(train.period_s) and train.period_s > 0.0):
        raise InvalidRequest.at("period_s", f"{train.period_s!r} s found; a finite time above 0 is expected")
    used = sum(spans.values())
    if used > train.period_s * (1.0 + 4.0 * np.finfo(float).eps):
        raise InvalidRequest.at("period_s", f"{train.period_s!r} s found; rise, high and fall take {used!r} s together")
    phase_s = float(np.remainder(train.delay_s, train.period_s))
    count = stop_s / train.period_s + 3.0
    if 4.0 * count > MAX_WAVEFORM_CORNERS:
        raise _too_many(4.0 * count)
    start = phase_s + train.period_s * np.arange(-1, int(count))
    swing = train.high - train.low
    rise = swing / train.rise_s if train.rise_s else 0.0
    fall = -swing / train.fall_s if train.fall_s else 0.0
    offset = np.cumsum([0.0, train.rise_s, train.high_s, train.fall_s])
    time_s = (start[:, None] + offset).ravel()
    value = np.tile([train.low, train.high, train.high, train.low], len(start))
    slope = np.tile([rise, 0.0, fall, 0.0], len(start))
    return _within(time_s, value, slope, stop_s, step_s)


def _within(time_s: FloatArray, value: FloatArray, slope: FloatArray, stop_s: float, step_s: float) -> Corners:
    """Drop pieces of no length and those outside 0 .. stop, and put corners within rounding of a sample on it."""
    if len(time_s) > MAX_WAVEFORM_CORNERS:
        raise _too_many(len(time_s))
    time_s = snap(time_s, step_s)
    last = np.append(np.diff(time_s) > 0.0, True)
    if not last.all():
        time_s, value, slope = time_s[last], value[last], slope[last]
    first = max(int(np.searchsorted(time_s, 0.0, side="right")) - 1, 0)
    stop = int(np.searchsorted(time_s, stop_s, side="right"))
    return Corners(time_s[first:stop], value[first:stop], slope[first:stop])


def snap(time_s: FloatArray, step_s: float) -> FloatArray:
    """Return the times with those within rounding of a multiple of the step put on it."""
    snapped = np.empty_like(time_s)
    for low in range(0, len(time_s), CORNERS_TOGETHER):
        own = time_s[low : low + CORNERS_TOGETHER]
        grid = np.rint(own / step_s) * step_s
        snapped[low : low + CORNERS_TOGETHER] = np.where(np.abs(own - grid) <= 8.0 * np.spacing(np.abs(own)), grid, own)
    return snapped


def _too_many(count: float) -> InvalidRequest:
    return InvalidRequest.at(
        "", f"{count:.0f} corners found up to stop_s; at most {MAX_WAVEFORM_CORNERS} are allowed; shorten the run"
    )
