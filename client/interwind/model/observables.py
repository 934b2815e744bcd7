"""What may be asked of a response. Observables are values: equal ones are the same key of a response."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True, slots=True)
class NodeVoltage:
    """Voltage of ``node`` against ``to`` (None: against its reference), V."""

    node: str
    to: str | None = None


@dataclass(frozen=True, slots=True)
class ElementVoltage:
    """Voltage from the element's first node to its second, V."""

    name: str


@dataclass(frozen=True, slots=True)
class ElementCurrent:
    """Current from the element's first node through it to its second, A."""

    name: str


@dataclass(frozen=True, slots=True)
class WindingVoltage:
    """Voltage of a winding, start minus finish, its resistance included, V."""

    name: str
    label: str


@dataclass(frozen=True, slots=True)
class WindingCurrent:
    """Current into the start of a winding, A."""

    name: str
    label: str


@dataclass(frozen=True, slots=True)
class FluxLinkage:
    """Flux linkage of a winding, Σ L_ij i_j, Wb."""

    name: str
    label: str


@dataclass(frozen=True, slots=True)
class ElementPower:
    """Power the element absorbs, W; in a frequency response ½ V conj(I), complex."""

    name: str


@dataclass(frozen=True, slots=True)
class StoredEnergy:
    """Energy the element stores, J; in a frequency response the mean."""

    name: str


Observable = (
    NodeVoltage | ElementVoltage | ElementCurrent | WindingVoltage | WindingCurrent | FluxLinkage | ElementPower
    | StoredEnergy
)  # fmt: skip
OBSERVABLES: tuple[type[Any], ...] = (
    NodeVoltage, ElementVoltage, ElementCurrent, WindingVoltage, WindingCurrent, FluxLinkage, ElementPower,
    StoredEnergy,
)  # fmt: skip
