"""Digits audit: what the printed digits of a coupling leave of the leakage inductance behind it.

ℓ = L (1 − k²), so a half-width h of k is a relative half-width 2 |k| h / (1 − k²) of ℓ: at k = 0.999 the third decimal
alone is ± 50 %.
"""

from __future__ import annotations

import numpy as np

from interwind.model.finding import Finding, Severity
from interwind.model.frozen import FloatArray
from interwind_service.tolerances import LEAKAGE_ACCURACY, PAIRS_NAMED
from interwind_service.windings.margin import Band


def leakage_error(coupling: FloatArray, half_width: FloatArray) -> FloatArray:
    """Relative half-width of every pair leakage, 2 |k| h / (1 − k²), shape (n, n); infinite at |k| = 1."""
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(2.0 * np.abs(coupling) * half_width / np.maximum(1.0 - coupling * coupling, 0.0))


def decimals_needed(coupling: float, accuracy: float) -> int:
    """Decimals of k at which half a unit of the last one is at most ``accuracy`` of the leakage."""
    k = abs(coupling)
    return max(0, int(np.ceil(-np.log10(accuracy * (1.0 - k * k) / k))))


def audit_digits(labels: tuple[str, ...], coupling: FloatArray, band: Band) -> list[Finding]:
    """One finding for every pair whose leakage the stated band leaves too uncertain, the worst first."""
    if not band.stated:
        return []
    error = np.triu(np.nan_to_num(leakage_error(coupling, band.half_width), nan=0.0, posinf=np.inf), 1)
    places = np.argwhere(error > LEAKAGE_ACCURACY)
    order = np.argsort(-error[tuple(places.T)], kind="stable")
    more = f" ({len(places)} pairs in all.)" if len(places) > PAIRS_NAMED else ""
    return [
        _finding(labels, int(i), int(j), float(coupling[i, j]), float(error[i, j]), more)
        for i, j in places[order][:PAIRS_NAMED]
    ]


def _finding(labels: tuple[str, ...], i: int, j: int, k: float, error: float, more: str) -> Finding:
    pair = f"{labels[i]}-{labels[j]}"
    if abs(k) >= 1.0:
        text = f"The coupling of {pair} reads {k:.6g}: its digits leave nothing of the leakage."
    else:
        needed = LEAKAGE_ACCURACY * (1.0 - k * k) / (2.0 * abs(k))
        text = (
            f"As stated, the coupling {k:.6g} of {pair} gives its leakage to ±{100 * error:.3g} % only; "
            f"±{100 * LEAKAGE_ACCURACY:.0f} % needs k to ±{needed:.2g}, that is at least "
            f"{decimals_needed(k, LEAKAGE_ACCURACY)} decimals."
        )
    text += " Measure the leakage inductance itself instead." + more
    return Finding(
        "LEAKAGE_DIGITS", Severity.WARNING, (labels[i], labels[j]), f"coupling[{i}][{j}]", text, error, LEAKAGE_ACCURACY
    )
