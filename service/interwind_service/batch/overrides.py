"""Columns of overrides: numbers in rows, and the network that one row makes of the base.

A row is what all columns say of one variant, side by side, so that consecutive variants are consecutive bytes. Whole
matrices and entries are set first, couplings after them, with the self-inductances of that variant.
"""

from __future__ import annotations

import dataclasses
import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest, field_path
from interwind.model.elements import Element, Windings
from interwind.model.network import Network
from interwind.model.readings import InverseInductance, VoltageRatio
from interwind.model.vary import (
    Column,
    SampleWindings,
    Vary,
    VaryCoupling,
    VaryInductance,
    VaryMatrix,
    VaryReadings,
    variant_count,
)
from interwind.model.windings import WindingSet
from interwind_service import engine

FloatArray = NDArray[np.float64]

_READ: dict[type, str] = {VoltageRatio: "ratio", InverseInductance: "inverse_inductance_per_h"}  # what was read


@dataclass(frozen=True, slots=True, eq=False)
class Overrides:
    """Columns without their numbers (``heads``) over a base network; ``spans`` says where each stands in a row."""

    network: Network
    heads: tuple[Column, ...]

    @property
    def spans(self) -> tuple[slice, ...]:
        """The place of each column in a row."""
        ends = np.cumsum([0, *(_width(self.network, head) for head in self.heads)]).tolist()
        return tuple(slice(start, end) for start, end in itertools.pairwise(ends))

    @property
    def width(self) -> int:
        """Numbers in a row."""
        return self.spans[-1].stop

    def columns(self, numbers: FloatArray) -> tuple[Column, ...]:
        """Return the columns with the ``numbers`` (variants, width) of some variants in them."""
        filled: list[Column] = []
        for head, span in zip(self.heads, self.spans, strict=True):
            own = numbers[:, span]
            if isinstance(head, VaryMatrix):
                size = head.inductance_h.shape[1]
                filled.append(VaryMatrix(head.windings_name, own.reshape(-1, size, size)))
            elif isinstance(head, VaryReadings):
                filled.append(dataclasses.replace(head, values=own))
            elif isinstance(head, VaryInductance):
                filled.append(VaryInductance(head.windings_name, head.pair, own[:, 0]))
            else:
                filled.append(dataclasses.replace(head, values=own[:, 0]))
        return tuple(filled)

    def variant(self, row: FloatArray) -> Network:
        """Return the network of one row, a new value; `InvalidRequest` names a column whose number cannot be used."""
        elements: dict[str, Element] = {}
        order = sorted(range(len(self.heads)), key=lambda k: isinstance(self.heads[k], VaryCoupling))
        spans = self.spans
        for position in order:
            head, numbers = self.heads[position], row[spans[position]]
            name = head.element if isinstance(head, Vary) else head.windings_name
            element = elements.get(name) or self.network.element(name)
            with field_path(f"columns[{position}]"):
                elements[name] = _with(element, head, numbers)
        return dataclasses.replace(
            self.network, elements=tuple(elements.get(element.name, element) for element in self.network.elements)
        )


def lay_out(network: Network, columns: Sequence[Column]) -> tuple[Overrides, FloatArray]:
    """Return the heads of the columns and their numbers, shape (variants, width), the random sets drawn.

    Raises
    ------
    InvalidRequest : a column names what the network does not have, or the columns differ in length; by its path.
    """
    count = variant_count(columns)
    heads: list[Column] = []
    blocks: list[FloatArray] = []
    for position, column in enumerate(columns):
        with field_path(f"columns[{position}]"):
            _check(network, column, heads)
            if isinstance(column, SampleWindings):
                drawn = engine.sample_windings(_windings(network, column.windings_name).windings, column)
                column = VaryMatrix(column.windings_name, drawn)
            heads.append(_head(column))
            blocks.append(_numbers(column).reshape(count, -1))
    return Overrides(network, tuple(heads)), np.ascontiguousarray(np.concatenate(blocks, axis=1))


def _numbers(column: Column) -> FloatArray:
    if isinstance(column, VaryMatrix):
        return column.inductance_h
    return column.values_h if isinstance(column, VaryInductance) else column.values  # type: ignore[union-attr]


def _head(column: Column) -> Column:
    """Return the column without its numbers."""
    if isinstance(column, VaryMatrix):
        return VaryMatrix(column.windings_name, column.inductance_h[:0])
    if isinstance(column, VaryInductance):
        return VaryInductance(column.windings_name, column.pair, np.empty(0))
    return dataclasses.replace(column, values=column.values[:0])


def _width(network: Network, head: Column) -> int:
    if isinstance(head, VaryReadings):
        return len(head.readings)
    return int(np.prod(head.inductance_h.shape[1:])) if isinstance(head, VaryMatrix) else 1


