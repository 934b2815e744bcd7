"""What single entries say: finiteness, positive self-inductance, symmetry, couplings beyond 1, unknown pairs."""

from __future__ import annotations

import numpy as np

from interwind.errors import InvalidRequest
from interwind.model.finding import Finding, Severity
from interwind.model.frozen import FloatArray
from interwind.model.windings import WindingSet
from interwind_service.tolerances import (
    ASYMMETRY_ERROR_DEVIATIONS,
    COMPUTABLE_COUPLING,
    COMPUTABLE_H,
    COUPLING_ROUNDING,
    PAIRS_NAMED,
    STATED_DEVIATIONS,
    SYMMETRY_ROUNDING,
    UNKNOWN_PAIRS_NAMED,
)
from interwind_service.windings.margin import Band


def require_finite(coils: WindingSet) -> None:
    """Refuse infinities anywhere, NaN where it does not mean an unknown pair, and values that no number can be made of.

    Raises
    ------
    InvalidRequest : names the entry, the value found and what to do.
    """
    own = coils.self_inductance_h
    for i in np.flatnonzero(~np.isfinite(own)):
        field = f"self_inductance_h[{i}]" if coils.stated_as_coupling else f"inductance_h[{i}][{i}]"
        raise InvalidRequest.at(
            field,
            f"{float(own[i])!r} found for winding {coils.labels[i]!r}; a self-inductance in H is needed: "
            "measure the winding with all others open",
        )
    least, most = COMPUTABLE_H
    for i in np.flatnonzero((np.abs(own) > most) | ((own > 0) & (own < least))):
        field = f"self_inductance_h[{i}]" if coils.stated_as_coupling else f"inductance_h[{i}][{i}]"
        raise InvalidRequest.at(
            field, f"{float(own[i])!r} H found; between {least:g} and {most:g} H can be computed: check the unit"
        )
    name = "coupling" if coils.stated_as_coupling else "inductance_h"
    for i, j in np.argwhere(np.isinf(getattr(coils, name))):
        raise InvalidRequest.at(
            f"{name}[{i}][{j}]",
            f"{float(getattr(coils, name)[i, j])!r} found; a finite number is needed, or NaN for a pair not known",
        )
    with np.errstate(invalid="ignore"):
        beyond = np.argwhere(np.abs(coils.coupling) > COMPUTABLE_COUPLING)
    for i, j in beyond:
        raise InvalidRequest.at(
            f"{name}[{i}][{j}]",
            f"the coupling of {coils.labels[i]!r} and {coils.labels[j]!r} comes to {float(coils.coupling[i, j]):.3g}; "
            "it cannot exceed 1: check the units",
        )
    for place in np.argwhere(~np.isfinite(coils.resistance_ohm)):
        raise InvalidRequest.at(
            "resistance_ohm" + "".join(f"[{k}]" for k in place),
            f"{float(coils.resistance_ohm[tuple(place)])!r} found; a finite resistance in ohm is needed",
        )


def non_positive(coils: WindingSet) -> list[Finding]:
    """One finding for every self-inductance that is zero or negative."""
    return [
        Finding(
            "NON_POSITIVE_SELF_INDUCTANCE",
            Severity.ERROR,
            (coils.labels[i],),
            f"self_inductance_h[{i}]" if coils.stated_as_coupling else f"inductance_h[{i}][{i}]",
            f"The self-inductance of {coils.labels[i]} is {coils.self_inductance_h[i]:.6g} H; it must be above zero. "
            "Measure it with all other windings open, and check unit and sign.",
            float(coils.self_inductance_h[i]),
            0.0,
        )
        for i in np.flatnonzero(coils.self_inductance_h <= 0)
    ]


def symmetric_coupling(coils: WindingSet, band: Band) -> tuple[FloatArray, list[Finding]]:
    """Return the symmetric part of the couplings, NaN where a pair is unknown, and what was noticed on the way."""
    K, findings = coils.coupling, []
    unknown = np.isnan(K)
    half = unknown & ~unknown.T if np.any(unknown) else unknown
    for i, j in np.argwhere(half)[:PAIRS_NAMED]:
        findings.append(
            Finding(
                "HALF_STATED_PAIR",
                Severity.WARNING,
                (coils.labels[j], coils.labels[i]),
                f"coupling[{i}][{j}]",
                f"Pair {coils.labels[j]}-{coils.labels[i]} is given one way, NaN the other; {K[j, i]:.6g} is used.",
                float(K[j, i]),
            )
        )
    if findings:
        K = np.where(half, K.T, K)
    findings += _asymmetry(coils, K, band)
    return 0.5 * (K + K.T), findings


