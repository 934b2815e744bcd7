"""What stands in for ideal elements: 0 ohm becomes ε Z, 0 S becomes ε / Z, with ε told in the evidence.

The same pair cuts the two structures in which states would jump with every source: loops of capacitors and voltage
sources get ε Z in series, cutsets of inductors and current sources ε / Z across. A jump is then a transient far
shorter than anything in the network, in which flux and charge are conserved by Kirchhoff's laws themselves, and what
it loses is dissipated where it can be counted (Heemels, Çamlıbel & Schumacher 2002 give the limit).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.linalg as sl
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork, InvalidWindings
from interwind_service import tolerances as tol
from interwind_service.network.groups import WindingGroup
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.network.winding_coordinates import winding_coordinates

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class IdealLimit:
    """``short_ohm``, ``open_ohm`` of ideal elements; ``series_ohm`` (branches,) in loops;
    ``middle_ohm`` the geometric mean of all impedances; ``leaks`` (node, S).
    """

    short_ohm: float
    open_ohm: float
    series_ohm: FloatArray
    middle_ohm: float
    leaks: tuple[tuple[int, float], ...]

    def winding_resistance(self, group: WindingGroup) -> FloatArray:
        """Return R of a group; perfectly coupled windings without resistance get ε Z, for they close loops by flux."""
        resistance = group.resistance_ohm.copy()
        if winding_factor(group).shape[1] < group.size:
            bare = np.flatnonzero(resistance.diagonal() == 0.0)
            resistance[bare, bare] = self.short_ohm
        return resistance


def winding_factor(group: WindingGroup) -> FloatArray:
    """Return S, shape (n, rank), with L = S S', from the coordinates that keep the digits of each leakage.

    Raises
    ------
    InvalidWindings : the inductance matrix has a negative pivot beyond rounding.
    """
    coordinates = winding_coordinates(group)
    inverse = np.linalg.inv(coordinates.N)
    if coordinates.rank == group.size:
        try:
            return inverse.T @ np.linalg.cholesky(coordinates.S)
        except np.linalg.LinAlgError as error:
            raise InvalidWindings.at(
                f"elements[{group.position}].windings",
                "the coupling matrix has an eigenvalue below 0; check() names the entry to blame",
            ) from error
    leakage = coordinates.S.diagonal()
    kept = leakage > 0.0
    return inverse.T[:, kept] * np.sqrt(leakage[kept])


def ideal_limit_of(topology: Topology, time_scale_s: float, epsilon: float = tol.IDEAL_EPSILON) -> IdealLimit:
    """Choose the impedances of ideal elements and find the structures that need them.

    Every resistance, 2π L / T and T / 2π C is an impedance of the network. A short is ε times the smallest of them and
    an open end the largest over ε, each within ``IMPEDANCE_REACH`` of their geometric mean.
    """
    turn = 2.0 * np.pi / time_scale_s
    scales = [value for value in topology.value[topology.of_kind(Kind.RESISTOR)] if value > 0.0]
    inductances = [topology.value[k] for k in topology.of_kind(Kind.INDUCTOR)]
    for group in topology.groups:
        inductances += list(group.inductance_h.diagonal())
    scales += [turn * value for value in inductances if value > 0.0]
    scales += [1.0 / (turn * topology.value[k]) for k in topology.of_kind(Kind.CAPACITOR) if topology.value[k] > 0.0]
    logs = np.log(np.array(scales or [1.0]))
    middle, reach = logs.mean(), np.log(tol.IMPEDANCE_REACH)
    low = float(np.exp(max(logs.min(), middle - reach)))
    high = float(np.exp(min(logs.max(), middle + reach)))
    short, leak = epsilon * low, epsilon / high
    return IdealLimit(
        short, high / epsilon, _loop_resistance(topology, short), float(np.exp(middle)), _cutset_leaks(topology, leak)
    )


def _loop_resistance(topology: Topology, short_ohm: float) -> FloatArray:
    """Give a series resistance to each capacitor or transformer whose voltage the ones before it already fix."""
    series = np.zeros(len(topology.kind))
    incidence = topology.incidence().T
    incidence[:, topology.parts.reference] = 0.0
    rows: list[tuple[int, FloatArray]] = [(int(k), incidence[k]) for k in topology.of_kind(Kind.VOLTAGE_SOURCE)]
    for control in topology.controls:
        if topology.kind[control.branch] == Kind.CONTROLLED_VOLTAGE:
            row = incidence[control.branch].copy()
            if control.sensed < 0:
                row[control.start] -= control.gain
                row[control.finish] += control.gain
            rows.append((control.branch, row))
    for pair in topology.transformers:
        rows.append((pair.first, incidence[pair.first] - pair.ratio * incidence[pair.second]))
    capacitors = [int(k) for k in topology.of_kind(Kind.CAPACITOR) if topology.value[k] > 0.0]
    rows += [(k, incidence[k]) for k in sorted(capacitors, key=lambda k: -topology.value[k])]
    basis: list[FloatArray] = []
    for branch, row in rows:
        norm = np.linalg.norm(row)
        rest = row / norm if norm else row
        for _ in range(2):  # twice is enough (Parlett 1980)
            for direction in basis:
                rest = rest - direction * (direction @ rest)
        if np.linalg.norm(rest) > tol.DEPENDENT_ROW:
            basis.append(rest / np.linalg.norm(rest))
        elif topology.kind[branch] in (Kind.CAPACITOR, Kind.TRANSFORMER):
            series[branch] = short_ohm
        else:
            raise InvalidNetwork.at(
                f"elements[{topology.element[branch]}]",
                f"{topology.names[branch]!r} closes a loop of voltage sources; their voltages contradict or their "
                "currents have no value; put a resistance into the loop",
            )
    return series


def _cutset_leaks(topology: Topology, leak_s: float) -> tuple[tuple[int, float], ...]:
    """Leak one node of each cutset that holds inductive branches and imposed currents only.

    Such a cutset is a vector over the nodes with λ'A_k = 0 for every other branch, and λ'(A_1 − n A_2) = 0 for an ideal
    transformer, whose two currents are one.
    """
    incidence = topology.incidence()
    free = np.setdiff1d(np.arange(len(topology.nodes)), topology.parts.reference)
    carrying = np.isin(
        topology.kind,
        [
            Kind.RESISTOR,
            Kind.CAPACITOR,
            Kind.VOLTAGE_SOURCE,
            Kind.SWITCH,
            Kind.DIODE,
            Kind.ARRESTER,
            Kind.CONTROLLED_VOLTAGE,
        ],
    )
    carrying &= ~((topology.kind == Kind.CAPACITOR) & (topology.value == 0.0))
    carrying |= (topology.kind == Kind.INDUCTOR) & (topology.value == 0.0)
    for control in topology.controls:
        carrying[control.branch] |= control.sensed < 0
    columns = [incidence[:, carrying]]
    columns += [(incidence[:, t.first] - t.ratio * incidence[:, t.second])[:, None] for t in topology.transformers]
    carried = np.hstack(columns)[free]
    if not free.size:
        return ()
    U, s, _ = np.linalg.svd(carried)
    null = U[:, np.count_nonzero(s > tol.DEPENDENT_ROW * max(1.0, s.max(initial=0.0))) :]
    pivots = sl.qr(null.T, mode="r", pivoting=True)[1][: null.shape[1]] if null.shape[1] else ()
    return tuple((int(free[k]), leak_s) for k in pivots)
