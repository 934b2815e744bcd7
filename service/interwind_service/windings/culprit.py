"""Which single coupling would cure an impossible set, the likeliest first."""

from __future__ import annotations

import numpy as np

from interwind.model.frozen import FloatArray
from interwind.model.report import Culprit
from interwind_service.tolerances import CULPRITS_LISTED


def rank_culprits(
    labels: tuple[str, ...], coupling: FloatArray, low: FloatArray, high: FloatArray
) -> tuple[tuple[Culprit, ...], int]:
    """Return the pairs whose feasible interval is not empty, ranked, and how many there are in all.

    ``suggested`` is the maximum-determinant value; the determinant is a parabola in one entry, so it is the centre.
    """
    i, j = np.nonzero(np.triu(~np.isnan(low), 1))
    change = np.maximum(low[i, j] - coupling[i, j], coupling[i, j] - high[i, j])
    order = np.argsort(change, kind="stable")[:CULPRITS_LISTED]
    culprits = tuple(
        Culprit((labels[a], labels[b]), float(low[a, b]), float(high[a, b]), float(0.5 * (low[a, b] + high[a, b])))
        for a, b in zip(i[order], j[order], strict=True)
    )
    return culprits, len(i)
