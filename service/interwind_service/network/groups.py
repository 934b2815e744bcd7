"""Winding groups: the coupled windings of one element, ready for a solver."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidWindings, field_path
from interwind.model.elements import Windings
from interwind.model.windings import WindingSet
from interwind_service import tolerances as tol

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class WindingGroup:
    """The windings of one element.

    ``branches`` (n,) branch numbers; ``inductance_h`` L (n, n) symmetric; ``coupling`` K (n, n), unit diagonal, as
    stated where couplings were stated; ``root`` d = sqrt(diag L) (n,), so that L = diag(d) K diag(d);
    ``resistance_ohm`` R (n, n).
    """

    name: str
    position: int
    branches: NDArray[np.int64]
    labels: tuple[str, ...]
    inductance_h: FloatArray
    coupling: FloatArray
    root: FloatArray
    resistance_ohm: FloatArray
    stated_as_coupling: bool

    @property
    def size(self) -> int:
        """Number of windings n."""
        return len(self.branches)


def group_of(element: Windings, branches: NDArray[np.int64], position: int) -> WindingGroup:
    """Make the group of an element; a set that cannot exist, or is not fully known, is refused as InvalidWindings."""
    coils = element.windings
    with field_path(f"elements[{position}].windings"):
        _refuse_unknown(coils)
        inductance = 0.5 * (coils.inductance_h + coils.inductance_h.T)
        coupling = 0.5 * (coils.coupling + coils.coupling.T)
        resistance = coils.resistance_matrix_ohm
        return WindingGroup(
            name=element.name,
            position=position,
            branches=branches,
            labels=coils.labels,
            inductance_h=inductance,
            coupling=coupling,
            root=np.sqrt(inductance.diagonal()),
            resistance_ohm=0.5 * (resistance + resistance.T),
            stated_as_coupling=coils.stated_as_coupling,
        )


def _refuse_unknown(coils: WindingSet) -> None:
    unknown = np.argwhere(np.isnan(coils.inductance_h))
    if unknown.size:
        i, j = unknown[0]
        raise InvalidWindings.at(
            f"inductance_h[{i}][{j}]",
            f"the pair {coils.labels[i]!r}, {coils.labels[j]!r} is not known; fill it by repair or by a measurement "
            "before solving; an unknown coupling is never taken as zero",
        )
    self_h = coils.inductance_h.diagonal()
    for i in np.flatnonzero(~((self_h >= tol.LEAST_MAGNITUDE) & (self_h <= tol.LARGEST_MAGNITUDE))):
        raise InvalidWindings.at(
            f"inductance_h[{i}][{i}]",
            f"{float(self_h[i])!r} H found; a number above 0, {tol.LEAST_MAGNITUDE:g} to {tol.LARGEST_MAGNITUDE:g}, "
            "is expected; check its unit",
        )
    for place in np.argwhere(~(np.abs(coils.resistance_ohm) <= tol.LARGEST_MAGNITUDE)):
        raise InvalidWindings.at(
            "resistance_ohm" + "".join(f"[{k}]" for k in place),
            f"{float(coils.resistance_ohm[tuple(place)])!r} ohm found; at most {tol.LARGEST_MAGNITUDE:g} is expected",
        )
