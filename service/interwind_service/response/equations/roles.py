"""What each branch is in the sinusoidal state: an admittance, an imposed quantity, or one with a law of its own."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind.model import elements as el
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.network.values import switch_closed_at_zero

FloatArray = NDArray[np.float64]


class Role(IntEnum):
    """The part a branch plays at one frequency."""

    ADMITTANCE = 0
    VOLTAGE = 1
    CURRENT = 2
    OPEN = 3
    WINDING = 4
    TRANSFORMER = 5
    CONTROLLED_VOLTAGE = 6
    CONTROLLED_CURRENT = 7


_BY_KIND = {
    Kind.VOLTAGE_SOURCE: Role.VOLTAGE,
    Kind.CURRENT_SOURCE: Role.CURRENT,
    Kind.WINDING: Role.WINDING,
    Kind.TRANSFORMER: Role.TRANSFORMER,
    Kind.CONTROLLED_VOLTAGE: Role.CONTROLLED_VOLTAGE,
    Kind.CONTROLLED_CURRENT: Role.CONTROLLED_CURRENT,
}
_ROLES = np.array([_BY_KIND.get(kind, Role.ADMITTANCE) for kind in Kind], dtype=np.int64)
_REFUSED = {Kind.DIODE: "a diode", Kind.ARRESTER: "an arrester", Kind.SATURABLE: "a saturable inductor"}


@dataclass(frozen=True, slots=True, eq=False)
class Roles:
    """``role`` (branches,), and of an admittance y(s) = conductance + s capacitance + reciprocal_inductance / s."""

    role: NDArray[np.int64]
    conductance: FloatArray
    capacitance: FloatArray
    reciprocal_inductance: FloatArray

    def admittance(self, branch: int, s: NDArray[np.complex128]) -> NDArray[np.complex128]:
        """Return y(s) of one branch, shape of ``s``."""
        y = self.conductance[branch] + s * self.capacitance[branch]
        return y + self.reciprocal_inductance[branch] / s if self.reciprocal_inductance[branch] else y


def roles_of(topology: Topology, *, at_zero: bool) -> Roles:
    """Say what each branch is; ``at_zero`` = at 0 Hz, where inductors are short circuits and capacitors open.

    A switch stands as at t = 0. Elements whose law is not linear have no frequency response.

    Raises
    ------
    InvalidNetwork : a diode, an arrester or a saturable inductor.
    """
    kind, value = topology.kind, topology.value
    for k in topology.of_kind(*_REFUSED).tolist():
        raise InvalidNetwork.at(
            f"elements[{topology.element[k]}]",
            f"{topology.names[k]!r} is {_REFUSED[Kind(kind[k])]}, which has no frequency response; replace it by the "
            "resistance or inductance of its working point, or ask for a time response",
        )
    role = _ROLES[kind]
    ohm = value.copy()
    for k in topology.of_kind(Kind.SWITCH).tolist():
        ohm[k] = _switch_resistance(topology, k)
    resistive = (kind == Kind.RESISTOR) | (kind == Kind.SWITCH)
    capacitive, inductive = kind == Kind.CAPACITOR, kind == Kind.INDUCTOR
    role[(resistive & (ohm == 0.0)) | (inductive & (at_zero | (value == 0.0)))] = Role.VOLTAGE
    role[(resistive & np.isinf(ohm)) | (capacitive & (at_zero | (value == 0.0)))] = Role.OPEN
    admitting = role == Role.ADMITTANCE
    with np.errstate(divide="ignore", invalid="ignore"):
        conductance = np.where(resistive & admitting, 1.0 / ohm, 0.0)
        reciprocal_inductance = np.where(inductive & admitting, 1.0 / value, 0.0)
    return Roles(role, conductance, np.where(capacitive & admitting, value, 0.0), reciprocal_inductance)


def _switch_resistance(topology: Topology, branch: int) -> float:
    switch = topology.network.elements[topology.element[branch]]
    if not isinstance(switch, el.Switch):
        raise TypeError(f"branch {branch} is no switch")
    return switch.conducting_resistance_ohm if switch_closed_at_zero(switch) else switch.blocking_resistance_ohm