def _check(network: Network, column: Column, earlier: Sequence[Column]) -> None:
    if isinstance(column, Vary):
        with field_path("element"):
            element = _named(network, column.element)
        _target(element, column.field)
        if any(isinstance(o, Vary) and (o.element, o.field) == (column.element, column.field) for o in earlier):
            raise InvalidRequest.at("field", f"{column.element}.{column.field} varies in an earlier column already")
        return
    windings = _windings(network, column.windings_name)
    whole = VaryMatrix | VaryReadings | SampleWindings
    for other in earlier:
        if not isinstance(other, Vary) and other.windings_name == column.windings_name:
            if isinstance(column, whole) or isinstance(other, whole):
                raise InvalidRequest.at(
                    "windings_name", f"{column.windings_name!r} varies as a whole; no other column may vary its entries"
                )
            if type(other) is type(column) and set(other.pair) == set(column.pair):  # type: ignore[union-attr]
                raise InvalidRequest.at("pair", f"{column.pair} varies in an earlier column already")  # type: ignore[union-attr]
    if isinstance(column, VaryMatrix) and column.inductance_h.shape[1] != windings.windings.size:
        raise InvalidRequest.at(
            "inductance_h",
            f"shape {column.inductance_h.shape} found; {windings.name!r} has {windings.windings.size} windings",
        )
    if isinstance(column, VaryCoupling | VaryInductance):
        for label in column.pair:
            with field_path("pair"):
                windings.windings.index(label)
        if isinstance(column, VaryCoupling) and column.pair[0] == column.pair[1]:
            raise InvalidRequest.at("pair", f"{column.pair} found; a coupling belongs to two different windings")


def _named(network: Network, name: str) -> Element:
    return network.element(name)


def _windings(network: Network, name: str) -> Windings:
    with field_path("windings_name"):
        element = _named(network, name)
        if not isinstance(element, Windings):
            raise InvalidRequest.at("", f"{name!r} is a {type(element).__name__}; a Windings element is expected")
    return element


def _target(element: Any, field: str) -> Any:
    """Return the value a field such as ``resistance_ohm`` or ``waveform.amplitude`` names; only numbers may vary."""
    names = {item.name for item in dataclasses.fields(element)} if dataclasses.is_dataclass(element) else set()
    first, _, rest = field.partition(".")
    value = getattr(element, first) if first in names else ...
    if rest and value is not ...:
        return _target(value, rest)
    if isinstance(value, float | int | complex) and not isinstance(value, bool):
        return value
    if first == "phasor" and value is None:
        return value
    known = ", ".join(sorted(_numeric(element)))
    raise InvalidRequest.at(
        "field", f"{field!r} found; the numbers of a {type(element).__name__} are {known or 'none'}"
    )


def _numeric(value: Any, prefix: str = "") -> list[str]:
    names = []
    for item in dataclasses.fields(value):
        inner = getattr(value, item.name)
        if isinstance(inner, float | int | complex) and not isinstance(inner, bool):
            names.append(prefix + item.name)
        elif dataclasses.is_dataclass(inner) and item.name in ("waveform", "closed"):
            names += _numeric(inner, f"{item.name}.")
    return names


def _with(element: Any, head: Column, numbers: FloatArray) -> Any:
    if isinstance(head, Vary):
        return _replace(element, head.field, float(numbers[0]))
    coils: WindingSet = element.windings
    if isinstance(head, VaryMatrix):
        coils = _stated(coils, inductance_h=numbers.reshape(coils.size, coils.size))
    elif isinstance(head, VaryReadings):
        coils = _stated(coils, inductance_h=_identified(coils, head, numbers))
    else:
        i, j = (coils.index(label) for label in head.pair)
        coils = (
            _coupled(coils, i, j, float(numbers[0]))
            if isinstance(head, VaryCoupling)
            else _entry(coils, i, j, numbers[0])
        )
    return dataclasses.replace(element, windings=coils)


def _identified(coils: WindingSet, head: VaryReadings, numbers: FloatArray) -> FloatArray:
    """Return the inductance matrix that fits the readings of one variant best."""
    readings = [
        dataclasses.replace(reading, **{_READ.get(type(reading), "inductance_h"): float(number)})
        for reading, number in zip(head.readings, numbers, strict=True)
    ]
    return engine.identify(coils.labels, readings).windings.inductance_h


def _replace(value: Any, field: str, number: float) -> Any:
    first, _, rest = field.partition(".")
    return dataclasses.replace(value, **{first: _replace(getattr(value, first), rest, number) if rest else number})


def _entry(coils: WindingSet, i: int, j: int, value: float) -> WindingSet:
    inductance_h = coils.inductance_h.copy()
    inductance_h[i, j] = inductance_h[j, i] = value
    return _stated(coils, inductance_h=inductance_h)


def _coupled(coils: WindingSet, i: int, j: int, value: float) -> WindingSet:
    if not coils.stated_as_coupling:
        self_h = coils.self_inductance_h
        product = float(self_h[i] * self_h[j])
        return _entry(coils, i, j, value * math.sqrt(product) if product > 0.0 else math.nan)
    coupling = coils.coupling.copy()
    coupling[i, j] = coupling[j, i] = value
    return WindingSet.from_coupling(
        coils.labels, coils.self_inductance_h, coupling, coils.resistance_ohm, **_rest(coils)
    )


def _stated(coils: WindingSet, *, inductance_h: FloatArray) -> WindingSet:
    return WindingSet(coils.labels, inductance_h, coils.resistance_ohm, **_rest(coils))


def _rest(coils: WindingSet) -> dict[str, Any]:
    return {
        "coupling_decimals": coils.coupling_decimals,
        "coupling_uncertainty": coils.coupling_uncertainty,
        "inductance_uncertainty_h": coils.inductance_uncertainty_h,
    }
