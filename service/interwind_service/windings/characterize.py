"""What designers read off a set: leakages with error bars, inverse matrix, modes, equivalent circuits, sharing."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from interwind.errors import InvalidRequest, InvalidWindings
from interwind.model.characterization import Characterization, CurrentSharing, EquivalentCircuit, EquivalentKind
from interwind.model.connection import CONNECTIONS, Connection, InParallel
from interwind.model.finding import Evidence, Finding, Severity, Verdict
from interwind.model.frozen import FloatArray, frozen_vector
from interwind.model.windings import WindingSet
from interwind_service.tolerances import EQUIVALENT_WINDINGS, NO_INDUCTANCE, STAR_ERROR
from interwind_service.windings.equivalents import cantilever, pi, star, tee
from interwind_service.windings.interconnect import in_parallel, in_series, shorted_and_open
from interwind_service.windings.leakage import (
    all_shorted_deviation,
    all_shorted_leakage,
    leakage_deviation,
    pair_leakage,
)
from interwind_service.windings.modes import modes_of
from interwind_service.windings.sharing import current_sharing
from interwind_service.windings.spectrum import Spectrum, spectrum
from interwind_service.windings.verdict import check


def characterize(
    windings: WindingSet, connections: Sequence[Connection] = (), frequency_hz: object = ()
) -> Characterization:
    """Return leakages, inverse matrix, modes and equivalent circuits of a set, its connections made first.

    Series connections are made first and all at once, then the parallel ones, then windings are shorted, then opened.

    Parameters
    ----------
    windings : a set that can exist, every pair known.
    connections : how windings are joined before the set is characterized.
    frequency_hz : shape (F,), Hz, where the sharing of each parallel connection is computed.

    Raises
    ------
    InvalidWindings : the set cannot exist.
    InvalidRequest : a pair is not known; a connection or a frequency does not fit.
    """
    _require_possible(windings)
    findings: list[Finding] = []
    coils, sharing = windings, ()
    frequency = frozen_vector(() if frequency_hz is None else frequency_hz, "frequency_hz")
    if len(frequency) and not any(isinstance(c, InParallel) for c in connections):
        raise InvalidRequest.at(
            "frequency_hz", "given, but no windings are connected in parallel: name them, or leave it out"
        )
    if len(connections):
        coils, sharing, findings = _connected(windings, connections, frequency)
    s = spectrum(0.5 * (coils.coupling + coils.coupling.T))
    leakage, shorted = pair_leakage(coils), all_shorted_leakage(coils, s)
    singular = bool(s.values[0] <= s.rounding)
    inverse = np.full((coils.size, coils.size), np.nan) if singular else (s.vectors / s.values) @ s.vectors.T
    root = np.sqrt(coils.self_inductance_h)
    gamma = inverse / np.outer(root, root)
    if singular:
        findings.append(_perfect(coils, s))
    circuits, said = _equivalents(coils, gamma, singular=singular)
    return Characterization(
        windings=coils,
        leakage_h=leakage,
        leakage_uncertainty_h=leakage_deviation(coils, leakage),
        all_shorted_leakage_h=shorted,
        all_shorted_leakage_uncertainty_h=all_shorted_deviation(coils, shorted, inverse),
        inverse_inductance_per_h=gamma,
        modes=modes_of(coils.inductance_h, coils.resistance_matrix_ohm),
        equivalents=circuits,
        sharing=sharing,
        findings=(*findings, *said),
        evidence=Evidence(
            method="eigendecomposition of the coupling matrix", residual=s.residual, condition=s.condition
        ),
    )


def _require_possible(coils: WindingSet) -> None:
    unknown = np.argwhere(np.triu(np.isnan(coils.coupling + coils.coupling.T), 1))
    if len(unknown) and np.all(coils.self_inductance_h > 0):
        i, j = unknown[0]
        raise InvalidRequest.at(
            f"{'coupling' if coils.stated_as_coupling else 'inductance_h'}[{i}][{j}]",
            f"{coils.labels[i]}-{coils.labels[j]} is not known ({len(unknown)} in all): repair can fill it",
        )
    report = check(coils)
    if report.verdict is Verdict.INVALID:
        worst = next(finding for finding in report.findings if finding.severity is Severity.ERROR)
        raise InvalidWindings.at(
            "windings", f"{worst.message} A set that cannot exist has no leakages: mend it with repair", **_plain(worst)
        )


def _plain(finding: Finding) -> dict[str, object]:
    return {"finding": finding.code, "measured": finding.measured, "limit": finding.limit}


def _connected(
    windings: WindingSet, connections: Sequence[Connection], frequency_hz: FloatArray
) -> tuple[WindingSet, tuple[CurrentSharing, ...], list[Finding]]:
    for position, connection in enumerate(connections):
        if not isinstance(connection, CONNECTIONS):
            raise InvalidRequest.at(f"connections[{position}]", f"{connection!r} found; a connection is expected")
    series = in_series(windings, connections)
    joined = shorted_and_open(in_parallel(series, connections), connections)
    for label, own in zip(joined.labels, joined.inductance_h.diagonal(), strict=True):
        if own <= NO_INDUCTANCE * float(series.inductance_h.diagonal().max()):
            raise InvalidRequest.at(
                "connections",
                f"{label!r} has no inductance left ({own:.2g} H): windings in parallel with unequal turns, or beside a "
                "shorted one, need leakage between them; change the connection, or state the leakage",
                reason="SHORTED_BY_CONNECTION",
            )
    sharing = tuple(
        current_sharing(series, c, connections, frequency_hz) for c in connections if isinstance(c, InParallel)
    )
    text = (
        "Connections are made without loss: shorted windings and windings in parallel take their high-frequency "
        "inductance, parallel resistances their direct-current value. In between, sharing over frequency tells."
    )
    findings = [Finding("CONNECTIONS_WITHOUT_LOSS", Severity.INFO, joined.labels, "connections", text)]
    if windings.inductance_uncertainty_h is not None or windings.coupling_uncertainty is not None:
        text = "The stated uncertainty is not carried through connections; characterize the windings unjoined for it."
        findings.append(Finding("UNCERTAINTY_NOT_CARRIED", Severity.WARNING, (), "connections", text))
    return WindingSet(joined.labels, joined.inductance_h, joined.resistance_ohm), sharing, findings


def _perfect(coils: WindingSet, s: Spectrum) -> Finding:
    names = tuple(coils.labels[k] for k in np.flatnonzero(s.vectors[:, 0] ** 2 > s.rounding))
    text = (
        f"{', '.join(names)} are perfectly coupled: their leakage is zero and L has no inverse, so there is no inverse "
        "matrix, π or cantilever circuit. State the leakages if they matter."
    )
    return Finding("PERFECT_COUPLING", Severity.INFO, names, "inverse_inductance_per_h", text, s.values[0], s.rounding)


def _equivalents(
    coils: WindingSet, inverse: FloatArray, *, singular: bool
) -> tuple[tuple[EquivalentCircuit, ...], list[Finding]]:
    n = coils.size
    if n < 2:
        return (), []
    if n > EQUIVALENT_WINDINGS:
        text = f"Equivalent circuits of {n} windings are left out; they are drawn up to {EQUIVALENT_WINDINGS}."
        return (), [Finding("EQUIVALENTS_LEFT_OUT", Severity.INFO, (), "equivalents", text, n, EQUIVALENT_WINDINGS)]
    made: list[EquivalentCircuit | None] = [tee(coils) if n == 2 else star(coils)]
    if not singular:
        made += [pi(coils, inverse)] if n == 2 else []
        made.append(cantilever(coils, inverse))
    findings = []
    if None in made:
        text = "A circuit is left out: star and cantilever need every mutual inductance they divide by, signs agreeing."
        findings.append(Finding("EQUIVALENT_NOT_THERE", Severity.INFO, (), "equivalents", text))
    circuits = tuple(circuit for circuit in made if circuit is not None)
    for position, circuit in enumerate(circuits):
        findings += _said_of(coils, circuit, f"equivalents[{position}]")
    return circuits, findings


def _said_of(coils: WindingSet, circuit: EquivalentCircuit, field: str) -> list[Finding]:
    findings = []
    for branch in circuit.branches:
        if branch.inductance_h < 0:
            where = "-".join(branch.windings) or "magnetising"
            text = (
                f"The {where} branch of the {circuit.kind.name} circuit is {branch.inductance_h:.4g} H. The terminals "
                "behave as they should; the branch is bookkeeping: hang nothing on its inner end."
            )
            findings.append(
                Finding("NEGATIVE_LEG", Severity.WARNING, branch.windings, field, text, branch.inductance_h, 0.0)
            )
    worst = np.unravel_index(int(np.nanargmax(np.abs(circuit.leakage_error))), circuit.leakage_error.shape)
    error = float(circuit.leakage_error[worst])
    if circuit.kind is EquivalentKind.STAR and coils.size > 3 and abs(error) > STAR_ERROR:
        pair = (coils.labels[worst[0]], coils.labels[worst[1]])
        text = (
            f"The best star misses the leakage {pair[0]}-{pair[1]} by {100 * error:+.3g} %: leakage belongs to pairs, "
            f"and {coils.size} windings have more pairs than legs. Use the cantilever circuit or the matrix."
        )
        findings.append(Finding("STAR_IS_A_FIT", Severity.WARNING, pair, field, text, abs(error), STAR_ERROR))
    return findings
