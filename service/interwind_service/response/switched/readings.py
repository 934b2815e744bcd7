"""What is asked of a trajectory, as rows over its signals: a quantity is a row plus a sum of products of rows."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.model import observables as ob
from interwind_service.network.forest import components
from interwind_service.network.kind import Kind
from interwind_service.response.switched.device import SaturableBranch
from interwind_service.response.switched.tableau import Mode, Tableau
from interwind_service.response.switched.trajectory import Rows

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Readings:
    """Observables of one piece: value_r = factor rows summed.

    ``rows`` all rows needed; ``linear`` (observables,) the row of a linear one, -1 for a product; ``products`` (q, 3):
    observable, row, row. ``undefined`` (observables,) where open switches and blocking diodes leave no path.
    """

    rows: Rows
    linear: NDArray[np.int64]
    products: NDArray[np.int64]
    undefined: NDArray[np.bool_]

    def values(self, sampled: FloatArray) -> FloatArray:
        """Turn sampled rows, shape (T, rows), into observables, shape (T, observables)."""
        found = np.zeros((len(sampled), len(self.linear)))
        plain = self.linear >= 0
        found[:, plain] = sampled[:, self.linear[plain]]
        for observable, one, other in self.products:
            found[:, observable] += sampled[:, one] * sampled[:, other]
        return found


def readings_of(tableau: Tableau, mode: Mode, observe: Sequence[ob.Observable]) -> Readings:
    """Return the rows of the observables while the devices stand in these modes."""
    reader = _Reader(tableau, mode)
    linear, products = [], []
    for position, item in enumerate(observe):
        if isinstance(item, ob.ElementPower | ob.StoredEnergy):
            linear.append(-1)
            pairs = reader.power(item.name) if isinstance(item, ob.ElementPower) else reader.energy(item.name)
            products += [(position, reader.put(*one), reader.put(*other)) for one, other in pairs]
        else:
            linear.append(reader.put(reader.row(item), 0.0))
    over = np.array(reader.over).reshape(len(reader.over), tableau.unknowns + tableau.states)
    floating = _floating(tableau, mode)
    return Readings(
        Rows(over, np.array(reader.offset)),
        np.array(linear, dtype=np.int64),
        np.array(products, dtype=np.int64).reshape(-1, 3),
        np.array([reader.is_undefined(item, floating) for item in observe], dtype=bool),
    )


class _Reader:
    """Collects rows; equal observables of one call share nothing, for a row costs little."""

    def __init__(self, tableau: Tableau, mode: Mode) -> None:
        self.tableau, self.mode, self.topology = tableau, mode, tableau.topology
        self.over: list[FloatArray] = []
        self.offset: list[float] = []

    def put(self, row: FloatArray, offset: float) -> int:
        self.over.append(row)
        self.offset.append(offset)
        return len(self.over) - 1

    def _wide(self, over_s: FloatArray) -> FloatArray:
        return np.concatenate([over_s, np.zeros(self.tableau.states)])

    def voltage(self, branch: int) -> FloatArray:
        return self._wide(self.tableau.branch_voltage_row(branch))

    def current(self, branch: int) -> FloatArray:
        row = np.zeros(self.tableau.unknowns)
        row[self.tableau.column_of_current[branch]] = 1.0
        return self._wide(row)

    def state(self, columns: slice | int, values: FloatArray | float) -> FloatArray:
        row = np.zeros(self.tableau.states)
        row[columns] = values
        return np.concatenate([np.zeros(self.tableau.unknowns), row])

    def row(self, item: ob.Observable) -> FloatArray:
        topology = self.topology
        if isinstance(item, ob.NodeVoltage):
            node = topology.node(item.node)
            zero = topology.parts.reference[topology.parts.of_node[node]] if item.to is None else topology.node(item.to)
            return self._wide(self.tableau.voltage_row(node, int(zero)))
        if isinstance(item, ob.FluxLinkage):
            return self.state(*self.tableau.factors[topology.winding(item.name, item.label)])
        if isinstance(item, ob.WindingVoltage | ob.WindingCurrent):
            branch = topology.winding(item.name, item.label)
            return self.voltage(branch) if isinstance(item, ob.WindingVoltage) else self.current(branch)
        branch = int(topology.branches_of(item.name)[0])
        return self.voltage(branch) if isinstance(item, ob.ElementVoltage) else self.current(branch)

    def power(self, name: str) -> list[tuple[tuple[FloatArray, float], tuple[FloatArray, float]]]:
        return [((self.voltage(int(k)), 0.0), (self.current(int(k)), 0.0)) for k in self.topology.branches_of(name)]

    def energy(self, name: str) -> list[tuple[tuple[FloatArray, float], tuple[FloatArray, float]]]:
        tableau = self.tableau
        pairs = []
        states: dict[int, None] = {}
        for branch in self.topology.branches_of(name).tolist():
            if branch in tableau.factors:
                columns = tableau.factors[branch][0]
                states.update(dict.fromkeys(range(columns.start, columns.stop)))
            elif branch in tableau.capacitor_state:
                states[tableau.capacitor_state[branch]] = None
        pairs += [((self.state(k, 0.5), 0.0), (self.state(k, 1.0), 0.0)) for k in states]
        for device, own in zip(tableau.devices, self.mode, strict=True):
            if device.name == name and isinstance(device, SaturableBranch):
                slope, constant, base = device.energy_line(own)
                flux = self.state(device.state, device.root)
                nothing = np.zeros_like(flux)
                pairs.append(((0.5 * slope * flux, constant), (flux, 0.0)))
                pairs.append(((nothing, base), (nothing, 1.0)))
        return pairs

    def is_undefined(self, item: ob.Observable, floating: NDArray[np.int64]) -> bool:
        topology = self.topology
        if isinstance(item, ob.NodeVoltage):
            node = topology.node(item.node)
            other = (
                topology.parts.reference[topology.parts.of_node[node]] if item.to is None else topology.node(item.to)
            )
            return bool(floating[node] != floating[other])
        if isinstance(item, ob.ElementVoltage | ob.WindingVoltage):
            label = item.label if isinstance(item, ob.WindingVoltage) else ""
            branch = topology.winding(item.name, label) if label else int(topology.branches_of(item.name)[0])
            return bool(floating[topology.start[branch]] != floating[topology.finish[branch]])
        return False


def _floating(tableau: Tableau, mode: Mode) -> NDArray[np.int64]:
    """Return 0 for nodes with a path to a zero node, else the number of the set of nodes left without one."""
    topology = tableau.topology
    open_now = {
        device.branch for device, own in zip(tableau.devices, mode, strict=True) if own == 0 and device.ideal_in(own)
    }
    joined = np.array(
        [k not in open_now and topology.kind[k] != Kind.CURRENT_SOURCE for k in range(len(topology.kind))]
    )
    of_node = components(len(topology.nodes), topology.start[joined], topology.finish[joined]) + 1
    of_node[np.isin(of_node, of_node[topology.parts.reference])] = 0
    return of_node
