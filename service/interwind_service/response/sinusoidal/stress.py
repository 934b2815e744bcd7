"""The largest stress over the bands of a frequency response, for its cautions."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.response.request.cautions import Stress
from interwind_service.response.sinusoidal.phasors import Phasors

FloatArray = NDArray[np.float64]


class StressGauge:
    """Collects node voltages, capacitor voltages and magnetic energies, band by band."""

    def __init__(self, topology: Topology) -> None:
        self._topology = topology
        self._nodes = np.zeros(len(topology.nodes))
        self._capacitors = topology.of_kind(Kind.CAPACITOR)
        self._across = np.zeros(len(self._capacitors))
        self._coils: dict[str, float] = {}
        self._direct = True

    def take_voltages(self, phasors: Phasors) -> None:
        """Take the voltages of a band into account."""
        topology = self._topology
        self._direct &= not phasors.omega.any()
        volts = np.ascontiguousarray(phasors.node_voltages().T)
        self._nodes = np.fmax(self._nodes, np.fmax.reduce(np.abs(volts), axis=1))
        across = volts[topology.start[self._capacitors]]
        across -= volts[topology.finish[self._capacitors]]
        self._across = np.fmax(self._across, np.fmax.reduce(np.abs(across), axis=1))

    def take_fields(self, phasors: Phasors) -> None:
        """Take the magnetic energies of a band into account."""
        topology = self._topology
        for k in topology.of_kind(Kind.INDUCTOR).tolist():
            self._keep(topology.names[k], 0.5 * topology.value[k] * np.abs(phasors.current(k)) ** 2)
        for k, group in enumerate(topology.groups):
            self._keep(group.name, 0.5 * phasors.field(k))

    def stress(self) -> Stress:
        """Return the largest magnitudes found."""
        names = [self._topology.names[k] for k in self._capacitors]
        return Stress(
            node_voltage_v=dict(zip(self._topology.nodes, self._nodes.tolist(), strict=True)),
            capacitor_voltage_v=dict(zip(names, self._across.tolist(), strict=True)),
            magnetic_energy_j=self._coils,
            direct=self._direct,
        )

    def _keep(self, name: str, energy: FloatArray) -> None:
        self._coils[name] = float(np.fmax(self._coils.get(name, 0.0), np.fmax.reduce(energy, initial=0.0)))
