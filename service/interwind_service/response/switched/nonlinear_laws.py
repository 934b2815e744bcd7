"""Laws of nonlinear branches: current and slope over one argument, a voltage or a flux linkage.

An exponential is continued by its tangent beyond e^60, where no current flows in any network; so an overlong trial step
never overflows and no step need be limited for it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.model import devices as dv
from interwind_service import tolerances as tol
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.response.switched.device import Device, LinearDiode, SaturableBranch

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class BrokenLine:
    """Straight pieces between ``knot`` (p - 1,), each from (``start``, ``current_a``) at ``slope``, all (p,)."""

    knot: FloatArray
    start: FloatArray
    current_a: FloatArray
    slope: FloatArray
    odd: bool

    def at(self, argument: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return currents and slopes, shapes of ``argument``; an ``odd`` line is its own image in the origin."""
        size = np.abs(argument) if self.odd else argument
        piece = self.knot.searchsorted(size, side="right")
        slope = self.slope[piece]
        current = self.current_a[piece] + slope * (size - self.start[piece])
        return (np.copysign(current, argument) if self.odd else current), slope


@dataclass(frozen=True, slots=True, eq=False)
class Laws:
    """``branch`` (q,); exponential, power and piecewise-linear branches by their positions among them.

    ``leak_s`` lies across every exponential diode, as ideal blocking has everywhere: saturated, in series with an
    inductor, its voltage would be fixed by nothing else.
    """

    branch: IntArray
    exponential: IntArray
    saturation_a: FloatArray
    thermal_v: FloatArray
    power: IntArray
    reference_v: FloatArray
    reference_a: FloatArray
    exponent: FloatArray
    broken: tuple[tuple[int, BrokenLine], ...]
    leak_s: float

    def current(self, argument: FloatArray) -> FloatArray:
        """Return currents alone, as `currents` does; the inner loop of a run asks for nothing else."""
        if len(self.exponential) == argument.shape[-1]:
            u = argument / self.thermal_v
            if np.maximum.reduce(u, axis=None, initial=0.0) <= tol.EXPONENT_CLIP:
                found: FloatArray = np.expm1(u, out=u)
                found *= self.saturation_a
                found += self.leak_s * argument
                return found
        return self.currents(argument)[0]

    def currents(self, argument: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return currents and slopes di/d(argument), shapes of ``argument`` (..., q)."""
        if len(self.exponential) == argument.shape[-1]:
            return self._exponential(argument)
        current, slope = np.empty_like(argument), np.empty_like(argument)
        for own, law in ((self.exponential, self._exponential), (self.power, self._power)):
            if own.size:
                current[..., own], slope[..., own] = law(argument[..., own])
        for position, line in self.broken:
            current[..., position], slope[..., position] = line.at(argument[..., position])
        return current, slope

    def _exponential(self, v: FloatArray) -> tuple[FloatArray, FloatArray]:
        u = v / self.thermal_v
        clipped = np.minimum(u, tol.EXPONENT_CLIP)
        grown = self.saturation_a * np.exp(clipped)
        leak = self.leak_s * v
        return grown * (1.0 + (u - clipped)) - self.saturation_a + leak, grown / self.thermal_v + self.leak_s

    def _power(self, v: FloatArray) -> tuple[FloatArray, FloatArray]:
        share = np.abs(v) / self.reference_v
        inside = np.minimum(share, np.exp(tol.EXPONENT_CLIP / self.exponent))
        rate = self.exponent * self.reference_a / self.reference_v * inside ** (self.exponent - 1.0)
        at = self.reference_a * inside**self.exponent
        return np.sign(v) * (at + rate * (share - inside) * self.reference_v), rate

    def limited(self, before: FloatArray, wanted: FloatArray) -> FloatArray:
        """Return where the laws meet the currents that their tangents at ``before`` give at ``wanted``, shape (q,).

        Where a law grows beyond its knee, its current tells the better place; elsewhere this is ``wanted``.
        """
        found = wanted.copy()
        own = self.exponential
        knee = np.maximum(before[own], self.thermal_v)
        beyond = np.maximum((wanted[own] - knee) / self.thermal_v, 0.0)
        found[own] = np.where(beyond > 0.0, knee + self.thermal_v * np.log1p(beyond), wanted[own])
        own = self.power
        start = np.maximum(np.abs(before[own]), self.reference_v)
        growth = np.maximum(np.abs(wanted[own]) / start - 1.0, 0.0)
        met = np.sign(wanted[own]) * start * (1.0 + self.exponent * growth) ** (1.0 / self.exponent)
        found[own] = np.where(growth > 0.0, met, wanted[own])
        return found

    def part(self, own: IntArray) -> Laws:
        """Return the laws of some of the branches."""
        place = {int(k): position for position, k in enumerate(own)}
        exponential = np.isin(self.exponential, own)
        power = np.isin(self.power, own)
        return Laws(
            self.branch[own],
            np.array([place[int(k)] for k in self.exponential[exponential]], dtype=np.int64),
            self.saturation_a[exponential],
            self.thermal_v[exponential],
            np.array([place[int(k)] for k in self.power[power]], dtype=np.int64),
            self.reference_v[power],
            self.reference_a[power],
            self.exponent[power],
            tuple((place[k], line) for k, line in self.broken if k in place),
            self.leak_s,
        )


def _broken_line(device: LinearDiode | SaturableBranch) -> BrokenLine:
    if isinstance(device, LinearDiode):
        V, g = device.forward_v, 1.0 / device.off_ohm
        pieces = (np.array([V]), np.array([0.0, V]), np.array([0.0, g * V]), np.array([g, 1.0 / device.on_ohm]))
        return BrokenLine(*pieces, odd=False)
    slope = np.diff(device.current_a) / np.diff(device.flux_wb)
    return BrokenLine(device.flux_wb[1:-1], device.flux_wb[:-1], device.current_a[:-1], slope, odd=True)


def laws_of(topology: Topology, devices: tuple[Device, ...], leak_s: float) -> Laws:
    """Return the laws of a network whose nonlinear branches are all solved for by their laws."""
    branch, exponential, power, broken = [], [], [], []
    parameters: dict[str, list[float]] = {"is": [], "vt": [], "vr": [], "ir": [], "ex": []}
    by_branch = {device.branch: device for device in devices}
    for k in topology.of_kind(Kind.DIODE, Kind.ARRESTER, Kind.SATURABLE).tolist():
        element = topology.network.elements[topology.element[k]]
        position = len(branch)
        branch.append(k)
        if isinstance(element, dv.Arrester):
            power.append(position)
            parameters["vr"].append(element.reference_voltage_v)
            parameters["ir"].append(element.reference_current_a)
            parameters["ex"].append(element.exponent)
        elif isinstance(element, dv.Diode) and element.exponential:
            exponential.append(position)
            parameters["is"].append(float(element.saturation_current_a or 0.0))
            parameters["vt"].append(float(element.thermal_voltage_v or 0.0))
        else:
            broken.append((position, _broken_line(by_branch[k])))
    return Laws(
        np.array(branch, dtype=np.int64),
        np.array(exponential, dtype=np.int64),
        np.array(parameters["is"]),
        np.array(parameters["vt"]),
        np.array(power, dtype=np.int64),
        np.array(parameters["vr"]),
        np.array(parameters["ir"]),
        np.array(parameters["ex"]),
        tuple(broken),
        leak_s,
    )
