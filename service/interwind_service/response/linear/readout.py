"""What is read from the states at every sample: linear rows, and the products that powers and energies are."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.model import observables as ob
from interwind_service.network.groups import WindingGroup
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology

FloatArray = NDArray[np.float64]


class Signals:
    """Where the voltage and current of each branch and the voltage of each node stand among the signals."""

    def __init__(self, topology: Topology) -> None:
        self.topology = topology
        self.branches = len(topology.kind)

    def voltage(self, branch: int) -> int:
        """Return the row of a branch voltage."""
        return branch

    def current(self, branch: int) -> int:
        """Return the row of a branch current."""
        return self.branches + branch

    def node(self, node: int) -> int:
        """Return the row of a node voltage."""
        return 2 * self.branches + node


@dataclass(frozen=True, slots=True, eq=False)
class Readout:
    """``rows`` (p, signals): what is sampled; ``products``: (column, left, right) sums over sampled pairs, or None.

    Column k of the answer is sample ``linear[k]``, or where that is −1 the sum of weight · left · right over products.
    """

    rows: FloatArray
    linear: tuple[int, ...]
    products: tuple[tuple[tuple[float, int, int], ...], ...]

    @property
    def plain(self) -> bool:
        """Whether every column is one sample, in order."""
        return self.linear == tuple(range(len(self.rows)))

    def finish(self, samples: FloatArray) -> FloatArray:
        """Return the answer (T, observables) from samples (T, p)."""
        if self.plain:
            return samples
        answer = np.zeros((len(samples), len(self.linear)))
        for column, (source, terms) in enumerate(zip(self.linear, self.products, strict=True)):
            if source >= 0:
                answer[:, column] = samples[:, source]
            for weight, left, right in terms:
                answer[:, column] += weight * samples[:, left] * samples[:, right]
        return answer


def readout_of(topology: Topology, observables: Sequence[ob.Observable]) -> Readout:
    """Say what to sample for each observable; they are known to exist (`observe.resolve`)."""
    signals = Signals(topology)
    rows: dict[tuple[tuple[int, float], ...], int] = {}
    linear: list[int] = []
    products: list[tuple[tuple[float, int, int], ...]] = []

    def place(*terms: tuple[int, float]) -> int:
        return rows.setdefault(terms, len(rows))

    def pair(weight: float, left: int, right: int) -> tuple[float, int, int]:
        return weight, place((left, 1.0)), place((right, 1.0))

    for item in observables:
        own = _linear(topology, signals, item)
        linear.append(place(*own) if own else -1)
        if isinstance(item, ob.ElementPower):
            branches = topology.branches_of(item.name).tolist()
            products.append(tuple(pair(1.0, signals.voltage(k), signals.current(k)) for k in branches))
        elif isinstance(item, ob.StoredEnergy):
            products.append(tuple(pair(*term) for term in _energy(topology, signals, item.name)))
        else:
            products.append(())
    matrix = np.zeros((len(rows), 2 * signals.branches + len(topology.nodes)))
    for terms, row in rows.items():
        for signal, weight in terms:
            matrix[row, signal] += weight
    return Readout(matrix, tuple(linear), tuple(products))


def _linear(topology: Topology, signals: Signals, item: ob.Observable) -> tuple[tuple[int, float], ...]:
    if isinstance(item, ob.NodeVoltage):
        node = topology.node(item.node)
        zero = (
            int(topology.parts.reference[topology.parts.of_node[node]]) if item.to is None else topology.node(item.to)
        )
        return ((signals.node(node), 1.0), (signals.node(zero), -1.0))
    if isinstance(item, ob.FluxLinkage):
        group = _group(topology, item.name)
        flux = group.inductance_h[group.labels.index(item.label)]
        return tuple((signals.current(int(k)), float(m)) for k, m in zip(group.branches, flux, strict=True))
    if isinstance(item, ob.WindingVoltage):
        return ((signals.voltage(topology.winding(item.name, item.label)), 1.0),)
    if isinstance(item, ob.WindingCurrent):
        return ((signals.current(topology.winding(item.name, item.label)), 1.0),)
    if isinstance(item, ob.ElementVoltage):
        return ((signals.voltage(int(topology.branches_of(item.name)[0])), 1.0),)
    if isinstance(item, ob.ElementCurrent):
        return ((signals.current(int(topology.branches_of(item.name)[0])), 1.0),)
    return ()


def _energy(topology: Topology, signals: Signals, name: str) -> list[tuple[float, int, int]]:
    branch = int(topology.branches_of(name)[0])
    kind, value = topology.kind[branch], float(topology.value[branch])
    if kind == Kind.CAPACITOR:
        return [(0.5 * value, signals.voltage(branch), signals.voltage(branch))]
    if kind == Kind.INDUCTOR:
        return [(0.5 * value, signals.current(branch), signals.current(branch))]
    if kind == Kind.WINDING:
        group = _group(topology, name)
        currents = [signals.current(int(k)) for k in group.branches]
        return [
            (0.5 * float(group.inductance_h[i, j]), left, right)
            for i, left in enumerate(currents)
            for j, right in enumerate(currents)
        ]
    return []


def _group(topology: Topology, name: str) -> WindingGroup:
    return next(group for group in topology.groups if group.name == name)
