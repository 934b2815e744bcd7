"""RODAS4: an L-stable Rosenbrock method of order 4 with error control in energy units and dense output.

    (M / (hγ) − J) u_i = f(t + c_i h, y + Σ a_ij u_j) + M Σ c_ij u_j / h + h d_i ∂f/∂t,      y₁ = y + Σ b_i u_i

One factorization a step and no Newton iteration (Hairer & Wanner 1996, section IV.7). States are counted in the root of
their energy, so one scale, the largest |x| so far, serves all of them.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg.lapack import dgetrf, dgetri

from interwind.errors import AccuracyNotReached
from interwind_service import tolerances as tol
from interwind_service.response.drive.drives import Drives
from interwind_service.response.smooth.nonlinear_field import Field
from interwind_service.response.smooth.nonlinear_ledger import Ledger
from interwind_service.response.smooth.tableaux import C_TIME, D_TIME, GAMMA, A, C, H

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

_LAST = len(C_TIME) - 1


@dataclass(slots=True, eq=False)
class Steps:
    """Accepted steps: start, length, y at start and end (S, d), stages u (S, 6, d), drives at the start (S, k).

    ``give`` (d,): how far the unknowns may move to meet the algebraic equations between the ends.
    """

    start_s: FloatArray
    length_s: FloatArray
    y0: FloatArray
    y1: FloatArray
    stages: FloatArray
    w: ComplexArray
    give: FloatArray

    def at(self, which: NDArray[np.int64], theta: FloatArray) -> FloatArray:
        """Return y at the shares ``theta`` (T,) of the steps ``which`` (T,), by the dense output, shape (T, d)."""
        share = theta[:, None]
        k1, k2 = (np.einsum("j,sjd->sd", row, self.stages)[which] for row in H)
        end = self.y1[which] + (1.0 - share) * (k1 + share * k2)
        found: FloatArray = (1.0 - share) * self.y0[which] + share * end
        return found


@dataclass(slots=True, eq=False)
class Effort:
    """How hard it was: accepted and rejected steps; the largest |x|, the largest wave and the energy that went through
    branches so far, which errors count against, or ``energy_j`` in its place; and the next step to try, s.
    """

    accepted: int = 0
    rejected: int = 0
    size: float = 0.0
    swing: float = 0.0
    through_j: float = 0.0
    energy_j: float = 0.0
    step_s: float = 0.0


def integrate(
    field: Field,
    drives: Drives,
    y: FloatArray,
    w: ComplexArray,
    start_s: float,
    stop_s: float,
    tolerance: float,
    effort: Effort,
    sink: Callable[[Steps], None],
    ledger: Ledger | None,
) -> FloatArray:
    """Integrate from ``start_s`` to ``stop_s`` and hand on the steps in blocks; return y at the stop.

    With a ``ledger`` a step keeps the energy of every branch to the tolerance as well: where there are algebraic
    unknowns or kinks, powers hang on them and the states need not.

    Raises
    ------
    AccuracyNotReached : the step falls below the resolution of time.
    """
    states, mass = field.states, field.mass
    now, h = start_s, min(effort.step_s, stop_s - start_s)
    kept: list[tuple[float, float, FloatArray, FloatArray, FloatArray, ComplexArray]] = []
    grown, previous_error, previous_h = False, tol.FIRST_ERROR, h
    swing, through = effort.swing, effort.through_j
    J, f_t, driven, W = None, None, field.drives(w), drives.W
    d, give, couplings = len(y), np.ones(len(y)), np.stack((A, C), axis=1)
    while now < stop_s:
        last = now + h >= stop_s * (1.0 - tol.TIME_ROUNDING)
        if last:
            h = stop_s - now
        if h <= tol.SMALLEST_STEP * max(abs(stop_s), abs(now)):
            raise AccuracyNotReached(
                f"at {now:.9g} s the step fell to {h:.3g} s; a law of the network is not smooth there; "
                "give the device the capacitance or inductance it has"
            )
        if J is None:
            J, f_t = field.jacobian(y, driven, field.drives(W @ w))
        moved = drives.moved_to(w, C_TIME * h) if not drives.steady else np.broadcast_to(w, (len(C_TIME), len(w)))
        along = field.drives(moved)
        along[:, :d] += (h * D_TIME)[:, None] * f_t  # nothing for the last stages, whose drives are those of the end
        weight = mass / h
        shifted = -J
        shifted.reshape(-1)[:: d + 1] += weight / GAMMA
        inverse = _inverse(shifted)
        stages = np.empty((len(C_TIME), d))
        argument = y
        np.dot(inverse, field.value(y, along[0]), out=stages[0])
        for i in range(1, len(C_TIME)):
            step, held = couplings[i, :, :i].dot(stages[:i])
            argument = y + step
            right = field.value(argument, along[i])
            held *= weight
            right += held
            np.dot(inverse, right, out=stages[i])
        y1 = argument + stages[_LAST]
        size = max(effort.size, _length(y1[:states]))
        error = _length(stages[_LAST, :states]) / (tolerance * size) if size > 0.0 else 0.0
        if not np.isfinite(error):
            error = tol.OVERFLOWN_ERROR
        if error <= 1.0 and states < len(y):  # what is left of the algebraic equations would be an error next
            swing = max(effort.swing, float(np.abs(y1[states:]).max()))
            give[:states], give[states:] = tolerance * size, tol.WAVE_GIVE * swing
            stepped, y1 = y1, field.consistent(y1, along[_LAST], give)
            if size > 0.0:
                error = max(error, _length(y1[:states] - stepped[:states]) / (tolerance * size))
            if not np.isfinite(y1).all():
                error = tol.OVERFLOWN_ERROR
        if error <= 1.0 and ledger is not None:
            gone, missed = ledger.energies(y[None], stages[None], w[None], np.array([h]))
            through = effort.through_j + float(np.abs(gone).max())
            scale = tolerance * (effort.energy_j or max(0.5 * size**2, through))
            error = max(error, float(np.abs(missed).max()) / scale) if scale > 0.0 else error
        factor = min(tol.STEP_SHRINK, max(tol.STEP_GROWTH, (error**0.25) / tol.STEP_SAFETY))
        if error <= 1.0:
            if effort.accepted and error > 0.0:  # predictive control (Gustafsson 1994)
                predicted = (previous_h / h) * (error**2 / previous_error) ** 0.25 / tol.STEP_SAFETY
                factor = max(factor, min(tol.STEP_SHRINK, max(tol.STEP_GROWTH, predicted)))
            previous_error, previous_h = max(tol.FIRST_ERROR, error), h
            effort.swing, effort.through_j = swing, through
            kept.append((now, h, y, y1, stages, w))
            effort.accepted += 1
            effort.size = size
            now = stop_s if last else now + h
            y, w = y1, moved[_LAST]
            driven = along[_LAST]
            J = None
            if len(kept) == tol.STEPS_TOGETHER:
                sink(_stack(kept, give.copy()))
                kept = []
            following = h / factor
            if grown:
                following = min(following, h)
            if not last or following < effort.step_s:
                effort.step_s = following
            h, grown = following, False
        else:
            effort.rejected += 1
            h, grown = h / factor, True
    if kept:
        sink(_stack(kept, give.copy()))
    return y


def _inverse(matrix: FloatArray) -> FloatArray:
    """Return the inverse of a matrix (d, d), which is lost: its transpose is in the order LAPACK counts in."""
    if not matrix.size:
        return matrix
    factors, pivots, _ = dgetrf(matrix.T, overwrite_a=True)
    inverse, info = dgetri(factors, pivots, overwrite_lu=True)
    if info:
        raise np.linalg.LinAlgError("singular matrix")
    turned: FloatArray = inverse.T
    return turned


def _length(x: FloatArray) -> float:
    """Return |x|."""
    return math.sqrt(x.dot(x))


def _stack(
    kept: list[tuple[float, float, FloatArray, FloatArray, FloatArray, ComplexArray]], give: FloatArray
) -> Steps:
    start, length, y0, y1, stages, w = zip(*kept, strict=True)
    return Steps(np.array(start), np.array(length), np.array(y0), np.array(y1), np.array(stages), np.array(w), give)
