"""Piecewise-linear devices: in every mode one straight line, and guards that say when the line is left.

Every law is continuous where its pieces meet, so the state needs no jump and the monodromy no saltation factor
(the factor of Aizerman & Gantmakher 1958 is then the identity). Guards count in the natural unit: the current of a
conducting diode, the voltage of a blocking one; r·i of a nearly ideal piece would drown in rounding.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

import numpy as np
from numpy.typing import NDArray

from interwind.model import devices as el
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.response.switched.ideal_limit import IdealLimit

FloatArray = NDArray[np.float64]
Law = tuple[float, float, float, float]


@dataclass(frozen=True, slots=True)
class Guard:
    """offset + voltage·v + current·i + state·x stays ≥ 0 while the mode lasts; then the mode becomes ``then``."""

    offset: float
    voltage: float
    current: float
    state: float
    then: int


@dataclass(frozen=True, slots=True)
class Device:
    """What all devices share. ``law(mode)`` = (a, b, c, d) of a·v + b·i = c·x + d."""

    branch: int
    name: str
    state: int

    def law(self, mode: int) -> Law:
        """Return the coefficients of the straight line of a mode."""
        raise NotImplementedError

    def guards(self, mode: int) -> tuple[Guard, ...]:
        """Return the conditions under which a mode lasts."""
        return ()

    def ideal_in(self, mode: int) -> bool:
        """Whether the slope of a mode stands for an ideal one."""
        return False

    def heat_offset(self, mode: int) -> float:
        """Return the voltage whose product with the current is heat of the device itself, however ideal its slope."""
        return 0.0


@dataclass(frozen=True, slots=True)
class TimedSwitch(Device):
    """Mode 1 closed, v = r i; mode 0 open, v = R i."""

    gate: el.Gate | el.GateTimes
    closed_ohm: float
    open_ohm: float
    ideal: tuple[bool, bool]
    words: ClassVar[dict[int, str]] = {0: "open", 1: "closed"}

    def ideal_in(self, mode: int) -> bool:
        """Whether the resistance of a mode is not its own."""
        return self.ideal[mode]

    def law(self, mode: int) -> Law:
        """Return the straight line of a mode."""
        return (1.0, -(self.closed_ohm if mode else self.open_ohm), 0.0, 0.0)


@dataclass(frozen=True, slots=True)
class LinearDiode(Device):
    """Mode 1 conducting, v = V_f + r (i − g V_f); mode 0 blocking, i = g v; the pieces meet at v = V_f."""

    forward_v: float
    on_ohm: float
    off_ohm: float
    ideal: tuple[bool, bool]
    words: ClassVar[dict[int, str]] = {0: "blocking", 1: "conducting"}

    def ideal_in(self, mode: int) -> bool:
        """Whether the resistance of a mode is not its own."""
        return self.ideal[mode]

    def law(self, mode: int) -> Law:
        """Return the straight line of a mode."""
        if mode:
            return (1.0, -self.on_ohm, 0.0, self.forward_v * (1.0 - self.on_ohm / self.off_ohm))
        return (1.0, -self.off_ohm, 0.0, 0.0)

    def guards(self, mode: int) -> tuple[Guard, ...]:
        """Return what ends a mode."""
        if mode:
            return (Guard(-self.forward_v / self.off_ohm, 0.0, 1.0, 0.0, 0),)
        return (Guard(self.forward_v, -1.0, 0.0, 0.0, 1),)

    def heat_offset(self, mode: int) -> float:
        """Return the forward voltage while conducting."""
        return self.forward_v if mode else 0.0


@dataclass(frozen=True, slots=True, eq=False)
class SaturableBranch(Device):
    """Mode k: the k-th straight piece of the table (negative for negative flux); the state is x = φ / sqrt(L0)."""

    root: float
    current_a: FloatArray
    flux_wb: FloatArray
    residual_wb: float
    words: ClassVar[dict[int, str]] = {}

    def law(self, mode: int) -> Law:
        """Return the straight line of a mode."""
        start, sign = abs(mode), (1.0 if mode >= 0 else -1.0)
        slope = self._slope(start)
        return (0.0, 1.0, slope * self.root, sign * (self.current_a[start] - slope * self.flux_wb[start]))

    def _slope(self, piece: int) -> float:
        return (self.current_a[piece + 1] - self.current_a[piece]) / (self.flux_wb[piece + 1] - self.flux_wb[piece])

    def guards(self, mode: int) -> tuple[Guard, ...]:
        """Return what ends a mode."""
        piece, sign, last = abs(mode), (1.0 if mode >= 0 else -1.0), len(self.flux_wb) - 2
        found = []
        if piece < last:
            found.append(Guard(self.flux_wb[piece + 1], 0.0, 0.0, -sign * self.root, int(sign) * (piece + 1)))
        if piece:
            found.append(Guard(-self.flux_wb[piece], 0.0, 0.0, sign * self.root, int(sign) * (piece - 1)))
        elif last:
            found.append(Guard(self.flux_wb[1], 0.0, 0.0, self.root, -1))
        return tuple(found)

    def mode_at(self, flux_wb: float) -> int:
        """Return the piece that holds a flux linkage."""
        piece = min(int(np.searchsorted(self.flux_wb, abs(flux_wb), side="right")) - 1, len(self.flux_wb) - 2)
        return piece if flux_wb >= 0 else -piece

    def energy_line(self, mode: int) -> tuple[float, float, float]:
        """Return (p, q, c) with the energy ½ p φ² + q φ + c on the piece of a mode."""
        piece, sign = abs(mode), (1.0 if mode >= 0 else -1.0)
        slope = self._slope(piece)
        constant = self.current_a[piece] - slope * self.flux_wb[piece]
        at = self.flux_wb[piece]
        base = float(self.energy_j(np.array([at]))[0]) - 0.5 * slope * at**2 - constant * at
        return slope, sign * constant, base

    def energy_j(self, flux_wb: FloatArray) -> FloatArray:
        """Return ∫ i dφ from 0."""
        flux = np.abs(flux_wb)
        piece = np.clip(np.searchsorted(self.flux_wb, flux, side="right") - 1, 0, len(self.flux_wb) - 2)
        areas = 0.5 * (self.current_a[1:] + self.current_a[:-1]) * np.diff(self.flux_wb)
        below = np.concatenate([[0.0], np.cumsum(areas)])[piece]
        beyond = flux - self.flux_wb[piece]
        slope = np.diff(self.current_a)[piece] / np.diff(self.flux_wb)[piece]
        return below + self.current_a[piece] * beyond + 0.5 * slope * beyond**2


def is_smooth(topology: Topology, branch: int) -> bool:
    """Whether a branch follows a smooth law that no straight pieces make: an exponential diode or an arrester."""
    element = topology.network.elements[topology.element[branch]]
    return isinstance(element, el.Arrester) or (isinstance(element, el.Diode) and element.exponential)


def has_smooth(topology: Topology) -> bool:
    """Whether any branch of a network follows a smooth law."""
    return any(is_smooth(topology, branch) for branch in topology.of_kind(Kind.DIODE, Kind.ARRESTER).tolist())


def device_of(topology: Topology, branch: int, state: int, limit: IdealLimit) -> Device:
    """Return the device of a switch, diode or saturable branch."""
    element = topology.network.elements[topology.element[branch]]
    if isinstance(element, el.SaturableInductor):
        current, flux = element.current_a, element.flux_linkage_wb
        if current[0] != 0.0 or flux[0] != 0.0:
            current, flux = np.concatenate([[0.0], current]), np.concatenate([[0.0], flux])
        root = float(np.sqrt(flux[1] / current[1]))
        return SaturableBranch(branch, element.name, state, root, current, flux, element.residual_wb)
    on, off = element.conducting_resistance_ohm, element.blocking_resistance_ohm
    ideal = (not np.isfinite(off), on == 0.0)
    on, off = (on or limit.short_ohm), (off if np.isfinite(off) else limit.open_ohm)
    if isinstance(element, el.Switch):
        return TimedSwitch(branch, element.name, -1, element.closed, on, off, ideal)
    return LinearDiode(branch, element.name, -1, element.forward_voltage_v, on, off, ideal)
