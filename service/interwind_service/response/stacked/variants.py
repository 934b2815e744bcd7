"""What columns of overrides change in the equations of a network: a few numbers, one a variant.

Only what is linear in the equations is taken: resistances, inductances, capacitances, source phasors, and winding sets
that stay loosely coupled (`LOOSE_PIVOT`). ``fit`` says which variants stay inside that case.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.model import elements as el
from interwind.model.vary import (
    Column,
    Vary,
    variant_count,
)
from interwind_service.network.topology import Topology
from interwind_service.network.winding_coordinates import WindingCoordinates
from interwind_service.windings.variants import loose, vary_matrices

FloatArray = NDArray[np.float64]
Name = tuple[str | int, ...]

_INVERTED = {(el.Resistor, "resistance_ohm"): True, (el.Inductor, "inductance_h"): True,
             (el.Capacitor, "capacitance_f"): False}  # fmt: skip


@dataclass(frozen=True, slots=True, eq=False)
class Variants:
    """``fit`` (V,). By branch: conductance, capacitance or reciprocal inductance, shape (V, 1).

    ``groups``: by winding group the entries of S = Nᵀ L N, each (V, 1); ``inductance_h``: L, shape (V, n, n).
    ``drives``: for each drive its real phasor (V, 1), None where it does not vary.
    """

    fit: NDArray[np.bool_]
    values: dict[int, FloatArray]
    groups: dict[int, dict[tuple[int, int], FloatArray]]
    inductance_h: dict[int, FloatArray]
    drives: tuple[FloatArray | None, ...]

    @property
    def count(self) -> int:
        """Number of variants V."""
        return len(self.fit)

    def columns(self) -> dict[Name, FloatArray]:
        """Return everything that varies, by a name of its own, each (V, 1)."""
        named: dict[Name, FloatArray] = {("value", b): value for b, value in self.values.items()}
        for group, entries in self.groups.items():
            named |= {("group", group, *at): value for at, value in entries.items()}
        for group, L in self.inductance_h.items():
            n = L.shape[1]
            named |= {("inductance", group, i, j): L[:, i, j, None] for i in range(n) for j in range(n)}
        return named | {("drive", k): value for k, value in enumerate(self.drives) if value is not None}


def variants_of(
    topology: Topology, coordinates: Sequence[WindingCoordinates], columns: Sequence[Column], drive_count: int
) -> Variants | None:
    """Return what the columns change; None when one changes something else than the numbers of the equations."""
    count = variant_count(columns)
    fit = np.ones(count, dtype=bool)
    values: dict[int, FloatArray] = {}
    matrices: dict[int, FloatArray] = {}
    drives: list[FloatArray | None] = [None] * drive_count
    for column in columns:
        if isinstance(column, Vary):
            branch = int(topology.branches_of(column.element)[0])
            element = topology.network.elements[topology.element[branch]]
            number = column.values[:, None]
            if isinstance(element, el.VoltageSource | el.CurrentSource) and column.field == "phasor":
                drives[topology.inputs.index(column.element)] = number
                fit &= np.isfinite(column.values)
            elif (type(element), column.field) in _INVERTED and topology.value[branch] > 0.0:
                inverted = _INVERTED[type(element), column.field]
                fit &= np.isfinite(column.values) & (column.values > 0.0)
                with np.errstate(divide="ignore"):
                    values[branch] = 1.0 / number if inverted else number
            else:
                return None
    groups = {}
    for group, base in enumerate(topology.groups):
        own = [item for item in columns if not isinstance(item, Vary) and item.windings_name == base.name]
        if not own:
            continue
        element = topology.network.elements[base.position]
        L = vary_matrices(element.windings, own, count) if isinstance(element, el.Windings) else None
        if L is None:
            return None
        matrices[group] = L
        N = coordinates[group].N
        if np.any(N != np.diag(N.diagonal())):
            return None
        fit &= loose(L)
        scale = N.diagonal()
        groups[group] = {
            (i, j): np.ascontiguousarray(L[:, i, j, None] * (scale[i] * scale[j]))
            for i in range(len(scale))
            for j in range(len(scale))
        }
    if any(control.sensed in values for control in topology.controls):
        return None
    return Variants(fit, values, groups, matrices, tuple(drives))
