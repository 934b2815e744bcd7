"""What varies from one variant of a batch to the next: columns of equal length V over one base network."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum
from typing import Any

from interwind.errors import InvalidRequest
from interwind.model.frozen import FloatArray, frozen_floats, frozen_vector, plain_float
from interwind.model.readings import READINGS, Reading


class SampleParameter(Enum):
    """What `SampleWindings` draws: every draw of either is a set that can exist."""

    LEAKAGE = "LEAKAGE"
    FACTOR = "FACTOR"


class _Column:
    """Texts that name what varies."""

    __slots__ = ()
    _texts: tuple[str, ...] = ("windings_name",)

    def __post_init__(self) -> None:
        for name in self._texts:
            text = getattr(self, name)
            if not isinstance(text, str) or not text:
                raise InvalidRequest.at(name, f"{text!r} found; a non-empty text is expected")


@dataclass(frozen=True, slots=True, eq=False)
class Vary(_Column):
    """One number of one element: ``field`` such as ``resistance_ohm``, ``values`` (V,) in the unit of the field."""

    element: str
    field: str
    values: FloatArray
    _texts = ("element", "field")

    def __post_init__(self) -> None:
        _Column.__post_init__(self)
        object.__setattr__(self, "values", frozen_vector(self.values, "values"))


@dataclass(frozen=True, slots=True, eq=False)
class VaryCoupling(_Column):
    """The coupling of one pair of windings, self-inductances kept: ``values`` shape (V,), signed."""

    windings_name: str
    pair: tuple[str, str]
    values: FloatArray

    def __post_init__(self) -> None:
        _Column.__post_init__(self)
        object.__setattr__(self, "pair", _pair(self.pair))
        object.__setattr__(self, "values", frozen_vector(self.values, "values"))


@dataclass(frozen=True, slots=True, eq=False)
class VaryInductance(_Column):
    """One entry of an inductance matrix (both halves), the other entries kept: ``values_h`` shape (V,), H."""

    windings_name: str
    pair: tuple[str, str]
    values_h: FloatArray

    def __post_init__(self) -> None:
        _Column.__post_init__(self)
        object.__setattr__(self, "pair", _pair(self.pair))
        object.__setattr__(self, "values_h", frozen_vector(self.values_h, "values_h"))


@dataclass(frozen=True, slots=True, eq=False)
class VaryMatrix(_Column):
    """The whole inductance matrix: ``inductance_h`` shape (V, n, n), H."""

    windings_name: str
    inductance_h: FloatArray

    def __post_init__(self) -> None:
        _Column.__post_init__(self)
        stack = frozen_floats(self.inductance_h, "inductance_h")
        if stack.ndim != 3 or stack.shape[1] != stack.shape[2]:
            raise InvalidRequest.at(
                "inductance_h", f"shape {stack.shape} found; (variants, windings, windings) is expected"
            )
        object.__setattr__(self, "inductance_h", stack)


@dataclass(frozen=True, slots=True, eq=False)
class VaryReadings(_Column):
    """Readings of the windings: each variant is the set that fits its row of ``values`` (V, readings) best.

    ``readings`` say what was read and how well it is known; their own values are replaced by those of the variant.
    """

    windings_name: str
    readings: tuple[Reading, ...]
    values: FloatArray

    def __post_init__(self) -> None:
        _Column.__post_init__(self)
        object.__setattr__(self, "readings", tuple(self.readings))
        for position, reading in enumerate(self.readings):
            if not isinstance(reading, READINGS):
                raise InvalidRequest.at(
                    f"readings[{position}]",
                    f"{type(reading).__name__} found; a reading is expected",
                )
        values = frozen_floats(self.values, "values")
        if values.ndim != 2 or values.shape[1] != len(self.readings):
            raise InvalidRequest.at(
                "values",
                f"shape {values.shape} found; (variants, {len(self.readings)}) is expected",
            )
        object.__setattr__(self, "values", values)


@dataclass(frozen=True, slots=True)
class SampleWindings(_Column):
    """``count`` random sets around the nominal one, drawn by the service so that every one of them can exist.

    Independent errors on every coupling leave the valid set almost always when the coupling is tight; these do not.
    ``LEAKAGE``: with ρ the partial couplings (each pair, the windings between them shorted), ρ²/(1 − ρ²) is scaled by
    e^(spread·ξ), ξ standard normal: for a tight pair ``spread`` is the relative standard deviation of its leakage.
    ``FACTOR``: each entry of the Cholesky factor of the coupling matrix is scaled by 1 + spread·ξ, its rows then
    brought back to length 1. ``self_spread``: relative standard deviation of the self-inductances (log-normal).
    The same ``seed`` draws the same sets.
    """

    windings_name: str
    count: int
    spread: float
    self_spread: float = 0.0
    parameter: SampleParameter = SampleParameter.LEAKAGE
    seed: int = 0

    def __post_init__(self) -> None:
        _Column.__post_init__(self)
        for name in ("spread", "self_spread"):
            value = plain_float(getattr(self, name), name)
            if not 0.0 <= value < 1.0:
                raise InvalidRequest.at(name, f"{value!r} found; a relative spread from 0 to below 1 is expected")
            object.__setattr__(self, name, value)
        for name, least in (("count", 1), ("seed", 0)):
            if not isinstance(getattr(self, name), int) or getattr(self, name) < least:
                raise InvalidRequest.at(
                    name, f"{getattr(self, name)!r} found; a whole number from {least} on is expected"
                )


Column = Vary | VaryCoupling | VaryInductance | VaryMatrix | VaryReadings | SampleWindings
COLUMNS: tuple[type[Any], ...] = (
    Vary,
    VaryCoupling,
    VaryInductance,
    VaryMatrix,
    VaryReadings,
    SampleWindings,
)


def column_length(column: Column) -> int:
    """Return the number of variants V a column speaks of."""
    if isinstance(column, SampleWindings):
        return column.count
    if isinstance(column, VaryMatrix):
        return int(column.inductance_h.shape[0])
    return len(column.values_h if isinstance(column, VaryInductance) else column.values)


def variant_count(columns: Sequence[Column]) -> int:
    """Return the length V all ``columns`` share; unequal lengths are refused by name."""
    if not columns:
        raise InvalidRequest.at("vary", "no column found; at least one is expected")
    lengths = []
    for position, column in enumerate(columns):
        if not isinstance(column, COLUMNS):
            raise InvalidRequest.at(
                f"vary[{position}]", f"{type(column).__name__} found; a column of overrides is expected"
            )
        lengths.append(column_length(column))
        if lengths[position] != lengths[0]:
            raise InvalidRequest.at(
                f"vary[{position}]",
                f"{lengths[position]} values found; vary[0] has {lengths[0]}, all need the same number",
            )
    return lengths[0]


def _pair(value: Any) -> tuple[str, str]:
    pair = tuple(value)
    if len(pair) != 2 or not all(isinstance(label, str) and label for label in pair):
        raise InvalidRequest.at("pair", f"{value!r} found; two labels are expected")
    return pair
