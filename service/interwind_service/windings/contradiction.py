"""Whether the readings contradict each other, and which of them is to blame."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from interwind.model.finding import Finding, Severity
from interwind.model.frozen import FloatArray
from interwind.model.identification import Outlier
from interwind.model.windings import WindingSet
from interwind_service.tolerances import EDGE_GAIN, LEFT_OUT_STEPS, READINGS_LEFT_OUT
from interwind_service.windings.fit import Fit, fit
from interwind_service.windings.intake import Taken
from interwind_service.windings.outliers import agrees, inside, set_aside, standardised
from interwind_service.windings.readings import predicted, windings_of
from interwind_service.windings.slips import slip_of
from interwind_service.windings.verdict import check


@dataclass(frozen=True, slots=True, eq=False)
class Contradiction:
    """Standardised residuals (m,) of the full fit, the outliers, worst first, what is to be said about them, and the
    matrix (n, n), H, of the readings that are left.
    """

    standardised: FloatArray
    outliers: tuple[Outlier, ...]
    findings: tuple[Finding, ...]
    without_h: FloatArray

    @property
    def pair(self) -> tuple[str, str] | None:
        """The first two windings, and no more, that the contradiction points at."""
        named = (finding.windings for finding in self.findings if len(finding.windings) == 2)
        return next(((names[0], names[1]) for names in named), None)


def contradiction_of(used: Sequence[Taken], labels: Sequence[str], fitted: Fit) -> Contradiction:
    """Judge the residuals of a fit.

    Beyond what chance allows, the readings that stand out are set aside. Where the readings are just enough, or the
    best matrix lies on the edge of what is possible, they ask for one that cannot exist; then the pair whose change
    alone would cure that matrix is to blame, else the reading that frees most chi-square when it is left out.
    """
    w = standardised(fitted)
    freedom = len(used) - fitted.jacobian.shape[1]
    if agrees(fitted):
        return Contradiction(w, (), (), fitted.inductance_h)
    if freedom == 0:
        return _left_out_in_turn(used, labels, fitted, w)
    found = set_aside(used, labels, fitted)
    rest = found.rest
    if not found.aside and not found.undecided:
        return _left_out_in_turn(used, labels, fitted, w) if _on_edge(fitted) else _unexplained(fitted, w, freedom)
    outliers, findings = [], []
    for position, residual in found.aside:
        one, names = used[position], windings_of(used[position].reading)
        would_fit, _ = predicted(one.reading, rest.inductance_h, labels)
        outliers.append(Outlier(position, names, residual))
        text = (
            f"Reading {position + 1} of {'-'.join(names)} is {one.value:.5g}; the others say {would_fit:.5g}, "
            f"{abs(residual):.3g} deviations away. {slip_of(one, would_fit, rest.inductance_h, labels)}"
        )
        findings.append(
            Finding("OUTLIER", Severity.WARNING, names, f"readings[{position}]", text, one.value, would_fit)
        )
    if found.undecided:
        findings.append(_undecided(used, found.undecided, rest.chi_square))
    return Contradiction(w, tuple(outliers), tuple(findings), rest.inductance_h)


def _on_edge(fitted: Fit) -> bool:
    """Whether a step free of the cone would still gain: then only the edge holds the fit back."""
    Q, _ = np.linalg.qr(fitted.jacobian)
    gain = float(np.sum((Q.T @ fitted.residuals) ** 2))
    return gain > EDGE_GAIN * (1.0 + fitted.chi_square)


def _left_out_in_turn(used: Sequence[Taken], labels: Sequence[str], fitted: Fit, w: FloatArray) -> Contradiction:
    text = f"No windings that can exist show these readings; chi-square of the nearest is {fitted.chi_square:.3g}. "
    suspects = _of_culprit(used, labels, fitted) or tuple(range(len(used)))
    if len(suspects) > READINGS_LEFT_OUT:
        text += "There are too many readings to leave out in turn; check the set to find the culprit."
        finding = Finding("READINGS_IMPOSSIBLE", Severity.ERROR, (), "readings", text, fitted.chi_square)
        return Contradiction(w, (), (finding,), fitted.inductance_h)
    start = inside(fitted.inductance_h)
    refits = [fit([r for k, r in enumerate(used) if k != p], labels, start, steps=LEFT_OUT_STEPS) for p in suspects]
    best = int(np.argmin([refit.chi_square for refit in refits]))
    position, least = suspects[best], refits[best].chi_square
    names = windings_of(used[position].reading)
    drop = float(np.sqrt(max(fitted.chi_square - least, 0.0)))
    outlier = Outlier(position, names, float(np.copysign(drop, fitted.residuals[position])))
    text += f"Leaving out reading {position + 1} ({'-'.join(names)}) brings it to {least:.3g}: take that one again."
    finding = Finding(
        "READINGS_IMPOSSIBLE", Severity.ERROR, names, f"readings[{position}]", text, fitted.chi_square, least
    )
    return Contradiction(w, (outlier,), (finding,), refits[best].inductance_h)


def _of_culprit(used: Sequence[Taken], labels: Sequence[str], fitted: Fit) -> tuple[int, ...]:
    """Positions of the readings of the likeliest culprit pair in the matrix asked for, possible or not."""
    asked = fitted.inductance_h.copy()
    upper = np.triu_indices(len(labels))
    asked[upper] += np.linalg.lstsq(fitted.jacobian, fitted.residuals, rcond=None)[0] * fitted.scale_h
    asked.T[upper] = asked[upper]
    if not np.all(asked.diagonal() > 0):
        return ()
    culprits = check(WindingSet(tuple(labels), asked)).culprits
    if not culprits:
        return ()
    return tuple(k for k, one in enumerate(used) if set(windings_of(one.reading)) == set(culprits[0].pair))


def _undecided(used: Sequence[Taken], positions: tuple[int, ...], chi_square: float) -> Finding:
    names = tuple(dict.fromkeys(label for k in positions for label in windings_of(used[k].reading)))
    numbers = ", ".join(str(k + 1) for k in positions)
    text = (
        f"Readings {numbers} contradict each other (chi-square {chi_square:.3g}), and nothing here tells which is "
        "wrong. Take one of them again, or one more of the same windings."
    )
    return Finding("READINGS_CONTRADICT", Severity.WARNING, names, f"readings[{positions[0]}]", text, chi_square)


def _unexplained(fitted: Fit, w: FloatArray, freedom: int) -> Contradiction:
    text = (
        f"Chi-square is {fitted.chi_square:.3g} for {freedom} degrees of freedom, and no single reading explains it: "
        "the stated uncertainties are too small, or the windings changed between readings."
    )
    finding = Finding("READINGS_CONTRADICT", Severity.WARNING, (), "readings", text, fitted.chi_square, float(freedom))
    return Contradiction(w, (), (finding,), fitted.inductance_h)
