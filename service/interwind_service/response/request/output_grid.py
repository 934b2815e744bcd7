"""The output grid of a run: k step for k = 0 .. stop/step, refused before any memory is taken."""

from __future__ import annotations

import numpy as np

from interwind.errors import InvalidRequest
from interwind_service import tolerances as tol


def steps_of(stop_s: float, step_s: float, field: str = "stop_s") -> int:
    """Return the number of steps; a stop that is no multiple of the step is refused with the two nearest.

    Raises
    ------
    InvalidRequest : a time that is not positive, too many steps, or a step that does not divide the stop.
    """
    for name, value in ((field, stop_s), ("step_s", step_s)):
        if not (np.isfinite(value) and value > 0.0):
            raise InvalidRequest.at(name, f"{value!r} s found; a finite time above 0 is expected")
    ratio = stop_s / step_s
    if not ratio <= tol.MAX_TIME_STEPS:
        raise InvalidRequest.at(
            "step_s", f"{ratio:.3g} steps found; at most {tol.MAX_TIME_STEPS} are allowed; choose a larger step_s"
        )
    steps = round(ratio)
    if steps < 1 or abs(ratio - steps) > tol.GRID_MISFIT:
        below = max(1, int(np.floor(ratio)))
        raise InvalidRequest.at(
            field,
            f"{stop_s!r} s found; a multiple of step_s = {step_s!r} s is expected: {below * step_s!r} s or "
            f"{(below + 1) * step_s!r} s",
        )
    return steps
