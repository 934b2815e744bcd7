"""What stores energy in a network: capacitors by voltage, inductors by current, winding groups by their coordinates."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.network.winding_coordinates import WindingCoordinates

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class Storage:
    """The storage values e = (v of capacitors, i of inductors, y of the groups) and their energy ½ eᵀ E e.

    ``capacitors``, ``inductors`` : branches; ``groups`` : where the y of each group stand in e, those of perfect
    coupling (no energy) left out; ``size`` of e.
    """

    topology: Topology
    coordinates: tuple[WindingCoordinates, ...]
    capacitors: IntArray
    inductors: IntArray
    groups: tuple[slice, ...]
    size: int

    @property
    def capacitor_rows(self) -> slice:
        """Where the capacitor voltages stand in e."""
        return slice(0, len(self.capacitors))

    @property
    def inductor_rows(self) -> slice:
        """Where the inductor currents stand in e."""
        return slice(len(self.capacitors), len(self.capacitors) + len(self.inductors))

    def weigh(self, values: FloatArray) -> FloatArray:
        """Return E e, shape of ``values`` (size, k): charges, fluxes and the fluxes of y."""
        weighed = np.empty_like(values)
        value = self.topology.value
        weighed[self.capacitor_rows] = value[self.capacitors][:, None] * values[self.capacitor_rows]
        weighed[self.inductor_rows] = value[self.inductors][:, None] * values[self.inductor_rows]
        for rows, own in zip(self.groups, self.coordinates, strict=True):
            weighed[rows] = own.S[: own.rank, : own.rank] @ values[rows]
        return weighed


def storage_of(topology: Topology, coordinates: tuple[WindingCoordinates, ...]) -> Storage:
    """List what stores energy; a capacitor of 0 F and an inductor of 0 H store none."""
    positive = topology.value > 0.0
    capacitors = np.flatnonzero((topology.kind == Kind.CAPACITOR) & positive)
    inductors = np.flatnonzero((topology.kind == Kind.INDUCTOR) & positive)
    groups = []
    size = len(capacitors) + len(inductors)
    for own in coordinates:
        groups.append(slice(size, size + own.rank))
        size += own.rank
    return Storage(topology, coordinates, capacitors, inductors, tuple(groups), size)
