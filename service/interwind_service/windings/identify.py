"""From readings of any mixture to the set that fits them best, and how far it may be trusted."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from interwind.errors import AccuracyNotReached, InvalidRequest
from interwind.model.finding import Evidence, Finding, Severity
from interwind.model.frozen import FloatArray, labels_of
from interwind.model.identification import Identification
from interwind.model.readings import Reading, ShortedInductance
from interwind.model.windings import WindingSet
from interwind_service.tolerances import NEXT_READING_UNCERTAINTY
from interwind_service.windings.completion import largest_determinant
from interwind_service.windings.contradiction import Contradiction, contradiction_of
from interwind_service.windings.determined import require_determined
from interwind_service.windings.first_guess import first_guess
from interwind_service.windings.fit import Fit, fit
from interwind_service.windings.intake import short_corrections, taken
from interwind_service.windings.leakage import pair_leakage
from interwind_service.windings.next_reading import asked_for, next_reading

METHOD = "weighted least squares on a triangular factor (Levenberg 1944, Marquardt 1963)"


def identify(labels: Sequence[str], readings: Sequence[Reading], aim: tuple[str, str] | None = None) -> Identification:
    """Find the inductance matrix that the readings support best, among all that can exist.

    minimise Σ ((reading − fitted) / uncertainty)² over L = D F Fᵀ D; the covariance of L is (Jᵀ J)⁻¹, J the derivatives
    of the fitted readings over their uncertainties (JCGM 102, section 6).

    Parameters
    ----------
    labels : n distinct labels.
    readings : at least n (n + 1) / 2, in any mixture that determines every entry.
    aim : the pair whose leakage the next reading is to sharpen; None = the one known worst.

    Raises
    ------
    InvalidRequest : a reading does not fit, or the readings leave an entry open (reason UNDETERMINED, with what to
        measure).
    """
    names = labels_of(labels, "labels")
    used = taken(readings, names)
    if aim is not None and (len(aim) != 2 or aim[0] == aim[1] or not set(aim) <= set(names)):
        raise InvalidRequest.at("aim", f"{aim!r} found; two different labels of {', '.join(names)} are expected")
    start, groups = first_guess(used, names)
    require_determined(used, names, start)
    fitted = fit(used, names, start)
    L = fitted.inductance_h
    findings = [finding for one in used for finding in one.findings] + short_corrections(used, L, names)
    findings += _polarity(groups)
    covariance = _covariance(fitted)
    found = contradiction_of(used, names, fitted)
    if not fitted.settled:
        raise AccuracyNotReached(
            f"the fit did not come to rest, chi-square {fitted.chi_square:.3g}. "
            + (found.findings[0].message if found.findings else "Give readings nearer to each other, or more of them")
        )
    coils = _with_deviations(names, L, covariance)
    leakage, leakage_deviation = _leakages(coils, covariance)
    following, said = _following(coils, covariance, leakage, leakage_deviation, found, aim)
    return Identification(
        windings=coils,
        covariance_h2=covariance,
        chi_square=fitted.chi_square,
        degrees_of_freedom=len(used) - len(covariance),
        residuals=found.standardised,
        outliers=found.outliers,
        next_reading=following,
        leakage_h=leakage,
        leakage_uncertainty_h=leakage_deviation,
        findings=(*findings, *found.findings, *said),
        evidence=Evidence(method=METHOD, condition=float(np.linalg.cond(fitted.jacobian))),
    )


def _covariance(fitted: Fit) -> FloatArray:
    """(Jᵀ J)⁻¹ in H², through the triangular factor of J."""
    R = np.linalg.qr(fitted.jacobian, mode="r")
    half = np.linalg.solve(R, np.eye(len(R))) * fitted.scale_h[:, None]
    return half @ half.T


def _with_deviations(labels: tuple[str, ...], L: FloatArray, covariance: FloatArray) -> WindingSet:
    """The fitted set with one deviation of every entry, and of every coupling with its correlations taken into account.

    dk_ij = dL_ij / sqrt(L_ii L_jj) − k_ij (dL_ii / L_ii + dL_jj / L_jj) / 2; in a tight set far below dL_ij alone.
    """
    root = np.sqrt(L.diagonal())
    scale = np.outer(root, root)
    k = L / scale
    own = L.diagonal()
    deviation_k = _of_pairs(covariance, -0.5 * k / own[:, None], 1.0 / scale, -0.5 * k / own[None, :])
    deviation_h = np.zeros(L.shape)
    deviation_h[np.triu_indices(len(L))] = np.sqrt(covariance.diagonal())
    return WindingSet(
        labels,
        L,
        coupling_uncertainty=deviation_k,
        inductance_uncertainty_h=np.maximum(deviation_h, deviation_h.T),
    )


def _leakages(coils: WindingSet, covariance: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Pair leakages (n, n), H, and their deviations: dℓ_ij = dL_ii − 2 r dL_ij + r² dL_jj, r = L_ij / L_jj."""
    r = coils.inductance_h / coils.self_inductance_h
    return pair_leakage(coils), _of_pairs(covariance, np.ones_like(r), -2.0 * r, r * r)


