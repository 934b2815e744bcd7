"""The answer of `characterize`: what designers read off a set that can exist."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

from interwind.model.finding import NO_EVIDENCE, Caution, Evidence, Finding
from interwind.model.frozen import ComplexArray, FloatArray
from interwind.model.json_form import JsonForm
from interwind.model.windings import WindingSet


@dataclass(frozen=True, slots=True, eq=False)
class Modes:
    """Eigen-inductances and time constants of the set.

    ``inductance_h`` (n,), H: eigenvalues of L, ascending; ``current_a`` (n, n): column m the current of mode m;
    ``energy_share`` (n, n): row a winding, column a mode, i_w (L i)_w / iᵀ L i, NaN without energy;
    ``time_constant_s`` (n,), s: τ of L v = τ R v, ascending; ``decay_current_a`` (n, n): its currents; both NaN where
    the resistance matrix is not positive definite. Every current has the Euclidean norm 1 A, every share sums to 1.
    """

    inductance_h: FloatArray
    current_a: FloatArray
    energy_share: FloatArray
    time_constant_s: FloatArray
    decay_current_a: FloatArray


class EquivalentKind(Enum):
    """The form of an equivalent circuit. Every winding but the reference stands behind its ideal transformer.

    In a T and a STAR a branch of one winding is its leg to the star point and the branch of none is the magnetising
    one, star point to return. In a PI and a CANTILEVER a branch of one winding lies across that winding, a branch of
    two between them.
    """

    T = "T"
    PI = "PI"
    STAR = "STAR"
    CANTILEVER = "CANTILEVER"


@dataclass(frozen=True, slots=True)
class EquivalentBranch:
    """One inductance of an equivalent circuit, H, referred to the reference winding; inf = no branch."""

    windings: tuple[str, ...]
    inductance_h: float


@dataclass(frozen=True, slots=True, eq=False)
class EquivalentCircuit:
    """Inductances and ideal transformers that stand for the set.

    ``turns_ratio`` (n,): voltage of a winding over its voltage as referred to ``reference``;
    ``leakage_error`` (n, n): relative error of each pair leakage, row driven, column shorted: rounding but for a star
    of more than three windings.
    """

    kind: EquivalentKind
    reference: str
    turns_ratio: FloatArray
    branches: tuple[EquivalentBranch, ...]
    leakage_error: FloatArray


@dataclass(frozen=True, slots=True, eq=False)
class CurrentSharing:
    """How windings in parallel share their current.

    ``windings`` side by side as ``label``; ``share`` (F, p) complex: current of each over the sum, at ``frequency_hz``
    (F,);
    ``direct_share``, ``inductive_share`` (p,): its limits at zero frequency (resistances alone; NaN where they leave it
    open) and at high frequency (inductances alone).
    """

    label: str
    windings: tuple[str, ...]
    frequency_hz: FloatArray
    share: ComplexArray
    direct_share: FloatArray
    inductive_share: FloatArray


@dataclass(frozen=True, slots=True, eq=False)
class Characterization(JsonForm):
    """The answer of `characterize`.

    ``windings``: the set characterized, its connections made; ``leakage_h`` (n, n), H: row driven, column shorted, the
    others open, 0 on the diagonal; ``all_shorted_leakage_h`` (n,), H: each driven, all others shorted;
    ``leakage_uncertainty_h`` (n, n), ``all_shorted_leakage_uncertainty_h`` (n,), H: one standard deviation, entries
    taken as independent, NaN where none was stated; ``inverse_inductance_per_h`` (n, n), 1/H, NaN for a singular set.
    """

    windings: WindingSet
    leakage_h: FloatArray
    leakage_uncertainty_h: FloatArray
    all_shorted_leakage_h: FloatArray
    all_shorted_leakage_uncertainty_h: FloatArray
    inverse_inductance_per_h: FloatArray
    modes: Modes
    equivalents: tuple[EquivalentCircuit, ...]
    sharing: tuple[CurrentSharing, ...] = ()
    findings: tuple[Finding, ...] = ()
    cautions: tuple[Caution, ...] = ()
    evidence: Evidence = NO_EVIDENCE
