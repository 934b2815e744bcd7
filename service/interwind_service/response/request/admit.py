"""What a solve may start from: a numbered network whose windings can exist."""

from __future__ import annotations

import dataclasses

import numpy as np

from interwind.errors import FieldViolation, InvalidWindings, field_path
from interwind.model.elements import Windings
from interwind.model.finding import Finding, Severity
from interwind.model.network import Network
from interwind.model.windings import WindingSet
from interwind_service.network.topology import Topology, number
from interwind_service.windings.entries import beyond_one, non_positive, require_finite, symmetric_coupling
from interwind_service.windings.margin import stated_band
from interwind_service.windings.resistance import check_resistance
from interwind_service.windings.spectrum import EPSILON
from interwind_service.windings.verdict import check


def admit(network: Network) -> Topology:
    """Number a network and refuse windings that cannot exist; what is only noteworthy joins the findings.

    Raises
    ------
    InvalidWindings : a set is INVALID, is not fully known, or its smallest eigenvalue is negative beyond rounding.
    InvalidRequest : as `number`.
    """
    noticed: list[Finding] = []
    for position, element in enumerate(network.elements):
        if isinstance(element, Windings) and not np.isnan(element.windings.inductance_h).any():
            with field_path(f"elements[{position}].windings"):
                found = _require_valid(element.windings)
            path = f"elements[{position}].windings."
            noticed += [dataclasses.replace(finding, field=path + finding.field) for finding in found]
    topology = number(network)
    return dataclasses.replace(topology, findings=topology.findings + tuple(noticed))


def _require_valid(coils: WindingSet) -> list[Finding]:
    """Judge a set by one Cholesky factorization, shifted by what rounding can move; refuse it with the full verdict."""
    require_finite(coils)
    band = stated_band(coils)
    errors = check_resistance(coils) + non_positive(coils)
    if not errors:
        K, noticed = symmetric_coupling(coils, band)
        errors = [x for x in noticed + beyond_one(coils, K, band) if x.severity is Severity.ERROR]
        if not errors and _positive(K):
            return noticed
    report = check(coils)
    errors = [finding for finding in report.findings if finding.severity is Severity.ERROR]
    if not errors and report.eigenvalues[0] >= -coils.size * EPSILON * abs(report.eigenvalues[-1]):
        return [finding for finding in report.findings if finding.severity is not Severity.ERROR]
    told = errors or [finding for finding in report.findings if finding.code == "WITHIN_UNCERTAINTY"]
    hint = [finding.message for finding in report.findings if finding.code == "CULPRIT_PAIR"]
    message = " ".join([*(finding.message for finding in told), *hint, "Repair the set, then solve."])
    raise InvalidWindings(
        message,
        violations=tuple(FieldViolation(finding.field or "coupling", finding.message) for finding in told),
        metadata={"eigenvalue": f"{report.eigenvalues[0]:.17g}"},
    )


def _positive(K: np.ndarray) -> bool:
    """Whether no eigenvalue is negative beyond rounding, and none so small that the coupling counts as perfect."""
    try:
        np.linalg.cholesky(K - len(K) ** 2 * EPSILON * np.eye(len(K)))
    except np.linalg.LinAlgError:
        return False
    return True
