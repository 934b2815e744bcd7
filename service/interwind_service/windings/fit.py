"""Weighted least squares over all matrices that can exist.

    minimise Σ ((reading_r − y_r(L)) / σ_r)²   with   L = D F Fᵀ D,   F lower triangular

so that every L met on the way is positive semidefinite by construction; D scales the windings to unit self-inductance.
With y(L) taken as linear the second derivative is Jᵀ J plus what F Fᵀ bends, −2 Σ r S for each column of F; that part
vanishes at a fit inside the cone and is what holds one at its edge. Steps are damped after Levenberg (1944) and
Marquardt (1963).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.linalg import cho_factor, cho_solve

from interwind.model.frozen import FloatArray
from interwind_service.tolerances import (
    FIT_DAMPING_LARGEST,
    FIT_DAMPING_LEAST,
    FIT_DAMPING_START,
    FIT_GAIN,
    FIT_STEPS,
)
from interwind_service.windings.intake import Taken
from interwind_service.windings.readings import predicted


@dataclass(frozen=True, slots=True, eq=False)
class Fit:
    """A fitted matrix and its linearisation.

    ``inductance_h`` (n, n); ``residuals`` (m,): (reading − fitted) / σ; ``jacobian`` (m, p): of the fitted values over
    σ with respect to the entries L_ij / (d_i d_j), upper triangle row by row; ``scale_h`` (p,): d_i d_j;
    ``settled``: whether the steps came to rest, which they may not where a gross error pulls at the edge of the cone.
    """

    inductance_h: FloatArray
    residuals: FloatArray
    jacobian: FloatArray
    scale_h: FloatArray
    settled: bool

    @property
    def chi_square(self) -> float:
        """Σ ((reading − fitted) / σ)²."""
        return float(self.residuals @ self.residuals)


def fit(used: Sequence[Taken], labels: Sequence[str], start_h: FloatArray, *, steps: int = FIT_STEPS) -> Fit:
    """Fit the readings from a positive definite start (n, n), H, in at most ``steps`` steps."""
    d = np.sqrt(start_h.diagonal())
    F = np.linalg.cholesky(start_h / np.outer(d, d))
    lower = np.tril_indices(len(d))
    damping = FIT_DAMPING_START
    residuals, gradients = _residuals(used, labels, d, F)
    chi = float(residuals @ residuals)
    settled = False
    for _ in range(steps):
        jacobian = np.array([2.0 * (S @ F)[lower] for S in gradients])
        bend = sum(r * S for r, S in zip(residuals, gradients, strict=True))
        hessian = jacobian.T @ jacobian - 2.0 * bend[lower[0]][:, lower[0]] * (lower[1][:, None] == lower[1][None, :])
        step = _step(hessian, jacobian.T @ residuals, damping)
        if step is None:
            damping *= 4.0
            continue
        trial = F.copy()
        trial[lower] += step
        new_residuals, new_gradients = _residuals(used, labels, d, trial)
        gain = chi - float(new_residuals @ new_residuals)
        if gain < 0:
            damping *= 4.0
            settled = damping > FIT_DAMPING_LARGEST
        else:
            F, residuals, gradients, chi = trial, new_residuals, new_gradients, chi - gain
            damping = max(damping / 9.0, FIT_DAMPING_LEAST)
            settled = gain <= FIT_GAIN * (chi + FIT_GAIN)
        if settled:
            break
    scale = np.outer(d, d)
    L = F @ F.T * scale
    rows = np.array([upper_row(S) for S in gradients])
    return Fit(0.5 * (L + L.T), residuals, rows, scale[np.triu_indices(len(d))], settled)


def _step(hessian: FloatArray, slope: FloatArray, damping: float) -> FloatArray | None:
    """Solve (H + μ diag|H|) s = slope; None where that matrix is not positive definite."""
    weight = np.sqrt(np.abs(hessian.diagonal()))
    weight = np.where(weight > 0, weight, 1.0)
    damped = hessian / np.outer(weight, weight) + damping * np.eye(len(weight))
    try:
        return cho_solve(cho_factor(damped), slope / weight) / weight
    except np.linalg.LinAlgError:
        return None


def upper_row(S: FloatArray) -> FloatArray:
    """Return tr(S dL) as a row (p,) over the upper triangle of dL, row by row."""
    i, j = np.triu_indices(len(S))
    return np.where(i == j, 1.0, 2.0) * S[i, j]


def _residuals(
    used: Sequence[Taken], labels: Sequence[str], d: FloatArray, F: FloatArray
) -> tuple[FloatArray, list[FloatArray]]:
    """Residuals over σ, and for each reading the matrix S of its value over σ with respect to F Fᵀ."""
    scale = np.outer(d, d)
    L = F @ F.T * scale
    residuals, gradients = np.empty(len(used)), []
    for position, one in enumerate(used):
        value, S = predicted(one.reading, L, labels)
        residuals[position] = (one.value - value) / one.uncertainty
        gradients.append(S * scale / one.uncertainty)
    return residuals, gradients
