"""Answers about windings: the verdict, the repair, the identification, the characterization."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from enum import Enum

import numpy as np

from interwind.model.finding import NO_EVIDENCE, Caution, Evidence, Finding, Verdict
from interwind.model.frozen import FloatArray
from interwind.model.json_form import JsonForm
from interwind.model.windings import WindingSet


@dataclass(frozen=True, slots=True)
class Culprit:
    """A pair whose single change cures the set: the couplings ``low`` to ``high`` would do, ``suggested`` is best."""

    pair: tuple[str, str]
    low: float
    high: float
    suggested: float


@dataclass(frozen=True, slots=True, eq=False)
class ValidityReport(JsonForm):
    """The answer of `check`.

    ``eigenvalues`` (n,) ascending, of the unit-diagonal coupling matrix; ``eigenvalues_h`` (n,), H, of L;
    ``witness_current_a`` (n,) = D^(−½) v scaled to 1 A for the smallest eigenvalue, D = diag L;
    ``witness_energy_j`` = ½ iᵀ L i; ``culprits`` ranked, empty when no single change cures;
    ``feasible_low``, ``feasible_high`` (n, n): interval of each coupling, the others held, NaN where no value cures;
    ``margin``: what the stated band, or rounding, can move the smallest eigenvalue; ``impossible_subsets``: the
    smallest groups of windings that cannot exist together, the worst first; ``blame`` (n,): share of each winding in
    the negative energy, sum 1, all zero where there is none.
    """

    verdict: Verdict
    labels: tuple[str, ...]
    eigenvalues: FloatArray
    eigenvalues_h: FloatArray
    witness_current_a: FloatArray
    witness_energy_j: float
    culprits: tuple[Culprit, ...]
    feasible_low: FloatArray
    feasible_high: FloatArray
    findings: tuple[Finding, ...] = ()
    cautions: tuple[Caution, ...] = ()
    evidence: Evidence = NO_EVIDENCE
    margin: float = math.nan
    impossible_subsets: tuple[tuple[str, ...], ...] = ()
    blame: FloatArray = field(default_factory=lambda: np.empty(0))


class RepairMethod(Enum):
    """How a set is mended."""

    COMPLETION = "COMPLETION"
    NEAREST = "NEAREST"


@dataclass(frozen=True, slots=True)
class Change:
    """One coupling before and after a repair; ``change_in_uncertainties`` is NaN where none was stated."""

    pair: tuple[str, str]
    before: float
    after: float
    change_in_uncertainties: float


@dataclass(frozen=True, slots=True, eq=False)
class RepairReport(JsonForm):
    """The answer of `repair`: the mended set, its Frobenius distance in couplings, every change, every leakage.

    ``leakage_before_h``, ``leakage_after_h`` (n, n), H: row driven, column shorted, the others open;
    ``all_shorted_leakage_before_h``, ``all_shorted_leakage_after_h`` (n,), H: each driven, all others shorted. NaN
    where the set as stated gives none.
    """

    windings: WindingSet
    distance: float
    changes: tuple[Change, ...]
    leakage_before_h: FloatArray
    leakage_after_h: FloatArray
    all_shorted_leakage_before_h: FloatArray
    all_shorted_leakage_after_h: FloatArray
    findings: tuple[Finding, ...] = ()
    cautions: tuple[Caution, ...] = ()
    evidence: Evidence = NO_EVIDENCE
