"""Readings that the others contradict.

    w = (reading − fitted) / (σ sqrt(1 − h)),   h the leverage

has unit variance under the stated uncertainties (Baarda 1968), and leaving the reading out lowers chi-square by w².
That holds only near the truth, so where something is wrong each reading is really left out in turn, the rest fitted
again, and the one that frees most chi-square set aside; then the next, until what is left agrees.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.special import chdtri, ndtri  # the distributions themselves; scipy.stats takes a second to import

from interwind.model.frozen import FloatArray
from interwind_service.tolerances import (
    CONTRADICTION_PROBABILITY,
    EDGE_GAIN,
    FREE_READING,
    LEFT_OUT_STEPS,
    OUTLIER_PROBABILITY,
    READINGS_LEFT_OUT,
    RIVAL_CHI_SQUARE,
    SAME_CHI_SQUARE,
    UNDETERMINED_SINGULAR_VALUE,
)
from interwind_service.windings.first_guess import first_guess
from interwind_service.windings.fit import Fit, fit
from interwind_service.windings.intake import Taken
from interwind_service.windings.readings import predicted


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
        chdtri(max(count - unknowns, 1), CONTRADICTION_PROBABILITY)
    )


@dataclass(frozen=True, slots=True, eq=False)
class SetAside:
    """``aside``: (position, w) of each reading set aside, in that order; ``rest``: the fit of the others;
    ``undecided``: positions of which any one, left out next, would do as well.
    """

    aside: tuple[tuple[int, float], ...]
    rest: Fit
    undecided: tuple[int, ...]


def set_aside(used: Sequence[Taken], labels: Sequence[str], fitted: Fit) -> SetAside:
    """Set readings aside until the rest agrees.

    A reading without which the rest leaves an entry open is never set aside, nor one that frees less than chance may.
    Where leaving out one of several frees the same but for what chance may, nothing tells which of them is wrong.
    """
    kept = list(range(len(used)))
    current = fitted
    aside: list[tuple[int, float]] = []
    while not agrees(current):
        order = _spared(current)
        if not order:
            break
        refits = [_without(used, labels, kept, k) for k in order]
        left = np.array([refit.chi_square for refit in refits])
        best = int(np.argmin(left))
        drop = current.chi_square - left[best]
        if drop <= _limit(len(used)) ** 2:
            break
        rivals = np.flatnonzero(left <= left[best] + min(RIVAL_CHI_SQUARE, SAME_CHI_SQUARE * drop))
        if len(rivals) > 1:
            return SetAside(tuple(aside), current, tuple(sorted(kept[order[k]] for k in rivals)))
        position = kept.pop(order[best])
        value, _ = predicted(used[position].reading, refits[best].inductance_h, labels)
        aside.append((position, float(np.copysign(np.sqrt(drop), used[position].value - value))))
        current = refits[best]
    return SetAside(tuple(aside), current, ())


def _spared(fitted: Fit) -> list[int]:
    """Rows that can be left out without leaving an entry open, those with the largest |w| first."""
    rows = fitted.jacobian / np.linalg.norm(fitted.jacobian, axis=1, keepdims=True)
    count, unknowns = rows.shape
    order = np.argsort(-np.nan_to_num(np.abs(standardised(fitted)), nan=np.inf))
    spared = [
        int(k)
        for k in order
        if count > unknowns
        and np.linalg.svd(np.delete(rows, k, axis=0), compute_uv=False)[-1] > UNDETERMINED_SINGULAR_VALUE
    ]
    return spared[:READINGS_LEFT_OUT]


def _without(used: Sequence[Taken], labels: Sequence[str], kept: Sequence[int], left_out: int) -> Fit:
    rest = [used[position] for k, position in enumerate(kept) if k != left_out]
    start, _ = first_guess(rest, labels)
    return fit(rest, labels, start, steps=LEFT_OUT_STEPS)


def _limit(count: int) -> float:
    """|w| that chance reaches once in a hundred identifications of ``count`` readings (Bonferroni)."""
    return -float(ndtri(OUTLIER_PROBABILITY / (2.0 * count)))


def inside(L: FloatArray) -> FloatArray:
    """Draw a matrix a little toward no coupling, so that it can start a fit even from the edge of the cone."""
    return (1.0 - EDGE_GAIN) * L + EDGE_GAIN * np.diag(L.diagonal())
