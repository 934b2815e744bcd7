"""What a repair did: every change in units of its own uncertainty, and what it cost in leakage."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from interwind.model.finding import Finding, Severity
from interwind.model.frozen import FloatArray
from interwind.model.report import Change
from interwind.model.windings import WindingSet
from interwind_service.tolerances import LEAKAGE_MOVED_RATIO, STATED_DEVIATIONS
from interwind_service.windings.leakage import coupling_deviation
from interwind_service.windings.spectrum import Spectrum


def rebuilt(coils: WindingSet, after: FloatArray) -> WindingSet:
    """Return the set with the couplings ``after`` (n, n), symmetric; entries that did not change keep every bit."""
    changed = after != coils.coupling
    root = np.sqrt(coils.self_inductance_h)
    inductance = np.where(changed, after * np.outer(root, root), coils.inductance_h)
    if coils.stated_as_coupling:
        return replace(coils, inductance_h=inductance, coupling=np.where(changed, after, coils.coupling))
    return WindingSet(
        coils.labels,
        inductance,
        coils.resistance_ohm,
        coupling_decimals=coils.coupling_decimals,
        coupling_uncertainty=coils.coupling_uncertainty,
        inductance_uncertainty_h=coils.inductance_uncertainty_h,
    )


def changes_of(coils: WindingSet, after: FloatArray) -> tuple[Change, ...]:
    """Return every pair whose coupling changed, row by row; NaN before = it was not known."""
    deviation = coupling_deviation(coils)
    stated = np.where(np.isnan(coils.coupling), coils.coupling.T, coils.coupling)
    changed = after != coils.coupling
    changes = []
    for i, j in np.argwhere(np.triu(changed | changed.T, 1)):
        size = np.nan if deviation is None else float(deviation[i, j])
        moved = float(after[i, j] - stated[i, j])
        pair = (coils.labels[i], coils.labels[j])
        changes.append(Change(pair, float(stated[i, j]), float(after[i, j]), moved / size if size > 0 else np.nan))
    return tuple(changes)


def harm_of(coils: WindingSet, changes: tuple[Change, ...], before_h: FloatArray, after_h: FloatArray) -> list[Finding]:
    """Say what the table shows: the change furthest beyond its uncertainty, and the leakage that moved most.

    ``before_h``, ``after_h``: shape (n, n), H, pair leakages.
    """
    findings = []
    beyond = [change for change in changes if abs(change.change_in_uncertainties) > STATED_DEVIATIONS]
    if beyond:
        worst = max(beyond, key=lambda change: abs(change.change_in_uncertainties))
        size = abs(worst.change_in_uncertainties)
        text = (
            f"{len(beyond)} of {len(changes)} changes exceed {STATED_DEVIATIONS:g} stated deviations; the largest is "
            f"{worst.pair[0]}-{worst.pair[1]}, {worst.before:.6g} to {worst.after:.6g}, {size:.3g} deviations. "
            "Measure that pair again."
        )
        findings.append(
            Finding("CHANGE_BEYOND_UNCERTAINTY", Severity.WARNING, worst.pair, "changes", text, size, STATED_DEVIATIONS)
        )
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.abs(np.log(after_h / before_h))
    ratio[~(before_h > 0)] = 0.0
    i, j = np.unravel_index(int(np.argmax(ratio)), ratio.shape)
    if ratio[i, j] > np.log(LEAKAGE_MOVED_RATIO):
        pair = (coils.labels[i], coils.labels[j])
        text = (
            f"The repair moves the leakage {pair[0]}-{pair[1]} seen from {pair[0]} from {before_h[i, j]:.4g} H to "
            f"{after_h[i, j]:.4g} H, the most of all pairs. Compare it with a short-circuit test before using the set."
        )
        findings.append(
            Finding(
                "LEAKAGE_MOVED",
                Severity.WARNING,
                pair,
                "leakage_after_h",
                text,
                float(after_h[i, j]),
                float(before_h[i, j]),
            )
        )
    return findings


def floor_decides(coils: WindingSet, after: Spectrum, all_shorted_h: FloatArray) -> Finding:
    """Say in henries what an eigenvalue floor f stands for: all-shorted leakages of no more than f L_ii are assured."""
    i = int(np.argmin(all_shorted_h / coils.self_inductance_h))
    least = max(float(after.values[0]), 0.0)
    text = (
        f"The nearest matrix lies on the edge of what is possible, smallest eigenvalue {least:.3g}: the floor and not "
        f"the data decides the leakage of {coils.labels[i]} with all others shorted, now {all_shorted_h[i]:.3g} H. "
        "Prefer COMPLETION, or measure that leakage."
    )
    assured = float(least * coils.self_inductance_h[i])
    return Finding(
        "FLOOR_DECIDES_LEAKAGE", Severity.WARNING, (coils.labels[i],), "floor", text, float(all_shorted_h[i]), assured
    )
