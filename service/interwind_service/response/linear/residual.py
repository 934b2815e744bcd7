"""How far the states of a run miss the current law and the laws of the elements that store energy."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology

FloatArray = NDArray[np.float64]


def equation_residual(topology: Topology, signals: FloatArray, M: FloatArray, y: FloatArray, rate: float) -> float:
    """Return the largest |b − A x| over |A| |x| + |b|, over the current law and the laws of L, C and windings.

    Parameters
    ----------
    signals : branch voltages, branch currents (and more) as rows on y, shape (signals, n + g).
    M : y' = M y, shape (n + g, n + g), 1/s.
    y : states to test at, shape (some, n + g).
    rate : what a derivative weighs in |A|, 1/s.
    """
    branches = len(topology.kind)
    value = np.abs(topology.value)
    rows = signals[: 2 * branches]
    voltage, current = np.split(rows @ y.T, 2)
    voltage_slope, current_slope = np.split(rows @ (M @ y.T), 2)
    capacitors, inductors = topology.of_kind(Kind.CAPACITOR), topology.of_kind(Kind.INDUCTOR)
    resistors = np.flatnonzero((topology.kind == Kind.RESISTOR) & (value > 0.0))
    charge = value[capacitors][:, None] * voltage[capacitors]
    flux = value[inductors][:, None] * current[inductors]
    charging = current[capacitors] - value[capacitors][:, None] * voltage_slope[capacitors]
    gap_current = max(_largest(_net_current(topology, current)), _largest(charging))
    size_current = _largest(current) + rate * _largest(charge)
    size_current = max(size_current, _largest(voltage[resistors] / value[resistors][:, None]))
    gap_voltage = _largest(voltage[inductors] - value[inductors][:, None] * current_slope[inductors])
    size_voltage = _largest(voltage) + rate * _largest(flux)
    for group in topology.groups:
        i, slope = current[group.branches], current_slope[group.branches]
        R, L = group.resistance_ohm, group.inductance_h
        gap_voltage = max(gap_voltage, _largest(voltage[group.branches] - R @ i - L @ slope))
        size = np.abs(R) @ np.abs(i) + np.abs(L) @ (np.abs(slope) + rate * np.abs(i))
        size_voltage = max(size_voltage, _largest(size))
    return max(_share(gap_current, size_current), _share(gap_voltage, size_voltage))


def _net_current(topology: Topology, current: FloatArray) -> FloatArray:
    net = np.zeros((len(topology.nodes), current.shape[1]))
    np.add.at(net, topology.start, current)
    np.add.at(net, topology.finish, -current)
    return net


def _largest(values: FloatArray) -> float:
    return float(np.abs(values).max(initial=0.0))


def _share(gap: float, size: float) -> float:
    return gap / size if size > 0.0 else 0.0
