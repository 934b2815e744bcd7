"""Which reading to take next: the one that shrinks a chosen leakage most (c-optimal design; Pukelsheim 1993).

A reading with derivative g and deviation σ takes C to C − C g gᵀ C / (σ² + gᵀ C g). For a leakage with derivative c the
variance falls by (cᵀ C g)² / (σ² + gᵀ C g).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from interwind.model.finding import Finding, Severity
from interwind.model.frozen import FloatArray
from interwind.model.readings import OpenInductance, Reading, ShortedInductance
from interwind_service.tolerances import NEXT_READING_GAIN, NEXT_READING_UNCERTAINTY
from interwind_service.windings.fit import upper_row
from interwind_service.windings.readings import predicted, stated_value, windings_of


def next_reading(
    L: FloatArray, covariance: FloatArray, labels: Sequence[str], aim: tuple[str, str]
) -> tuple[Reading | None, list[Finding]]:
    """Return the reading that shrinks the leakage ``aim`` (driven, shorted) most, with its expected value.

    Candidates are all short-circuit inductances with one winding, or all others, shorted, and all open ones; each is
    taken to be read to one per cent.

    Parameters
    ----------
    L : shape (n, n), H.
    covariance : shape (p, p), H², of the upper triangle of L, row by row.
    """
    target = ShortedInductance(aim[0], (aim[1],), 1.0, 1.0)
    _, S = predicted(target, L, labels)
    c = upper_row(S)
    variance = float(c @ covariance @ c)
    best, fall = None, 0.0
    for candidate in _candidates(labels):
        value, S = predicted(candidate, L, labels)
        if value <= 0:
            continue
        g = upper_row(S)
        Cg = covariance @ g
        gain = float(c @ Cg) ** 2 / ((NEXT_READING_UNCERTAINTY * value) ** 2 + float(g @ Cg))
        if gain > fall * (1.0 + NEXT_READING_UNCERTAINTY):
            best, fall = replace(candidate, inductance_h=value, uncertainty_h=NEXT_READING_UNCERTAINTY * value), gain
    left = float(np.sqrt(max(1.0 - fall / variance, 0.0))) if variance > 0 else 1.0
    if best is None or left > 1.0 - NEXT_READING_GAIN:
        return None, []
    return best, [
        asked_for(best, f"it would bring the deviation of the leakage {aim[0]}-{aim[1]} to {100 * left:.2g} %", left)
    ]


def asked_for(reading: Reading, why: str, measured: float) -> Finding:
    """Say a reading as an instruction for the bench."""
    driven, *shorted = windings_of(reading)
    how = f"short {', '.join(shorted)}, the rest open" if shorted else "all others open"
    expected, _ = stated_value(reading)
    text = f"Take next: drive {driven}, {how}; about {expected:.4g} H is expected, and {why}."
    return Finding("NEXT_READING", Severity.INFO, (driven, *shorted), "readings", text, measured)


def _candidates(labels: Sequence[str]) -> list[OpenInductance | ShortedInductance]:
    pairs = [ShortedInductance(a, (b,), 1.0, 1.0) for a in labels for b in labels if a != b]
    alone: list[OpenInductance | ShortedInductance] = [OpenInductance(a, 1.0, 1.0) for a in labels]
    if len(labels) > 2:
        alone += [ShortedInductance(a, tuple(b for b in labels if b != a), 1.0, 1.0) for a in labels]
    return [*pairs, *alone]