def _asymmetry(coils: WindingSet, K: FloatArray, band: Band) -> list[Finding]:
    difference = np.abs(K - K.T)
    if not np.any(difference > SYMMETRY_ROUNDING):
        return []
    difference = np.triu(difference, 1)
    difference[np.isnan(difference)] = 0.0
    noise = np.sqrt(2.0) * np.nan_to_num(band.deviation)
    rounding = np.maximum(SYMMETRY_ROUNDING, 2.0 * np.where(noise > 0, 0.0, band.half_width))
    with np.errstate(divide="ignore", invalid="ignore"):
        deviations = np.where(noise > 0, difference / noise, 0.0)
    wrong = np.where(noise > 0, deviations > STATED_DEVIATIONS, difference > rounding * (1 + SYMMETRY_ROUNDING))
    wrong &= difference > SYMMETRY_ROUNDING
    places = np.argwhere(wrong)
    rank = np.argsort(-difference[tuple(places.T)], kind="stable")
    findings = []
    for i, j in places[rank][:PAIRS_NAMED]:
        pair = f"{coils.labels[i]}-{coils.labels[j]}"
        found = (
            f"The two entries of {pair} differ by {difference[i, j]:.3g} in coupling ({K[i, j]:.6g} and {K[j, i]:.6g})"
        )
        if noise[i, j] > 0:
            certain = deviations[i, j] > ASYMMETRY_ERROR_DEVIATIONS
            text = f"{found}, {deviations[i, j]:.3g} standard deviations of their difference."
            measured, limit = float(deviations[i, j]), STATED_DEVIATIONS
        else:
            certain = True
            text = f"{found}; what is stated allows {rounding[i, j]:.3g}."
            measured, limit = float(difference[i, j]), float(rounding[i, j])
        text += " Reciprocity wants them equal: find the misread one, or state the uncertainty."
        if len(places) > PAIRS_NAMED:
            text += f" ({len(places)} pairs in all.)"
        severity = Severity.ERROR if certain else Severity.WARNING
        field = f"{'coupling' if coils.stated_as_coupling else 'inductance_h'}[{i}][{j}]"
        findings.append(
            Finding("ASYMMETRIC", severity, (coils.labels[i], coils.labels[j]), field, text, measured, limit)
        )
    return findings


def beyond_one(coils: WindingSet, K: FloatArray, band: Band) -> list[Finding]:
    """One finding for every pair whose coupling exceeds 1 by more than its own band."""
    limit = 1.0 + COUPLING_ROUNDING + band.half_width
    with np.errstate(invalid="ignore"):
        beyond = np.abs(K) > limit
    places = np.argwhere(np.triu(beyond, 1))[:PAIRS_NAMED] if np.any(beyond) else []
    return [
        Finding(
            "COUPLING_ABOVE_ONE",
            Severity.ERROR,
            (coils.labels[i], coils.labels[j]),
            f"{'coupling' if coils.stated_as_coupling else 'inductance_h'}[{i}][{j}]",
            f"The coupling of {coils.labels[i]}-{coils.labels[j]} is {K[i, j]:.6g}; its magnitude cannot exceed 1. "
            "Measure the pair again, well below resonance.",
            float(abs(K[i, j])),
            float(limit[i, j]),
        )
        for i, j in places
    ]


def unknown_pairs(coils: WindingSet, K: FloatArray) -> list[Finding]:
    """One finding for every pair that is not known, as far as they can be read."""
    places = np.argwhere(np.triu(np.isnan(K), 1))
    more = f" ({len(places)} pairs in all.)" if len(places) > UNKNOWN_PAIRS_NAMED else ""
    return [
        Finding(
            "UNKNOWN_PAIR",
            Severity.INFO,
            (coils.labels[i], coils.labels[j]),
            f"coupling[{i}][{j}]",
            f"The coupling of {coils.labels[i]}-{coils.labels[j]} is not known and is not taken as zero; "
            f"measure it or fill it with repair before solving.{more}",
        )
        for i, j in places[:UNKNOWN_PAIRS_NAMED]
    ]
