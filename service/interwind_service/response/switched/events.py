"""The first instant at which a guard of a piece fails, located in time to rounding.

Guards are looked at on the grid of the piece; a sign change, or a minimum hidden between two instants, gives a
bracket, and a safeguarded Newton iteration on the modal sum narrows it. The iteration stops on the interval of time:
stopping on the size of the guard would cost the digits that the guard's own slope lacks.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.switched.piece import Driven

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Change:
    """A device takes its next mode."""

    time_s: float
    device: int
    then: int


def first_event(
    driven: Driven, kappa: ComplexArray, span_s: float, fresh: int, tie_s: float, slack: float = 1.0
) -> tuple[float, Change | None]:
    """Return how far the piece may run, and the change that ends it, if one does.

    ``fresh`` is the device that has just changed, -1 for none: by rounding it may stand on the wrong side for a while,
    so its guards count only from the first instant at which they hold, or if they fail and have only been falling. So
    do guards of devices that changed with it: those that fail at the start and rise to 0 within ``tie_s``. ``slack``
    times the rounding of its terms is how far a guard may fail: more than 1 only to leave an instant at which several
    devices tie.
    """
    piece = driven.piece
    end = min(span_s, float(piece.look[-1]))
    if len(piece.rows.device) == 0:
        return end, None
    sums = _Sums(driven, kappa, slack)
    guards = len(sums.floor)
    g, dg = sums.at_start[:guards], sums.at_start[guards:]
    recovering = (g < sums.floor) & (g + dg * tie_s > 0.0)
    held = None
    if fresh >= 0 or recovering.any():
        held = ((piece.rows.device != fresh) & ~recovering) | (g > 0.0)
        falling = dg < 0.0
    stop = int(np.searchsorted(piece.look, end, side="left"))
    low, width = min(sums.first_look(), stop), tol.SCAN_BLOCK
    before, t_before = sums.at_start, 0.0
    while True:
        high = min(low + width, stop)
        count = high - low
        last = high == stop
        seen = np.empty((count + 1 + last, 2 * guards))
        times = np.empty(count + 1 + last)
        seen[0], times[0] = before, t_before
        np.matmul(piece.table[low:high], sums.coefficients, out=seen[1 : count + 1])
        times[1 : count + 1] = piece.look[low:high]
        if last:
            seen[-1], times[-1] = sums.at(end), end
        g, dg = seen[:, :guards], seen[:, guards:]
        bad = g < sums.floor
        if held is not None:
            since = np.logical_or.accumulate(np.vstack([held, g > 0.0]), axis=0)
            sinking = np.logical_and.accumulate(np.vstack([falling, dg < 0.0]), axis=0)
            bad &= since[:-1] | sinking[1:]
            held, falling = since[-1], sinking[-1]
        found = _earliest(sums, times, g, dg, bad)
        if found is not None:
            return found[0], Change(float(found[0]), int(piece.rows.device[found[1]]), int(piece.rows.then[found[1]]))
        if last:
            break
        before, t_before, low, width = seen[-1], float(times[-1]), high, 2 * width
    if held is not None:
        late = np.flatnonzero(~held & (g[-1] < sums.floor))
        if late.size:
            return end, Change(end, int(piece.rows.device[late[0]]), int(piece.rows.then[late[0]]))
    return end, None


class _Sums:
    """All guards of a segment as modal sums, with their slopes and the rounding they carry."""

    def __init__(self, driven: Driven, kappa: ComplexArray, slack: float) -> None:
        piece = driven.piece
        free = piece.guard * kappa
        self.driven = driven
        self.size = np.abs(free)
        self.scale = self.size.sum(axis=1) + driven.guard_scale
        self.floor = -tol.GUARD_ROUNDING * slack * self.scale
        guards, h = free.shape
        b = driven.guard.shape[1]
        self.value = np.empty((2 * guards, h + b), dtype=complex)
        self.value[:guards, :h], self.value[:guards, h:] = free, driven.guard
        np.multiply(free, piece.modes.eigenvalue, out=self.value[guards:, :h])
        self.value[guards:, h:] = driven.guard_slope
        both = np.empty((2 * (h + b), 2 * guards))
        both[: h + b], both[h + b :] = self.value.real.T, self.value.imag.T
        self.coefficients = both
        self.at_start = piece.table[0] @ both

    def at(self, time_s: float) -> FloatArray:
        """Return guards and slopes at one instant, shape (2 g,)."""
        return (self.value @ self.driven.piece.growth(time_s)).real

    def first_look(self) -> int:
        """Return the first grid point that matters: modes without weight in any guard need not be resolved."""
        piece = self.driven.piece
        weighty = (self.size > tol.GUARD_ROUNDING * self.scale[:, None]).any(axis=0)
        fastest = np.max(piece.speed[weighty], initial=piece.drive_speed)
        if fastest == 0.0:
            return len(piece.look) - 1
        return max(1, int(np.searchsorted(piece.look, tol.GRID_FIRST / fastest, side="right")) - 1)

    def root(self, guard: int, low: float, high: float, *, of_slope: bool) -> float:
        """Narrow a bracket of one sign change of a guard (or of its slope) by Newton's method, else by halving."""
        piece = self.driven.piece
        h = len(piece.modes.eigenvalue)
        row = guard + len(self.floor) if of_slope else guard
        value = self.value[row]
        slope = np.concatenate([value[:h] * piece.modes.eigenvalue, value[h:] @ piece.rise])
        pair = np.stack([value, slope])
        g_low = (value @ piece.growth(low)).real
        g_high = (value @ piece.growth(high)).real
        rising = g_low < 0.0
        limit = tol.EVENT_INTERVAL * (high - low)
        step = high - low
        now = low + step * (g_low / (g_low - g_high) if g_low != g_high else 0.5)
        for _ in range(tol.EVENT_ITERATIONS):
            growth = piece.growth(now)
            g, dg = (pair @ growth).real.tolist()
            if (g < 0.0) == rising:
                low = now
            else:
                high = now
            target = now - g / dg if dg != 0.0 else low - 1.0
            newton = low <= target <= high
            if not newton:
                target = 0.5 * (low + high)
            previous, step = step, target - now
            now = target
            if abs(step) <= limit + tol.TIME_ROUNDING * now:
                break
            if newton and abs(step) >= 0.5 * abs(previous):
                noise = tol.SUM_ROUNDING * float(np.abs(value * growth).sum())
                if abs(g) <= noise:
                    break
                now, step = 0.5 * (low + high), 0.5 * (high - low)
        return now


