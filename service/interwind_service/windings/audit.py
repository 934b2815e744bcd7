"""What else the data say, and what no such data can say: subsets, signs, digits, slips, duplicates, blind spots."""

from __future__ import annotations

import numpy as np

from interwind.model.finding import Finding, Severity
from interwind.model.frozen import FloatArray
from interwind.model.windings import WindingSet
from interwind_service.tolerances import DUPLICATE_AGREEMENT, PAIRS_NAMED, SUBSETS_NAMED
from interwind_service.windings.digits import audit_digits
from interwind_service.windings.geometry import referred_leakage, square_root_excess
from interwind_service.windings.intervals import cured_without
from interwind_service.windings.margin import Band
from interwind_service.windings.plausibility import (
    magnitudes,
    sides_of_leakages,
    slips_of_pairs,
    units_of_self_inductances,
)
from interwind_service.windings.signs import flipped_pairs
from interwind_service.windings.spectrum import Spectrum
from interwind_service.windings.subsets import ImpossibleSubsets
from interwind_service.windings.wording import spelled


def audit(
    coils: WindingSet, K: FloatArray, judged: Spectrum, low: FloatArray, high: FloatArray, band: Band
) -> list[Finding]:
    """Return the findings that lie outside the eigenvalue verdict itself."""
    findings = audit_digits(coils.labels, K, band)
    findings += magnitudes(coils)
    if judged.negative:
        slips = slips_of_pairs(coils, K, low, high)
        findings += slips
        if not any(finding.code == "SIGN_FLIPPED" for finding in slips):
            findings += _flipped(coils, judged)
    findings += units_of_self_inductances(coils, judged)
    if not np.any(np.isnan(K)):
        findings += sides_of_leakages(coils, K, low, high)
    findings += _duplicates(coils, K)
    return findings


def name_subsets(coils: WindingSet, K: FloatArray, band: Band, found: ImpossibleSubsets) -> list[Finding]:
    """One finding for each impossible subset; an ERROR where its own stated band does not excuse it."""
    findings = []
    for subset, least in zip(found.subsets[:SUBSETS_NAMED], found.smallest, strict=False):
        index = np.ix_(subset, subset)
        bound = Band(band.half_width[index], band.deviation[index], band.stated).bound
        names = tuple(coils.labels[w] for w in subset)
        text = f"{spelled(names)} alone are impossible together: smallest eigenvalue {least:.4g}"
        text += f", which the stated band can move by {bound:.3g}." if band.stated else "."
        if len(subset) > found.searched:
            text += f" Sets of up to {found.searched} windings were all tried; a smaller one may exist above that."
        if len(subset) == 3:
            text += _triangle(coils, K, subset)
        severity = Severity.ERROR if least < -bound else Severity.WARNING
        findings.append(Finding("IMPOSSIBLE_SUBSET", severity, names, "coupling", text, least, -bound))
    if len(found.subsets) > SUBSETS_NAMED:
        text = f"{len(found.subsets)} subsets of {len(found.subsets[0])} windings are impossible; the worst are named."
        findings.append(
            Finding("SUBSETS_TRUNCATED", Severity.INFO, (), "coupling", text, len(found.subsets), SUBSETS_NAMED)
        )
    return findings


def blamed_windings(coils: WindingSet, judged: Spectrum) -> list[Finding]:
    """Windings without which the rest is possible, for a set that no single pair cures."""
    return [
        Finding(
            "CULPRIT_WINDING",
            Severity.WARNING,
            (coils.labels[w],),
            f"coupling[{w}]",
            f"No single pair cures, but without {coils.labels[w]} the others are possible: measure its couplings anew.",
        )
        for w in np.flatnonzero(cured_without(judged))[:PAIRS_NAMED]
    ]


def blind_spots(coils: WindingSet, band: Band) -> list[Finding]:
    """What these data cannot show, whatever they are, in plain sentences."""
    if coils.size < 2:
        return []
    sentences = {
        "REVERSAL_NOT_SHOWN": "A whole winding entered the wrong way round changes no eigenvalue and cannot be seen "
        "here; an aiding and an opposing series reading of each winding against one other would show it.",
        "REFERRAL_NOT_SHOWN": "A leakage referred to the wrong side of a turns ratio usually leaves the set possible "
        "and cannot be seen here; check it against a short-circuit reading that names its driven winding.",
    }
    if not band.stated:
        sentences["NO_UNCERTAINTY_STATED"] = (
            "No uncertainty is stated, so the verdict allows for rounding only; state printed decimals or standard "
            "deviations to have it weighed against the data."
        )
    return [Finding(code, Severity.INFO, (), "", text) for code, text in sentences.items()]


def _flipped(coils: WindingSet, judged: Spectrum) -> list[Finding]:
    pairs = flipped_pairs(judged)
    names = ", ".join(f"{coils.labels[i]}-{coils.labels[j]}" for i, j in pairs)
    return [
        Finding(
            "SIGN_FLIPPED",
            Severity.WARNING,
            (coils.labels[i], coils.labels[j]),
            f"coupling[{i}][{j}]",
            f"The signs of {names} contradict the dots that all others agree on; with all turned, the set is possible.",
            float(judged.matrix[i, j]),
            float(-judged.matrix[i, j]),
        )
        for i, j in pairs
    ]


def _triangle(coils: WindingSet, K: FloatArray, subset: tuple[int, ...]) -> str:
    """The same in leakages: the square root of one is longer than those of the two others together."""
    leakage = referred_leakage(K[np.ix_(subset, subset)])
    if square_root_excess(leakage) <= 0:
        return ""
    sides = sorted(((np.sqrt(leakage[a, b]), a, b) for a, b in ((0, 1), (0, 2), (1, 2))), reverse=True)
    (longest, a, b), (one, *_), (other, *_) = sides
    pair = f"{coils.labels[subset[a]]}-{coils.labels[subset[b]]}"
    return (
        f" The square root of the relative leakage of {pair}, {longest:.3g}, exceeds those of the two other pairs "
        f"together, {one:.3g} + {other:.3g}."
    )


def _duplicates(coils: WindingSet, K: FloatArray) -> list[Finding]:
    own, findings = coils.self_inductance_h, []
    same = np.triu(np.abs(K) >= 1.0 - DUPLICATE_AGREEMENT, 1)
    for i, j in np.argwhere(same):
        sign = np.sign(K[i, j])
        rows = float(np.abs(K[i] - sign * K[j]).max())
        if rows <= DUPLICATE_AGREEMENT and abs(own[i] / own[j] - 1.0) <= DUPLICATE_AGREEMENT:
            text = (
                f"{coils.labels[i]} and {coils.labels[j]} agree in every entry: one conductor entered twice, or two "
                "wound together that these data cannot tell apart."
            )
            labels, field = (coils.labels[i], coils.labels[j]), f"coupling[{i}][{j}]"
            findings.append(
                Finding("DUPLICATE_WINDINGS", Severity.INFO, labels, field, text, rows, DUPLICATE_AGREEMENT)
            )
        if len(findings) == PAIRS_NAMED:
            break
    return findings
