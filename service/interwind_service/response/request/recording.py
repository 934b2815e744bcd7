"""Recording: of all samples of a run, those worth keeping, their envelope, and figures over the window.

Samples arrive in pieces and leave no trace but what is kept, so the memory of a long run is that of its recording.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import AccuracyNotReached, InvalidRequest
from interwind.model.recording import RecordFigures, Recording
from interwind_service.tolerances import GRID_MISFIT

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Window:
    """The steps ``first`` to ``last`` of a grid, both included, of which every ``every``-th is kept."""

    first: int
    last: int
    every: int

    @property
    def kept(self) -> int:
        """Number of samples kept."""
        return (self.last - self.first) // self.every + 1


def window_of(recording: Recording, step_s: float, steps: int) -> Window:
    """Return the window on the grid; its ends are multiples of the step within the run.

    Raises
    ------
    InvalidRequest : an end off the grid or outside the run, or a window that ends before it begins.
    """
    ends = []
    for field, time_s in (("from_s", recording.from_s), ("until_s", recording.until_s)):
        if time_s is None:
            ends.append(steps)
            continue
        ratio = time_s / step_s
        if not (np.isfinite(ratio) and -GRID_MISFIT <= ratio <= steps + GRID_MISFIT):
            raise InvalidRequest.at(
                f"recording.{field}", f"{time_s!r} s found; 0 to the stop, {steps * step_s!r} s, is expected"
            )
        nearest = round(ratio)
        if abs(ratio - nearest) > GRID_MISFIT:
            raise InvalidRequest.at(
                f"recording.{field}",
                f"{time_s!r} s found; a multiple of step_s = {step_s!r} s is expected: "
                f"{int(np.floor(ratio)) * step_s!r} s or {int(np.ceil(ratio)) * step_s!r} s",
            )
        ends.append(nearest)
    if ends[1] <= ends[0]:
        raise InvalidRequest.at(
            "recording.until_s",
            f"{recording.until_s!r} s found; a time after from_s = {recording.from_s!r} s is expected",
        )
    return Window(ends[0], ends[1], recording.every)


class Recorder:
    """Takes the samples of a window in order and keeps what the recording asks for."""

    def __init__(self, window: Window, columns: int, *, envelope: bool, keep: bool = True) -> None:
        self.window = window
        self.samples = np.empty((window.kept if keep else 0, columns))
        self.lowest = np.full((window.kept, columns), np.inf) if envelope else None
        self.highest = np.full((window.kept, columns), -np.inf) if envelope else None
        self.peaks = np.zeros(columns)
        self._peak_step = np.full(columns, window.first)
        self._sum, self._square = np.zeros(columns), np.zeros(columns)

    def take(self, first: int, rows: FloatArray) -> None:
        """Take the samples of steps first, first + 1, .. shape (any, columns)."""
        window = self.window
        if not len(rows):
            return
        place = first - window.first
        if len(self.samples):
            start = -place % window.every
            kept = rows[start :: window.every]
            at = (place + start) // window.every
            self.samples[at : at + len(kept)] = kept
        if self.lowest is not None and self.highest is not None:
            group = np.arange(place, place + len(rows)) // window.every
            heads = np.flatnonzero(np.diff(group, prepend=-1))
            own = slice(group[0], group[-1] + 1)
            self.lowest[own] = np.minimum(self.lowest[own], np.minimum.reduceat(rows, heads, axis=0))
            self.highest[own] = np.maximum(self.highest[own], np.maximum.reduceat(rows, heads, axis=0))
        columns = np.arange(rows.shape[1])
        where = np.abs(rows).argmax(axis=0)
        larger = np.abs(rows[where, columns]) > np.abs(self.peaks)
        self.peaks = np.where(larger, rows[where, columns], self.peaks)
        self._peak_step = np.where(larger, first + where, self._peak_step)
        weight = np.ones(len(rows))
        weight[0] -= 0.5 * (first == window.first)
        weight[-1] -= 0.5 * (first + len(rows) - 1 == window.last)
        self._sum += weight @ rows
        self._square += weight @ np.square(rows)

    def require_numbers(self) -> None:
        """Refuse a record that left the range of numbers."""
        if not np.isfinite(self._sum).all():
            raise AccuracyNotReached(
                "a voltage or current left the range of floating-point numbers; bring the values of sources and "
                "elements closer to each other",
                reason="OUT_OF_NUMBERS",
            )

    def figures(self, step_s: float, means: FloatArray, mean_squares: FloatArray) -> RecordFigures:
        """Return the figures; where the exact mean or mean square (columns,) is NaN the samples' own is taken."""
        steps = self.window.last - self.window.first
        mean = np.where(np.isnan(means), self._sum / steps, means)
        square = np.where(np.isnan(mean_squares), self._square / steps, mean_squares)
        return RecordFigures(mean, np.sqrt(np.maximum(square, 0.0)), self.peaks, step_s * self._peak_step)
