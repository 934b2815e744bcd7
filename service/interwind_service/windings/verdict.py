"""The verdict: can these windings exist, by how much, which current proves it, and which single entry would cure it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from interwind.model.finding import Evidence, Finding, Severity, Verdict
from interwind.model.frozen import FloatArray
from interwind.model.report import Culprit, ValidityReport
from interwind.model.windings import WindingSet
from interwind_service.tolerances import NEARLY_SINGULAR, WITNESS_SHARE
from interwind_service.windings.audit import audit, blamed_windings, blind_spots, name_subsets
from interwind_service.windings.completable import complete, completion_intervals
from interwind_service.windings.culprit import blame, rank_culprits
from interwind_service.windings.entries import (
    beyond_one,
    non_positive,
    require_finite,
    symmetric_coupling,
    unknown_pairs,
)
from interwind_service.windings.intervals import feasible_intervals
from interwind_service.windings.margin import Band, stated_band
from interwind_service.windings.resistance import check_resistance
from interwind_service.windings.spectrum import Spectrum, spectrum, witness
from interwind_service.windings.subsets import impossible_subsets
from interwind_service.windings.wording import spelled

METHOD = "symmetric eigendecomposition of the unit-diagonal coupling matrix"


def check(windings: WindingSet) -> ValidityReport:
    """Judge a set of coupled windings.

    The set is possible when K = D^(−½) L D^(−½), D = diag L, is positive semidefinite. With b what the stated band can
    move the smallest eigenvalue λ (Weyl 1912), it is INVALID for λ < −b, VALID for λ > b, else UNDECIDED; with nothing
    stated b = n ε λ_max, and |λ| ≤ b is VALID as perfect coupling. With unknown pairs λ is the greatest that any
    completion reaches. Any finding of severity ERROR makes the set INVALID.

    Raises
    ------
    InvalidRequest : an entry is infinite, or NaN where it does not mean an unknown pair, or an uncertainty is not one.
    """
    require_finite(windings)
    findings = check_resistance(windings)
    bad = non_positive(windings)
    if bad:
        return _without_scale(windings, [*bad, *findings])
    band = stated_band(windings)
    K, noticed = symmetric_coupling(windings, band)
    findings += noticed + beyond_one(windings, K, band) + unknown_pairs(windings, K)
    judged = _judge(windings, K, band)
    findings = [*findings, *judged.findings, *blind_spots(windings, band)]
    verdict = Verdict.INVALID if any(f.severity is Severity.ERROR for f in findings) else judged.verdict
    return replace(judged, verdict=verdict, findings=tuple(findings))


def _judge(coils: WindingSet, K: FloatArray, band: Band) -> ValidityReport:
    """Eigenvalues, margin, witness, intervals and culprits of a symmetric K, NaN where a pair is unknown."""
    findings: list[Finding] = []
    unknown = bool(np.any(np.isnan(K)))
    tolerance, free = 0.0, True
    if unknown:
        best = complete(K)
        if best is None:
            return _not_searched(coils)
        s, tolerance = spectrum(best.completed), best.tolerance
        low, high, free = completion_intervals(K, best)
        if not free:
            findings.append(_held_at_completion(coils))
    else:
        s = spectrum(K)
        low, high = feasible_intervals(s)
    bound = band.bound + max(s.rounding, tolerance)
    verdict, finding = _verdict(coils, s, band, bound, unknown=unknown)
    findings += finding
    culprits: tuple[Culprit, ...] = ()
    subsets: tuple[tuple[str, ...], ...] = ()
    if s.values[0] < -max(s.rounding, tolerance):
        found = impossible_subsets(K, s)
        subsets = tuple(tuple(coils.labels[w] for w in subset) for subset in found.subsets)
        culprits, count = rank_culprits(coils.labels, s, low, high)
        if free or culprits:
            findings += _blame(coils, K, culprits, count)
        findings += name_subsets(coils, K, band, found)
        findings += blamed_windings(coils, s) if free and not culprits else []
    findings += audit(coils, K, s, low, high, band)
    current, energy = witness(s, coils.self_inductance_h)
    root = np.sqrt(coils.self_inductance_h)
    return ValidityReport(
        verdict=verdict,
        labels=coils.labels,
        eigenvalues=s.values,
        eigenvalues_h=np.linalg.eigvalsh(s.matrix * np.outer(root, root)),
        witness_current_a=current,
        witness_energy_j=energy,
        culprits=culprits,
        feasible_low=low,
        feasible_high=high,
        findings=tuple(findings),
        evidence=Evidence(method=METHOD, residual=s.residual, condition=s.condition),
        margin=bound,
        impossible_subsets=subsets,
        blame=blame(s),
    )


def _verdict(
    coils: WindingSet, s: Spectrum, band: Band, bound: float, *, unknown: bool
) -> tuple[Verdict, list[Finding]]:
    least = float(s.values[0])
    share = s.vectors[:, 0] ** 2
    names = tuple(coils.labels[k] for k in np.flatnonzero(share >= WITNESS_SHARE))
    which = "the best completion of the coupling matrix" if unknown else "the coupling matrix"
    stated = f"the stated band can move it by {bound:.3g}" if band.stated else f"rounding can move it by {bound:.2g}"
    if least < -bound:
        text = (
            f"The smallest eigenvalue of {which} is {least:.6g}; {stated}. The witness current, carried by "
            f"{spelled(names)}, would store negative energy: no such windings exist."
        )
        code = "NO_VALID_COMPLETION" if unknown else "INDEFINITE"
        return Verdict.INVALID, [Finding(code, Severity.ERROR, names, "coupling", text, least, -bound)]
    if least > bound:
        return Verdict.VALID, _nearly_singular(least, float(s.values[-1]), names)
    if band.stated:
        text = (
            f"The smallest eigenvalue of {which} is {least:.6g}, and {stated}: these data cannot tell whether the set "
            "is possible. More digits, or leakage inductances measured directly, would decide."
        )
        return Verdict.UNDECIDED, [
            Finding("WITHIN_UNCERTAINTY", Severity.WARNING, names, "coupling", text, least, bound)
        ]
    null = np.abs(s.values) <= bound
    names = tuple(coils.labels[k] for k in np.flatnonzero((s.vectors[:, null] ** 2).sum(axis=1) >= WITNESS_SHARE))
    text = (
        f"The smallest eigenvalue of {which} is {least:.3g}, zero within rounding ({bound:.2g}): {spelled(names)} "
        "are perfectly coupled, which is accepted as an idealisation; their leakage is zero."
    )
    return Verdict.VALID, [Finding("PERFECT_COUPLING", Severity.INFO, names, "coupling", text, least, bound)]


def _nearly_singular(least: float, greatest: float, names: tuple[str, ...]) -> list[Finding]:
    limit = NEARLY_SINGULAR * greatest
    if least > limit:
        return []
    text = (
        f"The smallest eigenvalue of the coupling matrix is {least:.3g}: the set is semidefinite within tolerance. The "
        f"leakage that {spelled(names)} have together is lost in the digits of the data unless they were given in full."
    )
    return [Finding("NEARLY_PERFECT_COUPLING", Severity.INFO, names, "coupling", text, least, limit)]


def _blame(coils: WindingSet, K: FloatArray, culprits: tuple[Culprit, ...], count: int) -> list[Finding]:
    if not culprits:
        text = "No change of a single coupling makes the set possible; at least two entries are wrong."
        return [Finding("NO_SINGLE_CHANGE_CURES", Severity.WARNING, (), "coupling", text)]
    first = culprits[0]
    i, j = (coils.index(label) for label in first.pair)
    only = (
        "the only single value that can be wrong"
        if count == 1
        else f"the likeliest of {count} single values that can be wrong"
    )
    found = "is not known" if np.isnan(K[i, j]) else f"is given as {K[i, j]:.6g}"
    text = (
        f"Pair {first.pair[0]}-{first.pair[1]} is {only}: it {found} and would have to lie in "
        f"[{first.low:.6g}, {first.high:.6g}]. Measure it again by a short-circuit test."
    )
    nearest = first.low if K[i, j] < first.low else first.high
    findings = [
        Finding("CULPRIT_PAIR", Severity.WARNING, first.pair, f"coupling[{i}][{j}]", text, float(K[i, j]), nearest)
    ]
    if count > len(culprits):
        text = f"{count} single changes would cure; the first {len(culprits)} are listed."
        findings.append(
            Finding("CULPRITS_TRUNCATED", Severity.INFO, (), "culprits", text, float(count), float(len(culprits)))
        )
    return findings


def _held_at_completion(coils: WindingSet) -> Finding:
    text = (
        "With this many windings and so loose a pattern of known pairs, each feasible interval holds the other unknown "
        "couplings at one completion; over all completions it may be wider."
    )
    return Finding("INTERVALS_HELD_AT_COMPLETION", Severity.INFO, (), "feasible_low", text, float(coils.size))


def _not_searched(coils: WindingSet) -> ValidityReport:
    text = (
        "There are too many unknown pairs in too loose a pattern to search for a valid completion. State more pairs, "
        "or judge a smaller part of the set."
    )
    finding = Finding("COMPLETION_NOT_SEARCHED", Severity.WARNING, (), "coupling", text)
    return _without_numbers(coils, Verdict.UNDECIDED, (finding,), METHOD)


def _without_scale(coils: WindingSet, findings: list[Finding]) -> ValidityReport:
    """The report of a set with a non-positive self-inductance: no couplings, and that winding alone is the witness."""
    worst = int(np.argmin(coils.self_inductance_h))
    alone = np.zeros(coils.size)
    alone[worst] = 1.0
    report = _without_numbers(coils, Verdict.INVALID, tuple(findings), "self-inductances")
    if np.all(np.isfinite(coils.inductance_h)):
        symmetric = 0.5 * (coils.inductance_h + coils.inductance_h.T)
        report = replace(report, eigenvalues_h=np.linalg.eigvalsh(symmetric))
    energy = 0.5 * float(coils.self_inductance_h[worst])
    return replace(report, witness_current_a=alone, witness_energy_j=energy, blame=alone)


def _without_numbers(coils: WindingSet, verdict: Verdict, findings: tuple[Finding, ...], method: str) -> ValidityReport:
    vector, square = np.full(coils.size, np.nan), np.full((coils.size, coils.size), np.nan)
    return ValidityReport(
        verdict=verdict,
        labels=coils.labels,
        eigenvalues=vector,
        eigenvalues_h=vector,
        witness_current_a=vector,
        witness_energy_j=np.nan,
        culprits=(),
        feasible_low=square,
        feasible_high=square,
        findings=findings,
        evidence=Evidence(method=method),
        blame=np.zeros(coils.size),
    )
