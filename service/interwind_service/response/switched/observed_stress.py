"""The largest stress over a switched or nonlinear run, for its cautions: what was observed, and what sources impose."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model import waveform as wf
from interwind_service.network.topology import Topology
from interwind_service.response.request.cautions import Stress

FloatArray = NDArray[np.float64]


def observed_stress(
    topology: Topology, observables: Sequence[ob.Observable], samples: FloatArray, peaks: FloatArray | None = None
) -> Stress:
    """Return the largest magnitudes among what was observed, and at the terminals of the voltage sources.

    Parameters
    ----------
    samples : shape (T, observables).
    peaks : shape (observables,), of the exact solution where it is known; None = those of the samples.
    """
    largest = np.fmax.reduce(np.abs(samples), axis=0, initial=0.0) if peaks is None else np.abs(peaks)
    reached = dict(zip(observables, largest.tolist(), strict=True))
    column = dict(zip(observables, samples.T, strict=True))
    zero = topology.network.reference
    nodes = {item.node: peak for item, peak in reached.items() if isinstance(item, ob.NodeVoltage) and item.to is None}
    across, fields = {}, {}
    for element in topology.network.elements:
        if isinstance(element, el.VoltageSource) and element.waveform is not None and zero in (element.a, element.b):
            node = element.a if element.b == zero else element.b
            nodes[node] = float(np.fmax(nodes.get(node, 0.0), source_peak(element.waveform)))
        elif isinstance(element, el.Capacitor):
            ends = [
                column.get(ob.NodeVoltage(node), 0.0 if node == zero else math.nan) for node in (element.a, element.b)
            ]
            between = float(np.fmax.reduce(np.abs(np.subtract(*ends)), axis=None, initial=0.0))
            across[element.name] = max(reached.get(ob.ElementVoltage(element.name), 0.0), between)
        elif isinstance(element, el.Windings | el.Inductor):
            fields[element.name] = reached.get(ob.StoredEnergy(element.name), 0.0)
    return Stress(nodes, across, fields)


def larger_of(one: Stress, other: Stress) -> Stress:
    """Return the larger of each magnitude."""

    def larger(a: Mapping[str, float], b: Mapping[str, float]) -> dict[str, float]:
        return {name: float(np.fmax(a.get(name, math.nan), b.get(name, math.nan))) for name in {**a, **b}}

    return Stress(
        larger(one.node_voltage_v, other.node_voltage_v),
        larger(one.capacitor_voltage_v, other.capacitor_voltage_v),
        larger(one.magnetic_energy_j, other.magnetic_energy_j),
    )


def source_peak(waveform: wf.Waveform) -> float:
    """Return a bound on the magnitude of a waveform, in the unit of its source; NaN where it grows without one."""
    match waveform:
        case wf.Constant(value) | wf.Step(value):
            return abs(value)
        case wf.Sine():
            return abs(waveform.offset) + abs(waveform.amplitude)
        case wf.Trapezoid():
            return max(abs(waveform.low), abs(waveform.high))
        case wf.DoubleExponential() | wf.DampedSine():
            return abs(waveform.amplitude)
        case wf.OffsetFaultCurrent():
            return 2.0 * abs(waveform.amplitude)
        case wf.StandardImpulse():
            return abs(waveform.peak)
        case wf.PiecewiseLinear() | wf.SampledRecord():
            return float(np.max(np.abs(waveform.value), initial=0.0))
    return math.nan
