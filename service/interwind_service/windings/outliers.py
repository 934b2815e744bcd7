"""Readings that the others contradict.

    w = (reading − fitted) / (σ sqrt(1 − h)),   h the leverage

has unit variance under the stated uncertainties (Baarda 1968), and leaving the reading out lowers chi-square by w².
That holds only near the truth, so where something is wrong each reading is really left out in turn, the rest fitted
again, and the one that frees most chi-square set aside; then the next, until what is left agrees.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from scipy.stats import chi2, norm

from interwind.model.frozen import FloatArray
from interwind_service.tolerances import (
    CONTRADICTION_PROBABILITY,
    EDGE_GAIN,
    FREE_READING,
    LEFT_OUT_STEPS,
    OUTLIER_PROBABILITY,
    READINGS_LEFT_OUT,
    SAME_RESIDUAL,
)
from interwind_service.windings.first_guess import first_guess
from interwind_service.windings.fit import Fit, fit
from interwind_service.windings.intake import Taken


def standardised(fitted: Fit) -> FloatArray:
    """Return w (m,) of every reading, NaN where a reading alone decides its own value."""
    Q, _ = np.linalg.qr(fitted.jacobian)
    freedom = 1.0 - np.sum(Q * Q, axis=1)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(freedom > FREE_READING, fitted.residuals / np.sqrt(freedom), np.nan)


def agrees(fitted: Fit) -> bool:
    """Tell whether chance explains chi-square and every w, once wrongly in a hundred identifications."""
    count, unknowns = fitted.jacobian.shape
    largest = float(np.max(np.nan_to_num(np.abs(standardised(fitted)))))
    return largest <= _limit(count) and fitted.chi_square <= float(
        chi2.isf(CONTRADICTION_PROBABILITY, max(count - unknowns, 1))
    )


def indistinct(w: FloatArray) -> tuple[int, ...]:
    """Return the positions that share the largest |w|: their readings cannot tell which of them is wrong."""
    size = np.nan_to_num(np.abs(w))
    same = np.flatnonzero(size >= (1.0 - SAME_RESIDUAL) * size.max())
    return tuple(int(k) for k in same) if len(same) > 1 and size.max() > 0 else ()


def set_aside(used: Sequence[Taken], labels: Sequence[str], fitted: Fit) -> tuple[list[tuple[int, float]], Fit]:
    """Return (position, w) of the readings set aside, in that order, and the fit of the others.

    A reading that alone decides its own value is never set aside, nor one that frees less than chance may.
    """
    kept = list(range(len(used)))
    current = fitted
    aside: list[tuple[int, float]] = []
    while not agrees(current) and len(kept) > current.jacobian.shape[1]:
        w = standardised(current)
        order = [k for k in np.argsort(-np.nan_to_num(np.abs(w))) if np.isfinite(w[k])][:READINGS_LEFT_OUT]
        refits = [_without(used, labels, kept, k) for k in order]
        best = int(np.argmin([refit.chi_square for refit in refits]))
        drop = current.chi_square - refits[best].chi_square
        if drop <= _limit(len(used)) ** 2:
            break
        position = kept.pop(order[best])
        aside.append((position, float(np.copysign(np.sqrt(drop), w[order[best]]))))
        current = refits[best]
    return aside, current


def _without(used: Sequence[Taken], labels: Sequence[str], kept: Sequence[int], left_out: int) -> Fit:
    rest = [used[position] for k, position in enumerate(kept) if k != left_out]
    start, _ = first_guess(rest, labels)
    return fit(rest, labels, start, steps=LEFT_OUT_STEPS)


def _limit(count: int) -> float:
    """|w| that chance reaches once in a hundred identifications of ``count`` readings (Bonferroni)."""
    return float(norm.isf(OUTLIER_PROBABILITY / (2.0 * count)))


def inside(L: FloatArray) -> FloatArray:
    """Draw a matrix a little toward no coupling, so that it can start a fit even from the edge of the cone."""
    return (1.0 - EDGE_GAIN) * L + EDGE_GAIN * np.diag(L.diagonal())
