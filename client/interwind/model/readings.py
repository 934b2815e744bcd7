"""What can be read on a set of windings, each reading with one standard deviation of uncertainty.

The sign convention is the one of `interwind.model.windings`. An inductance reading may state its context: at which
frequency it was taken and what else was in the circuit then. Values here are shapes only; whether a reading can be used
is judged by the service.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum
from typing import Any

from interwind.errors import InvalidRequest
from interwind.model.frozen import frozen_floats, labels_of, plain_float


class ReadingForm(Enum):
    """Which equivalent the instrument shows: in series with its loss, or in parallel, L_p = L_s (1 + 1/Q²)."""

    SERIES = "SERIES"
    PARALLEL = "PARALLEL"


@dataclass(frozen=True, slots=True)
class ReadingContext:
    """How an inductance was read.

    ``frequency_hz`` of the reading; ``form`` the instrument shows; ``quality_factor`` it shows beside it (inf: no
    loss);
    ``parallel_capacitance_f`` across the driven terminals, fixture included; ``shorted_resistance_ohm`` of the shorted
    windings with their links, one number each in the order of `ShortedInductance.shorted`, or one for all.
    """

    frequency_hz: float
    form: ReadingForm = ReadingForm.SERIES
    quality_factor: float = math.inf
    parallel_capacitance_f: float = 0.0
    shorted_resistance_ohm: tuple[float, ...] = (0.0,)

    def __post_init__(self) -> None:
        _numbers(self, "frequency_hz", "quality_factor", "parallel_capacitance_f")
        if not isinstance(self.form, ReadingForm):
            raise InvalidRequest.at("form", f"{self.form!r} found; a ReadingForm is expected")
        resistance = frozen_floats(self.shorted_resistance_ohm, "shorted_resistance_ohm")
        if resistance.ndim > 1 or resistance.size == 0:
            raise InvalidRequest.at(
                "shorted_resistance_ohm", f"shape {resistance.shape} found; one number, or one for each shorted winding"
            )
        object.__setattr__(self, "shorted_resistance_ohm", tuple(float(r) for r in resistance.reshape(-1)))


@dataclass(frozen=True, slots=True)
class OpenInductance:
    """Inductance of one winding, all others open, H: L_ii."""

    winding: str
    inductance_h: float
    uncertainty_h: float
    context: ReadingContext | None = None

    def __post_init__(self) -> None:
        labels_of((self.winding,), "winding")
        _numbers(self, "inductance_h", "uncertainty_h")


@dataclass(frozen=True, slots=True)
class ShortedInductance:
    """Inductance of one winding, ``shorted`` short-circuited, the rest open, H: L_ii − L_is L_ss⁻¹ L_si."""

    winding: str
    shorted: tuple[str, ...]
    inductance_h: float
    uncertainty_h: float
    context: ReadingContext | None = None

    def __post_init__(self) -> None:
        _labels(self, "shorted", least=1)
        labels_of((self.winding, *self.shorted), "shorted")
        _numbers(self, "inductance_h", "uncertainty_h")


@dataclass(frozen=True, slots=True)
class SeriesInductance:
    """Inductance of windings joined in series, all others open, H: Σ s_i s_j L_ij.

    ``aiding``: True, finish to start throughout (s = +1); False, for two windings, the second one turned round;
    or one truth value a winding, False for each one that is turned round.
    """

    windings: tuple[str, ...]
    aiding: bool | tuple[bool, ...]
    inductance_h: float
    uncertainty_h: float
    context: ReadingContext | None = None

    def __post_init__(self) -> None:
        _labels(self, "windings", least=2)
        if isinstance(self.aiding, bool):
            if not self.aiding and len(self.windings) != 2:
                raise InvalidRequest.at(
                    "aiding", f"False found for {len(self.windings)} windings; give one truth value for each winding"
                )
            object.__setattr__(self, "aiding", (True,) + (self.aiding,) * (len(self.windings) - 1))
        else:
            object.__setattr__(self, "aiding", _truths(self.aiding, len(self.windings)))
        _numbers(self, "inductance_h", "uncertainty_h")

    @property
    def senses(self) -> tuple[int, ...]:
        """The sign s of each winding in the series path, +1 or −1."""
        return tuple(1 if truth else -1 for truth in self.aiding)  # type: ignore[union-attr]


@dataclass(frozen=True, slots=True)
class VoltageRatio:
    """Open voltage of ``measured`` over that of ``driven``, sign included: L_md / L_dd."""

    driven: str
    measured: str
    ratio: float
    uncertainty: float

    def __post_init__(self) -> None:
        labels_of((self.driven, self.measured), "measured")
        _numbers(self, "ratio", "uncertainty")


@dataclass(frozen=True, slots=True)
class MutualInductance:
    """Mutual inductance of a pair, H, sign included: L_ij. An entry of a matrix that somebody wrote down."""

    windings: tuple[str, str]
    inductance_h: float
    uncertainty_h: float

    def __post_init__(self) -> None:
        _labels(self, "windings", least=2, most=2)
        _numbers(self, "inductance_h", "uncertainty_h")


@dataclass(frozen=True, slots=True)
class PairLeakage:
    """Leakage of a pair at balanced ampere-turns, seen from its first winding, H (Boyajian 1924).

    L_ii + r² L_jj − 2 r L_ij with r = n_i / n_j, ``turns`` = (n_i, n_j), exact numbers.
    """

    windings: tuple[str, str]
    turns: tuple[float, float]
    inductance_h: float
    uncertainty_h: float

    def __post_init__(self) -> None:
        _labels(self, "windings", least=2, most=2)
        turns = frozen_floats(self.turns, "turns")
        if turns.shape != (2,):
            raise InvalidRequest.at("turns", f"shape {turns.shape} found; the turns of the two windings are expected")
        object.__setattr__(self, "turns", (float(turns[0]), float(turns[1])))
        _numbers(self, "inductance_h", "uncertainty_h")


@dataclass(frozen=True, slots=True)
class EffectiveLeakage:
    """Directly measurable leakage between two windings, all windings but one shorted, referred to ``reference``, H.

    ℓ_ij = −1 / (n_i n_j Γ_ij), Γ = L⁻¹, n_i = L_ri / L_rr (Erickson & Maksimović 1998): winding i driven, the current
    of the shorted winding j measured, both brought to the reference winding r by their open voltage ratios.
    """

    reference: str
    windings: tuple[str, str]
    inductance_h: float
    uncertainty_h: float

    def __post_init__(self) -> None:
        labels_of((self.reference,), "reference")
        _labels(self, "windings", least=2, most=2)
        _numbers(self, "inductance_h", "uncertainty_h")


@dataclass(frozen=True, slots=True)
class InverseInductance:
    """One entry of the inverse inductance matrix Γ = L⁻¹, 1/H; the same label twice names a diagonal entry."""

    windings: tuple[str, str]
    inverse_inductance_per_h: float
    uncertainty_per_h: float

    def __post_init__(self) -> None:
        first, *rest = tuple(self.windings) if not isinstance(self.windings, str) else (self.windings,)
        if len(rest) != 1:
            raise InvalidRequest.at("windings", f"{self.windings!r} found; two labels are expected")
        object.__setattr__(self, "windings", labels_of((first,), "windings") + labels_of(tuple(rest), "windings"))
        _numbers(self, "inverse_inductance_per_h", "uncertainty_per_h")


Reading = (
    OpenInductance | ShortedInductance | SeriesInductance | VoltageRatio
    | MutualInductance | PairLeakage | EffectiveLeakage | InverseInductance
)  # fmt: skip
READINGS: tuple[type[Any], ...] = (
    OpenInductance, ShortedInductance, SeriesInductance, VoltageRatio,
    MutualInductance, PairLeakage, EffectiveLeakage, InverseInductance,
)  # fmt: skip


def _numbers(value: Any, *names: str) -> None:
    for name in names:
        object.__setattr__(value, name, plain_float(getattr(value, name), name))


def _labels(value: Any, name: str, least: int, most: int | None = None) -> None:
    labels = labels_of(getattr(value, name), name)
    if len(labels) < least or (most is not None and len(labels) > most):
        expected = f"{least}" if most == least else f"at least {least}"
        raise InvalidRequest.at(name, f"{len(labels)} labels found; {expected} are expected")
    object.__setattr__(value, name, labels)


def _truths(value: Any, size: int) -> tuple[bool, ...]:
    if not isinstance(value, Sequence) or len(value) != size or not all(isinstance(truth, bool) for truth in value):
        raise InvalidRequest.at(
            "aiding", f"{value!r} found; True, False or one truth value for each winding is expected"
        )
    return tuple(value)
