"""Mend a set that cannot exist, or fill its unknown pairs, with the least harm; nothing happens silently."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from interwind.errors import AccuracyNotReached, InvalidRequest, InvalidWindings
from interwind.model.finding import Evidence, Finding, Severity
from interwind.model.frozen import FloatArray, frozen_vector, plain_float
from interwind.model.report import RepairMethod, RepairReport
from interwind.model.windings import WindingSet
from interwind_service.tolerances import NEAREST_CLEARANCE, NEAREST_RESIDUAL
from interwind_service.windings.before_after import changes_of, floor_decides, harm_of, rebuilt
from interwind_service.windings.completable import complete
from interwind_service.windings.completion import largest_determinant
from interwind_service.windings.entries import non_positive, require_finite, symmetric_coupling
from interwind_service.windings.leakage import all_shorted_leakage, pair_leakage
from interwind_service.windings.margin import stated_band
from interwind_service.windings.nearest import nearest_correlation
from interwind_service.windings.spectrum import rounding_bound, spectrum
from interwind_service.windings.verdict import check


class _Mended(NamedTuple):
    coupling: FloatArray
    findings: list[Finding]
    method: str
    residual: float
    on_edge: bool = False


def repair(
    windings: WindingSet,
    trusted: Sequence[tuple[str, str]] = (),
    weights: object = None,
    floor: float | None = None,
    method: RepairMethod = RepairMethod.COMPLETION,
) -> RepairReport:
    """Return a set that can exist, as near to the one given as the method says, with every change and every leakage.

    COMPLETION gives each unknown pair, and the one pair whose single change cures best, the value of largest
    determinant; the rest stays untouched to the last bit. NEAREST minimises ‖diag(w) (K − X) diag(w)‖ over all
    couplings X with unit diagonal, the trusted pairs fixed, and eigenvalues of at least ``floor``.

    Parameters
    ----------
    windings : NaN = pair not known.
    trusted : label pairs never changed.
    weights : shape (n,), positive, w of NEAREST; None = all one.
    floor : smallest eigenvalue of the coupling matrix for NEAREST, 0 to below 1; None = 0.

    Raises
    ------
    InvalidWindings : what is trusted, or more than one pair, contradicts itself; a self-inductance is not positive.
    InvalidRequest : an argument is out of its domain or does not belong to the method.

    References
    ----------
    Grone, Johnson, Sá & Wolkowicz 1984; Higham 2002; Qi & Sun 2006.
    """
    require_finite(windings)
    for finding in non_positive(windings):
        raise InvalidWindings.at(finding.field, finding.message)
    K, noticed = symmetric_coupling(windings, stated_band(windings))
    keep = _trusted(windings, K, trusted)
    if method is RepairMethod.COMPLETION:
        for name, value in (("weights", weights), ("floor", floor)):
            if value is not None:
                raise InvalidRequest.at(
                    name, f"given, but COMPLETION takes no {name}: leave it out, or ask for NEAREST"
                )
        mended = _complete(windings, K, keep)
    else:
        mended = _nearest(windings, K, keep, _weights(weights, windings.size), _floor(floor))
    return _report(windings, K, mended, noticed)


def _report(before: WindingSet, K: FloatArray, mended: _Mended, noticed: list[Finding]) -> RepairReport:
    known = ~np.isnan(K)
    s = spectrum(mended.coupling)
    if s.values[0] < -s.rounding:
        raise AccuracyNotReached(
            f"the repaired set still has the eigenvalue {s.values[0]:.3g} (rounding {s.rounding:.2g}); "
            "ask for NEAREST with a floor above zero"
        )
    after = rebuilt(before, mended.coupling)
    changes = changes_of(before, mended.coupling)
    leakage_before, leakage_after = pair_leakage(before), pair_leakage(after)
    shorted_after = all_shorted_leakage(after, s)
    findings = [*noticed, *mended.findings, *harm_of(before, changes, leakage_before, leakage_after)]
    if mended.on_edge:
        findings.append(floor_decides(after, s, shorted_after))
    return RepairReport(
        windings=after,
        distance=float(np.linalg.norm((mended.coupling - K)[known])),
        changes=changes,
        leakage_before_h=leakage_before,
        leakage_after_h=leakage_after,
        all_shorted_leakage_before_h=all_shorted_leakage(before, spectrum(K))
        if np.all(known)
        else np.full(before.size, np.nan),
        all_shorted_leakage_after_h=shorted_after,
        findings=tuple(findings),
        evidence=Evidence(method=mended.method, residual=mended.residual, condition=s.condition),
    )


def _complete(coils: WindingSet, K: FloatArray, keep: FloatArray) -> _Mended:
    """Fill the unknown pairs; where the known ones contradict, take the best single culprit for unknown as well."""
    method = "completion of largest determinant"
    findings = []
    asked = np.isnan(K)
    completed = largest_determinant(K)
    if completed is None:
        report = check(coils)
        pair = next((c for c in report.culprits if not keep[tuple(map(coils.index, c.pair))]), None)
        if pair is None:
            raise InvalidWindings.at(
                "coupling",
                f"the smallest eigenvalue is {report.eigenvalues[0]:.3g} and no single pair"
                f"{' outside the trusted ones' if report.culprits else ''} cures it: set every pair you distrust "
                "to NaN, or ask for NEAREST",
                reason="NO_SINGLE_CULPRIT",
            )
        i, j = map(coils.index, pair.pair)
        distrusted = K.copy()
        distrusted[i, j] = distrusted[j, i] = np.nan
        completed = largest_determinant(distrusted)
        if completed is None:
            raise AccuracyNotReached(f"no value of {'-'.join(pair.pair)} was found that cures; ask for NEAREST")
        text = (
            f"{pair.pair[0]}-{pair.pair[1]} is distrusted: {K[i, j]:.6g} becomes {completed[i, j]:.6g}, the centre of "
            f"what the other pairs allow, [{pair.low:.6g}, {pair.high:.6g}]."
        )
        findings.append(
            Finding(
                "PAIR_DISTRUSTED", Severity.WARNING, pair.pair, f"coupling[{i}][{j}]", text, K[i, j], completed[i, j]
            )
        )
        text = (
            f"Take next a short-circuit test: drive {pair.pair[0]}, short {pair.pair[1]}, all others open. About "
            f"{coils.self_inductance_h[i] * (1 - completed[i, j] ** 2):.4g} H is expected."
        )
        expected = float(coils.self_inductance_h[i] * (1 - completed[i, j] ** 2))
        findings.append(Finding("NEXT_READING", Severity.INFO, pair.pair, f"coupling[{i}][{j}]", text, expected))
    elif not np.any(asked):
        text = "The set can exist as it stands; nothing was changed."
        findings.append(Finding("NOTHING_TO_REPAIR", Severity.INFO, (), "coupling", text))
    findings += [_filled(coils, completed, i, j) for i, j in np.argwhere(np.triu(asked, 1))]
    return _Mended(completed, findings, method, 0.0)


def _filled(coils: WindingSet, completed: FloatArray, i: int, j: int) -> Finding:
    pair = (coils.labels[i], coils.labels[j])
    value = float(completed[i, j])
    if value == 0.0:
        text = f"Nothing known speaks for {pair[0]}-{pair[1]}; it is completed as 0, which is a guess. Measure it."
        return Finding("COMPLETED_WITHOUT_EVIDENCE", Severity.WARNING, pair, f"coupling[{i}][{j}]", text, value)
    text = f"{pair[0]}-{pair[1]} was not known; the other pairs speak for {value:.6g}."
    return Finding("PAIR_COMPLETED", Severity.INFO, pair, f"coupling[{i}][{j}]", text, value)


def _nearest(coils: WindingSet, K: FloatArray, keep: FloatArray, weights: FloatArray, floor: float) -> _Mended:
    method = "nearest coupling matrix by a semismooth Newton method on the dual"
    if np.any(np.isnan(K)):
        i, j = np.argwhere(np.isnan(K))[0]
        raise InvalidRequest.at(
            f"coupling[{i}][{j}]",
            f"{coils.labels[i]}-{coils.labels[j]} is not known: fill unknown pairs by COMPLETION first",
        )
    values = np.linalg.eigvalsh(K)
    if values[0] >= floor - rounding_bound(values):
        text = "The set can exist as it stands; nothing was changed."
        return _Mended(K, [Finding("NOTHING_TO_REPAIR", Severity.INFO, (), "coupling", text)], method, 0.0)
    if np.any(keep):
        best = complete(np.where(keep | np.eye(len(K), dtype=bool), K, np.nan))
        if best is not None and best.smallest < floor - rounding_bound(values):
            raise InvalidWindings.at(
                "trusted",
                f"the trusted pairs alone force an eigenvalue of {best.smallest:.3g}, below the floor {floor:.3g}: "
                "trust fewer pairs, or lower the floor",
                reason="TRUSTED_PAIRS_CONTRADICT",
            )
    clear = max(floor, NEAREST_CLEARANCE * NEAREST_RESIDUAL * len(K))
    result = nearest_correlation(K, trusted=keep, weights=weights, floor=clear)
    return _Mended(result.matrix, [], method, result.violation, on_edge=True)


def _trusted(coils: WindingSet, K: FloatArray, trusted: Sequence[tuple[str, str]]) -> FloatArray:
    keep = np.zeros(K.shape, dtype=bool)
    for position, pair in enumerate(trusted):
        if isinstance(pair, str) or len(pair) != 2 or pair[0] == pair[1]:
            raise InvalidRequest.at(f"trusted[{position}]", f"{pair!r} found; two different labels are expected")
        i, j = (_place(coils, label, f"trusted[{position}]") for label in pair)
        if np.isnan(K[i, j]):
            raise InvalidRequest.at(f"trusted[{position}]", f"{pair[0]}-{pair[1]} is not known and cannot be trusted")
        keep[i, j] = keep[j, i] = True
    return keep


def _place(coils: WindingSet, label: str, field: str) -> int:
    if label not in coils.labels:
        raise InvalidRequest.at(field, f"{label!r} is no winding; there are {', '.join(coils.labels)}")
    return coils.labels.index(label)


def _weights(weights: object, size: int) -> FloatArray:
    if weights is None:
        return np.ones(size)
    w = frozen_vector(weights, "weights")
    if w.shape != (size,):
        raise InvalidRequest.at("weights", f"{w.size} values found for {size} windings")
    bad = np.flatnonzero(~(np.isfinite(w) & (w > 0)))
    if len(bad):
        raise InvalidRequest.at(f"weights[{bad[0]}]", f"{w[bad[0]]!r} found; a finite number above 0 is expected")
    return w


def _floor(floor: float | None) -> float:
    value = 0.0 if floor is None else plain_float(floor, "floor")
    if not 0.0 <= value < 1.0:
        raise InvalidRequest.at(
            "floor", f"{value!r} found; an eigenvalue from 0 to below 1 is expected, the mean being 1"
        )
    return value
