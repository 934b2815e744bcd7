"""The answer of `identify`: the set that fits the readings best, and how far it may be trusted."""

from __future__ import annotations

from dataclasses import dataclass

from interwind.model.finding import NO_EVIDENCE, Caution, Evidence, Finding
from interwind.model.frozen import FloatArray
from interwind.model.json_form import JsonForm
from interwind.model.readings import Reading
from interwind.model.windings import WindingSet


@dataclass(frozen=True, slots=True)
class Outlier:
    """A reading that the others contradict: its place in the request, its windings, its residual in deviations."""

    position: int
    windings: tuple[str, ...]
    residual: float


@dataclass(frozen=True, slots=True, eq=False)
class Identification(JsonForm):
    """The answer of `identify`, by weighted least squares over all sets that can exist.

    ``windings`` carries one deviation of each entry and of each coupling, which know nothing of each other: bars of
    leakages are best read here. ``covariance_h2`` (m, m), H², m = n (n + 1) / 2: of the upper triangle of L, row by
    row;
    ``chi_square`` = Σ ((reading − fitted) / uncertainty)²; ``degrees_of_freedom`` = readings − m;
    ``residuals`` (readings,): each (reading − fitted) over the standard deviation of that difference, NaN where the
    reading alone decides its own value; ``outliers`` worst first;
    ``next_reading``: the reading, with its expected value, that would shrink the worst-known leakage most (None: no
    gain);
    ``leakage_h``, ``leakage_uncertainty_h`` (n, n), H: row driven, column shorted, one standard deviation from the full
    covariance.
    """

    windings: WindingSet
    covariance_h2: FloatArray
    chi_square: float
    degrees_of_freedom: int
    residuals: FloatArray
    outliers: tuple[Outlier, ...]
    next_reading: Reading | None
    leakage_h: FloatArray
    leakage_uncertainty_h: FloatArray
    findings: tuple[Finding, ...] = ()
    cautions: tuple[Caution, ...] = ()
    evidence: Evidence = NO_EVIDENCE
