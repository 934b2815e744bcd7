"""Slips of the hand that leave a mark: a sign, a factor 2, a unit, a side of the turns ratio; and what would fit.

These are rules of thumb (common practice, no source): each says what would explain the number, never that it is so.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind.model.finding import Finding, Severity
from interwind.model.frozen import FloatArray
from interwind.model.windings import WindingSet
from interwind_service.tolerances import (
    PAIRS_NAMED,
    PLAUSIBILITY_WINDINGS,
    SELF_INDUCTANCE_RANGE_H,
    SELF_INDUCTANCE_RATIO,
    SIDE_FACTOR_LEAST,
    SIDE_FACTOR_MATCH,
    SIGN_MATTERS_ABOVE,
    SLIP_INTERVAL_SHARE,
    TIGHT_COUPLING,
    UNIT_SLIPS,
)
from interwind_service.windings.spectrum import Spectrum, spectrum


def slips_of_pairs(coils: WindingSet, K: FloatArray, low: FloatArray, high: FloatArray) -> list[Finding]:
    """For pairs outside their feasible interval: the slip that would bring each into it."""
    slips = [
        ("SIGN_FLIPPED", -1.0, "the opposite sign"),
        ("FACTOR_TWO", 2.0, "twice the value"),
        ("FACTOR_TWO", 0.5, "half the value"),
        *(("UNIT_SLIP", factor, f"the value times {factor:g}") for factor in UNIT_SLIPS),
    ]
    with np.errstate(invalid="ignore"):
        i, j = np.nonzero(np.triu((K < low) | (K > high), 1))
    found, least, most = K[i, j], low[i, j], high[i, j]
    findings = []
    for code, factor, words in slips:
        for p in np.flatnonzero(_explains(code, factor, found, least, most))[:PAIRS_NAMED]:
            value = float(factor * found[p])
            text = (
                f"The coupling of {coils.labels[i[p]]}-{coils.labels[j[p]]} is given as {found[p]:.6g} and cannot be; "
                f"{words}, {value:.6g}{_mutual(coils, i[p], j[p], value)}, would fit."
            )
            findings.append(_pair(coils, code, int(i[p]), int(j[p]), text, float(found[p]), value))
    return findings


def _explains(code: str, factor: float, found: FloatArray, low: FloatArray, high: FloatArray) -> NDArray[np.bool_]:
    """Where the slip brings a coupling into its interval, and the interval is narrow enough for that to mean something.

    A coupling beyond 1 and a flipped sign speak for themselves.
    """
    value, beyond_one = factor * found, np.abs(found) > 1.0
    fits = (value >= low) & (value <= high)
    if code == "UNIT_SLIP" and factor < 1.0:
        return np.asarray(fits & beyond_one)
    telling = np.abs(value) > SIGN_MATTERS_ABOVE
    if code != "SIGN_FLIPPED":
        telling &= (high - low <= SLIP_INTERVAL_SHARE * np.abs(value)) | beyond_one
    return np.asarray(fits & telling)


def sides_of_leakages(coils: WindingSet, K: FloatArray, low: FloatArray, high: FloatArray) -> list[Finding]:
    """Pairs whose leakage is off from that of all others, tight ones, by the ratio of the self-inductances."""
    if not 3 <= coils.size <= PLAUSIBILITY_WINDINGS:
        return []
    own = coils.self_inductance_h
    i, j = np.triu_indices(coils.size, 1)
    leakage = 1.0 - K[i, j] ** 2
    if not np.all(leakage > 0):
        return []
    off = np.log(leakage) - np.median(np.log(leakage))
    size, ratio = np.abs(off), np.abs(np.log(own[i] / own[j]))
    largest, second = np.sort(size)[[-1, -2]]
    scatter = np.where(size == largest, second, largest)
    doubted = (size >= np.maximum(np.log(SIDE_FACTOR_LEAST), 2.0 * scatter)) & (
        np.abs(size - ratio) <= np.log(SIDE_FACTOR_MATCH)
    )
    loose = np.abs(K[i, j]) < TIGHT_COUPLING
    doubted &= np.count_nonzero(loose) == loose
    findings = []
    for p in np.flatnonzero(doubted):
        a, b = int(i[p]), int(j[p])
        fitting = 1.0 - float(leakage[p] * np.exp(-np.sign(off[p]) * ratio[p]))
        value = float(np.sign(K[a, b]) * np.sqrt(max(fitting, 0.0)))
        if abs(value) < TIGHT_COUPLING or not low[a, b] <= value <= high[a, b]:
            continue
        text = (
            f"The leakage of {coils.labels[a]}-{coils.labels[b]} is {np.exp(off[p]):.3g} times that of the other "
            f"pairs, close to the ratio of the self-inductances, {np.exp(ratio[p]):.3g}: it looks referred to the "
            f"other side. The coupling {value:.6g} would fit."
        )
        findings.append(_pair(coils, "OTHER_SIDE", a, b, text, float(K[a, b]), value))
    return findings


def magnitudes(coils: WindingSet) -> list[Finding]:
    """Self-inductances that no winding has, or that no turns ratio explains beside the others."""
    own, findings = coils.self_inductance_h, []
    least, most = SELF_INDUCTANCE_RANGE_H
    depth, distance = np.log(own), _distance_to_nearest(np.log(own))
    doubted = (own < least) | (own > most) | (distance > np.log(SELF_INDUCTANCE_RATIO))
    for i in np.flatnonzero(doubted)[:PAIRS_NAMED]:
        value = float(own[i])
        others = np.delete(depth, i) if len(own) > 1 else depth
        slips = [slip for slip in UNIT_SLIPS if least <= value * slip <= most]
        slip = min(slips, key=lambda s: np.abs(np.log(value * s) - others).min(), default=1.0)
        beside = f", {np.exp(distance[i]):.2g} times away from the nearest other one" if len(own) > 1 else ""
        text = (
            f"The self-inductance of {coils.labels[i]} is {value:.4g} H{beside}. "
            f"If the unit slipped, {value * slip:.4g} H would fit."
        )
        findings.append(_own(coils, "UNLIKELY_MAGNITUDE", int(i), text, value, value * slip))
    return findings


def units_of_self_inductances(coils: WindingSet, judged: Spectrum) -> list[Finding]:
    """A self-inductance whose unit slipped spoils its whole row of couplings by the square root of the slip.

    Only where the mutual inductances were given themselves, and all other windings are tightly coupled.
    """
    n, K = coils.size, judged.matrix
    if coils.stated_as_coupling or not 3 <= n <= PLAUSIBILITY_WINDINGS:
        return []
    findings = []
    for i in range(n):
        rest = np.arange(n) != i
        among = np.abs(K[np.ix_(rest, rest)])
        if among.min() < TIGHT_COUPLING:
            continue
        for slip in UNIT_SLIPS:
            mended = K.copy()
            mended[i, rest] = mended[rest, i] = K[i, rest] / np.sqrt(slip)
            row = np.abs(mended[i, rest])
            if row.min() >= TIGHT_COUPLING and row.max() <= 1.0 and not spectrum(mended).negative:
                value = float(coils.self_inductance_h[i])
                text = (
                    f"The self-inductance of {coils.labels[i]} is {value:.6g} H, with which its couplings lie between "
                    f"{np.abs(K[i, rest]).min():.3g} and {np.abs(K[i, rest]).max():.3g} among tightly coupled ones; "
                    f"{value * slip:.6g} H would fit."
                )
                findings.append(_own(coils, "UNIT_SLIP", i, text, value, value * slip))
    return findings


def _distance_to_nearest(depth: FloatArray) -> FloatArray:
    """Distance of every value to the nearest other one; zero for a single value."""
    order = np.argsort(depth)
    gaps = np.diff(depth[order])
    if not len(gaps):
        return np.zeros(1)
    distance = np.empty(len(depth))
    distance[order] = np.minimum(np.append(gaps, np.inf), np.insert(gaps, 0, np.inf))
    return distance


def _mutual(coils: WindingSet, i: int, j: int, coupling: float) -> str:
    if coils.stated_as_coupling:
        return ""
    own = coils.self_inductance_h
    return f" (M = {coupling * np.sqrt(own[i] * own[j]):.6g} H)"


def _pair(coils: WindingSet, code: str, i: int, j: int, text: str, found: float, fitting: float) -> Finding:
    labels = (coils.labels[i], coils.labels[j])
    return Finding(code, Severity.WARNING, labels, f"coupling[{i}][{j}]", text, found, fitting)


def _own(coils: WindingSet, code: str, i: int, text: str, found: float, fitting: float) -> Finding:
    field = f"self_inductance_h[{i}]" if coils.stated_as_coupling else f"inductance_h[{i}][{i}]"
    return Finding(code, Severity.WARNING, (coils.labels[i],), field, text, found, fitting)
