"""How windings are joined to each other before they are characterized.

A tapped winding is two series connections that share a section: the whole, and the part up to the tap.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from interwind.errors import InvalidRequest
from interwind.model.frozen import labels_of


@dataclass(frozen=True, slots=True)
class InSeries:
    """A winding made of ``windings`` one after the other; ``aiding`` False for each one turned round (None: none)."""

    label: str
    windings: tuple[str, ...]
    aiding: tuple[bool, ...] | None = None

    def __post_init__(self) -> None:
        labels_of((self.label,), "label")
        object.__setattr__(self, "windings", labels_of(self.windings, "windings"))
        _senses(self, len(self.windings))


@dataclass(frozen=True, slots=True)
class InParallel:
    """A winding made of ``windings`` side by side; ``aiding`` False for each one turned round (None: none)."""

    label: str
    windings: tuple[str, ...]
    aiding: tuple[bool, ...] | None = None

    def __post_init__(self) -> None:
        labels_of((self.label,), "label")
        object.__setattr__(self, "windings", labels_of(self.windings, "windings"))
        _senses(self, len(self.windings))


@dataclass(frozen=True, slots=True)
class Shorted:
    """Start and finish of a winding joined: it leaves the set, and its flux stands still."""

    winding: str


@dataclass(frozen=True, slots=True)
class Open:
    """A winding left open: it leaves the set, and carries no current."""

    winding: str


Connection = InSeries | InParallel | Shorted | Open
CONNECTIONS: tuple[type[Any], ...] = (InSeries, InParallel, Shorted, Open)


def _senses(value: Any, size: int) -> None:
    aiding = value.aiding
    if aiding is None:
        return
    if not isinstance(aiding, Sequence) or len(aiding) != size or not all(isinstance(truth, bool) for truth in aiding):
        raise InvalidRequest.at("aiding", f"{aiding!r} found; one truth value for each of {size} windings is expected")
    object.__setattr__(value, "aiding", tuple(aiding))