def _earliest(sums: _Sums, t: FloatArray, g: FloatArray, dg: FloatArray, bad: BoolArray) -> tuple[float, int] | None:
    """Return the earliest failing (time, guard) of a block whose first row is the instant before it."""
    rows = np.flatnonzero(bad.any(axis=1))
    limit = int(rows[0]) if rows.size else len(t) - 1
    candidates = _hidden(sums, t[: limit + 1], g[: limit + 1], dg[: limit + 1]) if limit > 0 else []
    for guard in np.flatnonzero(bad[limit]).tolist() if rows.size else ():
        if limit == 0 or g[limit - 1, guard] <= 0.0:
            candidates.append((float(t[max(limit - 1, 0)]), guard))
        else:
            candidates.append((sums.root(guard, float(t[limit - 1]), float(t[limit]), of_slope=False), guard))
    return min(candidates) if candidates else None


def _hidden(sums: _Sums, t: FloatArray, g: FloatArray, dg: FloatArray) -> list[tuple[float, int]]:
    """Return crossings between two instants at which a guard holds: its two tangents meet below zero."""
    row, guard = np.nonzero((dg[:-1] < 0.0) & (dg[1:] > 0.0) & (g[:-1] > 0.0) & (g[1:] > 0.0))
    if not row.size:
        return []
    g0, g1, d0, d1 = g[row, guard], g[row + 1, guard], dg[row, guard], dg[row + 1, guard]
    meet = (g1 - g0 - d1 * (t[row + 1] - t[row])) / (d0 - d1)
    found: list[tuple[float, int]] = []
    for k in np.flatnonzero(g0 + d0 * meet < sums.floor[guard]).tolist():
        low, high, own = float(t[row[k]]), float(t[row[k] + 1]), int(guard[k])
        if found and low > found[0][0]:
            break
        bottom = sums.root(own, low, high, of_slope=True)
        if sums.at(bottom)[own] < sums.floor[own]:
            found.append((sums.root(own, low, bottom, of_slope=False), own))
    return found