def _of_pairs(covariance: FloatArray, first: FloatArray, mutual: FloatArray, second: FloatArray) -> FloatArray:
    """Deviation (n, n) of a_ij dL_ii + b_ij dL_ij + c_ij dL_jj for every pair, from the full covariance."""
    n = len(first)
    where = np.zeros((n, n), dtype=int)
    where[np.triu_indices(n)] = np.arange(len(covariance))
    where = np.maximum(where, where.T)
    deviation = np.zeros((n, n))
    for i in range(n):
        for j in range(n):
            if i != j:
                places = [where[i, i], where[i, j], where[j, j]]
                c = np.array([first[i, j], mutual[i, j], second[i, j]])
                deviation[i, j] = np.sqrt(max(c @ covariance[np.ix_(places, places)] @ c, 0.0))
    return deviation


def _following(
    coils: WindingSet,
    covariance: FloatArray,
    leakage: FloatArray,
    deviation: FloatArray,
    found: Contradiction,
    aim: tuple[str, str] | None,
) -> tuple[Reading | None, list[Finding]]:
    """A contradiction is settled first, by a short-circuit test of the pair it points at; else the design decides."""
    suspect = found.pair
    if aim is None and suspect is not None:
        i, j = (coils.index(label) for label in suspect)
        value = _expected(found.without_h, i, j)
        reading = ShortedInductance(suspect[0], (suspect[1],), value, NEXT_READING_UNCERTAINTY * value)
        return reading, [asked_for(reading, "it would settle the contradiction", float("nan"))]
    if coils.size < 2:
        return None, []
    if aim is None:
        with np.errstate(divide="ignore", invalid="ignore"):
            relative = np.nan_to_num(np.where(leakage > 0, deviation / leakage, 0.0))
        i, j = np.unravel_index(int(np.argmax(relative)), relative.shape)
        aim = (coils.labels[i], coils.labels[j])
    return next_reading(coils.inductance_h, covariance, coils.labels, aim)


def _expected(L: FloatArray, i: int, j: int) -> float:
    """Leakage i-j of largest determinant, H, the other pairs of L (n, n) held."""
    root = np.sqrt(L.diagonal())
    K = L / np.outer(root, root)
    K[i, j] = K[j, i] = np.nan
    completed = largest_determinant(K)
    k = L[i, j] / (root[i] * root[j]) if completed is None else completed[i, j]
    return float(L[i, i] * (1.0 - k * k))


def _polarity(groups: list[tuple[str, ...]]) -> list[Finding]:
    if len(groups) < 2:
        return []
    text = (
        f"No reading tells the polarity of {' | '.join(', '.join(group) for group in groups)} against each other: the "
        "starts are taken for the dotted ends. A series reading, aiding against opposing, would tell."
    )
    names = tuple(group[0] for group in groups)
    return [Finding("POLARITY_NOT_READ", Severity.WARNING, names, "readings", text, float(len(groups)), 1.0)]
