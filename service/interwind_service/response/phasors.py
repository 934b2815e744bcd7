"""Voltages and currents of the branches in the sinusoidal state, and what they put under stress."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.response.cautions import Stress
from interwind_service.response.frequency_tree import FrequencyTree
from interwind_service.response.spectrum import Band
from interwind_service.response.undetermined import Undetermined

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


class Phasors:
    """The sinusoidal state of one band as functions of branch and node numbers, each (f,); ``omega`` (f,), rad/s.

    Where nothing determines a voltage or a current it is NaN.
    """

    def __init__(self, band: Band, u: ComplexArray, open_ends: Undetermined) -> None:
        self.tree: FrequencyTree = band.tree
        self.topology: Topology = band.tree.topology
        self.omega: FloatArray = band.s.imag
        self._s, self._u, self._z = band.s, u, band.Z @ u
        self._floating = set(open_ends.nodes.tolist())
        self._open = set(open_ends.currents.tolist())

    def between(self, one: int, other: int) -> ComplexArray:
        """Return the voltage of node ``one`` against node ``other``."""
        tree = self.tree
        if tree.component[one] != tree.component[other] or (one == other and one in self._floating):
            return np.full(len(self.omega), np.nan, dtype=np.complex128)
        return self._z[:, : len(tree.tree)] @ (tree.paths[one] - tree.paths[other])

    def voltage(self, branch: int) -> ComplexArray:
        """Return the voltage of a branch from its start to its finish."""
        return self.between(int(self.topology.start[branch]), int(self.topology.finish[branch]))

    def current(self, branch: int) -> ComplexArray:
        """Return the current of a branch from its start to its finish."""
        if branch in self._open:
            return np.full(len(self.omega), np.nan, dtype=np.complex128)
        return self.tree.branch_current(branch, self._z, self._s, self._u)

    def field(self, group: int) -> FloatArray:
        """Return iᴴ L i of a winding group, in the coordinates that keep its leakage."""
        y = self._z[:, self.tree.groups[group]]
        return np.einsum("fi,fi->f", y.conj(), y @ self.tree.coordinates[group].S).real

    def flux_linkages(self, group: int) -> ComplexArray:
        """Return L i of a winding group, shape (f, n): the solution of Nᵀ λ = S y."""
        own = self.tree.coordinates[group]
        return np.linalg.solve(own.N.T, own.S @ self._z[:, self.tree.groups[group]].T).T

    def node_peaks(self) -> FloatArray:
        """Return the largest magnitude of each node voltage against its zero, shape (nodes,); NaN without a zero."""
        paths = self.tree.paths - self.tree.paths[self.topology.parts.reference[self.topology.parts.of_node]]
        peaks = np.abs(self._z[:, : len(self.tree.tree)] @ paths.T).max(axis=0)
        peaks[list(self._floating)] = np.nan
        return peaks


class StressGauge:
    """Collects the largest stress over the bands of a response."""

    def __init__(self, topology: Topology) -> None:
        self._topology = topology
        self._nodes = np.zeros(len(topology.nodes))
        self._capacitors = {int(k): 0.0 for k in topology.of_kind(Kind.CAPACITOR)}
        self._coils: dict[str, float] = {}
        self._direct = True

    def take(self, phasors: Phasors) -> None:
        """Take one band into account."""
        self._direct &= not phasors.omega.any()
        self._nodes = np.fmax(self._nodes, phasors.node_peaks())
        for k, peak in self._capacitors.items():
            self._capacitors[k] = float(np.fmax(peak, np.abs(phasors.voltage(k)).max()))
        for k in self._topology.of_kind(Kind.INDUCTOR).tolist():
            energy = 0.5 * self._topology.value[k] * np.abs(phasors.current(k)) ** 2
            self._keep(self._topology.names[k], energy)
        for k, group in enumerate(self._topology.groups):
            self._keep(group.name, 0.5 * phasors.field(k))

    def stress(self) -> Stress:
        """Return the largest magnitudes found."""
        names = self._topology.names
        return Stress(
            node_voltage_v=dict(zip(self._topology.nodes, self._nodes.tolist(), strict=True)),
            capacitor_voltage_v={names[k]: peak for k, peak in self._capacitors.items()},
            magnetic_energy_j=self._coils,
            direct=self._direct,
        )

    def _keep(self, name: str, energy: FloatArray) -> None:
        self._coils[name] = float(np.fmax(self._coils.get(name, 0.0), np.fmax.reduce(energy, initial=0.0)))
