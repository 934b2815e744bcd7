"""Cautions that the numbers of a response call for, beside those of the network itself. No option removes them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from interwind.model.elements import Capacitor
from interwind.model.finding import Caution
from interwind_service import tolerances as tol
from interwind_service.network.hazards import hazards
from interwind_service.network.topology import Topology


@dataclass(frozen=True, slots=True, eq=False)
class Stress:
    """The largest magnitudes that a response reaches.

    ``node_voltage_v``: peak of each node against its zero; ``capacitor_voltage_v``: peak across each capacitor;
    ``magnetic_energy_j``: peak energy of each inductor and winding set; ``direct``: whether the voltages are direct.
    """

    node_voltage_v: Mapping[str, float] = field(default_factory=dict)
    capacitor_voltage_v: Mapping[str, float] = field(default_factory=dict)
    magnetic_energy_j: Mapping[str, float] = field(default_factory=dict)
    direct: bool = False


def cautions_of(topology: Topology, stress: Stress) -> tuple[Caution, ...]:
    """Return every caution: the standing statement, the network's own, touchable voltage, stored energy and charge."""
    return (*hazards(topology), *_touchable(stress), *_stored(topology, stress))


def _touchable(stress: Stress) -> list[Caution]:
    if not stress.node_voltage_v:
        return []
    node, volt = max(stress.node_voltage_v.items(), key=lambda item: item[1])
    safe, limit = (tol.ES1_DIRECT_V, tol.ES2_DIRECT_V) if stress.direct else (tol.ES1_PEAK_V, tol.ES2_PEAK_V)
    if not volt > safe:
        return []
    count = sum(value > safe for value in stress.node_voltage_v.values())
    grade = "can kill" if volt > limit else "can hurt"
    return [
        Caution(
            "TOUCHABLE_VOLTAGE",
            f"Node {node!r} reaches {volt:.4g} V, above {safe:g} V ({count} in all do); such a voltage {grade}. Keep "
            "it out of reach, disconnect and prove dead before touching; IEC 62368-1 or the standard of the equipment "
            "decides what may be touched.",
            measured=volt,
            threshold=safe,
        )
    ]


def _stored(topology: Topology, stress: Stress) -> list[Caution]:
    cautions = []
    charged: dict[str, tuple[float, float, float]] = {}
    for element in topology.network.elements:
        if isinstance(element, Capacitor) and element.name in stress.capacitor_voltage_v:
            volt = stress.capacitor_voltage_v[element.name]
            charged[element.name] = (volt, element.capacitance_f * volt, 0.5 * element.capacitance_f * volt * volt)
    shocking = {n: e for n, (v, _, e) in charged.items() if v >= tol.SHOCK_CAPACITOR_V and e >= tol.SHOCK_ENERGY_J}
    burning = {n: e for n, (v, _, e) in charged.items() if v < tol.SHOCK_CAPACITOR_V and e > tol.THERMAL_ENERGY_J}
    fields = {n: e for n, e in stress.magnetic_energy_j.items() if e >= tol.SHOCK_ENERGY_J}
    for found, limit, text in (
        (shocking, tol.SHOCK_ENERGY_J, "enough to kill; discharge them through a resistor, short them, then work"),
        (burning, tol.THERMAL_ENERGY_J, "enough to burn; discharge them before working, take off rings and watches"),
        (
            fields,
            tol.SHOCK_ENERGY_J,
            "in their field; an interrupted current drives the voltage up until it flows again",
        ),
    ):
        if found:
            name, energy = max(found.items(), key=lambda item: item[1])
            cautions.append(
                Caution(
                    "STORED_ENERGY",
                    f"{', '.join(list(found)[:8])} store energy, {name!r} the most with {energy:.4g} J, {text}.",
                    measured=energy,
                    threshold=limit,
                )
            )
    held = {
        n: q for n, (v, q, e) in charged.items() if n not in shocking and v > tol.ES1_PEAK_V and q > tol.TOUCH_CHARGE_C
    }
    if held:
        name, charge = max(held.items(), key=lambda item: item[1])
        cautions.append(
            Caution(
                "STORED_CHARGE",
                f"{', '.join(list(held)[:8])} stay charged after switching off, {name!r} with {charge:.4g} C at "
                f"{charged[name][0]:.4g} V; discharge before touching.",
                measured=charge,
                threshold=tol.TOUCH_CHARGE_C,
            )
        )
    return cautions
