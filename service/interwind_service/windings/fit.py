"""Weighted least squares over all matrices that can exist.

    minimise Σ ((reading_r − y_r(L)) / σ_r)²   with   L = D F Fᵀ D,   F lower triangular

so that every L met on the way is positive semidefinite by construction; D scales the windings to unit self-inductance.
With y(L) taken as linear the second derivative is Jᵀ J plus what F Fᵀ bends, −2 Σ r S for each column of F; that part
vanishes at a fit inside the cone and is what holds one at its edge. Those steps are damped after Levenberg (1944) and
Marquardt (1963); inside the cone Gauss-Newton steps in L itself go first.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.linalg import cho_factor, cho_solve

from interwind.model.frozen import FloatArray
from interwind.model.readings import ShortedInductance
from interwind_service.tolerances import (
    FIT_DAMPING_LARGEST,
    FIT_DAMPING_LEAST,
    FIT_DAMPING_START,
    FIT_FREE_PARTS,
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
    """Fit the readings from a positive definite start (n, n), H, in at most ``steps`` steps.

    The winding that is driven with most others shorted comes last in F: its leakage is then the square of one entry,
    and need not be found along a narrow curved valley.
    """
    order = _order(used, labels)
    placed = [labels[k] for k in order]
    d = np.sqrt(start_h.diagonal()[order])
    F = np.linalg.cholesky(start_h[np.ix_(order, order)] / np.outer(d, d))
    at = _at(used, placed, d, F)
    damping, settled = FIT_DAMPING_START, False
    for _ in range(steps):
        ahead = _free_step(used, placed, d, at)
        if not _gains(at, ahead):
            ahead, damping = _damped_step(used, placed, d, ahead or at, damping)
            settled = not _gains(at, ahead)
        at = ahead or at
        if settled:
            break
    back = np.argsort(order)
    d, K = d[back], (at.F @ at.F.T)[np.ix_(back, back)]
    residuals, gradients = _residuals(used, labels, d, K)
    rows = np.array([upper_row(S) for S in gradients])
    scale = np.outer(d, d)
    return Fit(0.5 * (K + K.T) * scale, residuals, rows, scale[np.triu_indices(len(d))], settled)


def _order(used: Sequence[Taken], labels: Sequence[str]) -> list[int]:
    """Windings in the order of how many others their readings short; equal ones stay as they were."""
    most = [0] * len(labels)
    for one in used:
        if isinstance(one.reading, ShortedInductance):
            driven = labels.index(one.reading.winding)
            most[driven] = max(most[driven], len(one.reading.shorted))
    return sorted(range(len(labels)), key=most.__getitem__)


@dataclass(frozen=True, slots=True, eq=False)
class _Point:
    F: FloatArray
    residuals: FloatArray
    gradients: list[FloatArray]

    @property
    def chi_square(self) -> float:
        return float(self.residuals @ self.residuals)


def _at(used: Sequence[Taken], labels: Sequence[str], d: FloatArray, F: FloatArray) -> _Point:
    return _Point(F, *_residuals(used, labels, d, F @ F.T))


def _gains(at: _Point, ahead: _Point | None) -> bool:
    """Tell whether chi-square falls by more than what counts as settled."""
    return ahead is not None and at.chi_square - ahead.chi_square > FIT_GAIN * (ahead.chi_square + FIT_GAIN)


def _free_step(used: Sequence[Taken], labels: Sequence[str], d: FloatArray, at: _Point) -> _Point | None:
    """Gauss-Newton step in L itself, in which most readings are linear; None where no part of it gains in the cone."""
    step = np.linalg.lstsq(np.array([upper_row(S) for S in at.gradients]), at.residuals, rcond=None)[0]
    change = np.zeros_like(at.F)
    change[np.triu_indices(len(d))] = step
    change = change + np.triu(change, 1).T
    K = at.F @ at.F.T
    for part in FIT_FREE_PARTS:
        try:
            trial = _at(used, labels, d, np.linalg.cholesky(K + part * change))
        except np.linalg.LinAlgError:
            continue
        if trial.chi_square <= at.chi_square:
            return trial
    return None


def _damped_step(
    used: Sequence[Taken], labels: Sequence[str], d: FloatArray, at: _Point, damping: float
) -> tuple[_Point | None, float]:
    """Newton step in F, damped until it gains; None where none does. Returns the damping to go on with."""
    lower = np.tril_indices(len(d))
    jacobian = np.array([2.0 * (S @ at.F)[lower] for S in at.gradients])
    bend = sum(r * S for r, S in zip(at.residuals, at.gradients, strict=True))
    same_column = lower[1][:, None] == lower[1][None, :]
    hessian = jacobian.T @ jacobian - 2.0 * bend[lower[0]][:, lower[0]] * same_column
    weight = np.sqrt(np.abs(hessian.diagonal()))
    weight = np.where(weight > 0, weight, 1.0)
    slope = jacobian.T @ at.residuals / weight
    while damping <= FIT_DAMPING_LARGEST:
        try:
            factor = cho_factor(hessian / np.outer(weight, weight) + damping * np.eye(len(weight)))
        except np.linalg.LinAlgError:
            damping *= 4.0
            continue
        F = at.F.copy()
        F[lower] += cho_solve(factor, slope) / weight
        trial = _at(used, labels, d, F)
        if trial.chi_square <= at.chi_square:
            return trial, max(damping / 9.0, FIT_DAMPING_LEAST)
        damping *= 4.0
    return None, FIT_DAMPING_START


def upper_row(S: FloatArray) -> FloatArray:
    """Return tr(S dL) as a row (p,) over the upper triangle of dL, row by row."""
    i, j = np.triu_indices(len(S))
    return np.where(i == j, 1.0, 2.0) * S[i, j]


def _residuals(
    used: Sequence[Taken], labels: Sequence[str], d: FloatArray, K: FloatArray
) -> tuple[FloatArray, list[FloatArray]]:
    """Residuals over σ, and for each reading the matrix S of its value over σ with respect to K = L_ij / (d_i d_j)."""
    scale = np.outer(d, d)
    L = K * scale
    residuals, gradients = np.empty(len(used)), []
    for position, one in enumerate(used):
        value, S = predicted(one.reading, L, labels)
        residuals[position] = (one.value - value) / one.uncertainty
        gradients.append(S * scale / one.uncertainty)
    return residuals, gradients
