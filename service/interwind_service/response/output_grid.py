"""The output grid of a run: k step for k = 0 .. stop/step, refused before any memory is taken."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest
from interwind_service import tolerances as tol


def output_grid(stop_s: float, step_s: float, field: str = "stop_s") -> NDArray[np.float64]:
    """Return the sample times, shape (stop/step + 1,).

    Raises
    ------
    InvalidRequest : a length that is not positive, a step that does not divide the stop, or more samples than allowed.
    """
    for name, value in ((field, stop_s), ("step_s", step_s)):
        if not (math.isfinite(value) and value > 0.0):
            raise InvalidRequest.at(name, f"{value!r} s found; a finite time above 0 is expected")
    count = stop_s / step_s
    if count > tol.MAXIMUM_SAMPLES:
        raise InvalidRequest.at(
            "step_s", f"{step_s!r} s makes {count:.3g} samples; the limit is {tol.MAXIMUM_SAMPLES}; take a longer step"
        )
    whole = round(count)
    if whole < 1 or abs(count - whole) > tol.GRID_MISMATCH:
        below, above = math.floor(count), math.ceil(count)
        nearest = f"{below * step_s:.9g} s or {above * step_s:.9g} s" if below else f"{above * step_s:.9g} s"
        raise InvalidRequest.at(
            field, f"{stop_s!r} s is no multiple of step_s, {step_s!r} s; the nearest are {nearest}"
        )
    return step_s * np.arange(whole + 1)
