"""The largest stress over a linear run, for its cautions."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.model import observables as ob
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.response.drive.generator import Generator
from interwind_service.response.linear.flow import Flow
from interwind_service.response.request.cautions import Stress

FloatArray = NDArray[np.float64]


def stress_of(
    topology: Topology,
    flow: Flow,
    generator: Generator,
    states: FloatArray,
    observables: Sequence[ob.Observable],
    peaks: FloatArray,
) -> Stress:
    """Return the largest magnitudes at ``states``, y at samples spread over the run, and among what was observed.

    Parameters
    ----------
    states : shape (some, n + g).
    peaks : largest magnitude of each observable over all its samples, shape (observables,).
    """
    branches = len(topology.kind)
    values = states @ flow.signals.T
    voltage, current = values[:, :branches], values[:, branches : 2 * branches]
    node = values[:, 2 * branches :]
    node = node - node[:, topology.parts.reference[topology.parts.of_node]]
    nodes = dict(zip(topology.nodes, _largest(node).tolist(), strict=True))
    across = dict(zip(topology.names, _largest(voltage).tolist(), strict=True))
    for item, peak in zip(observables, np.abs(peaks).tolist(), strict=True):
        if isinstance(item, ob.NodeVoltage) and item.to is None:
            nodes[item.node] = max(nodes[item.node], peak)
        elif isinstance(item, ob.ElementVoltage):
            across[item.name] = max(across[item.name], peak)
    fields = {
        topology.names[k]: 0.5 * float(topology.value[k]) * float(_largest(current[:, k]) ** 2)
        for k in topology.of_kind(Kind.INDUCTOR).tolist()
    }
    for group in topology.groups:
        i = current[:, group.branches]
        fields[group.name] = 0.5 * float(np.einsum("ti,ij,tj->t", i, group.inductance_h, i).max(initial=0.0))
    capacitors = [topology.names[k] for k in topology.of_kind(Kind.CAPACITOR)]
    return Stress(
        node_voltage_v=nodes,
        capacitor_voltage_v={name: across[name] for name in capacitors},
        magnetic_energy_j=fields,
        direct=not np.any(generator.S) and not len(generator.events),
    )


def _largest(values: FloatArray) -> FloatArray:
    largest: FloatArray = np.abs(values).max(axis=0, initial=0.0)
    return largest
