"""Cautions of a response over time: from what was observed, and from what the sources impose unobserved."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any, TypeVar

import numpy as np

from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model import waveform as wf
from interwind.model.network import Network
from interwind.model.periodic import PeriodicResponse
from interwind.model.response import TimeResponse
from interwind_service.network.topology import number
from interwind_service.response.cautions import Stress, cautions_of

Response = TypeVar("Response", TimeResponse, PeriodicResponse)


def with_cautions(network: Network, response: Response) -> Response:
    """Return the response with its cautions.

    Voltages count with their peaks, whatever their waveform: the limits of alternating voltages are the stricter ones.
    """
    return replace(response, cautions=cautions_of(number(network), observed_stress(network, response)))


def observed_stress(network: Network, response: TimeResponse | PeriodicResponse) -> Stress:
    """Return the largest magnitudes among what was observed, and at the terminals of the voltage sources."""
    peaks = peaks_of(response)
    nodes = {
        observable.node: peak
        for observable, peak in peaks.items()
        if isinstance(observable, ob.NodeVoltage) and observable.to is None
    }
    across, fields = {}, {}
    for element in network.elements:
        voltage = peaks.get(ob.ElementVoltage(element.name), math.nan)
        if isinstance(element, el.VoltageSource) and element.waveform is not None:
            for node in {element.a, element.b} - {network.reference}:
                nodes[node] = float(np.fmax(nodes.get(node, 0.0), source_peak(element.waveform)))
        elif isinstance(element, el.Capacitor):
            across[element.name] = float(np.fmax(voltage, _between(network, response, element.a, element.b)))
        elif isinstance(element, el.Windings | el.Inductor):
            fields[element.name] = peaks.get(ob.StoredEnergy(element.name), math.nan)
    return Stress(nodes, across, fields)


def peaks_of(response: TimeResponse | PeriodicResponse) -> dict[ob.Observable, float]:
    """Return the largest magnitude of each observable; of a periodic response that of the exact solution."""
    if isinstance(response, PeriodicResponse):
        values = np.abs(response.peaks)
    else:
        ends = [array for array in (response.samples, response.lowest, response.highest) if array is not None]
        values = np.fmax.reduce([np.fmax.reduce(np.abs(array), axis=0, initial=0.0) for array in ends])
    return dict(zip(response.observables, values.tolist(), strict=True))


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


def _between(network: Network, response: TimeResponse | PeriodicResponse, a: str, b: str) -> float:
    """Return the peak voltage between two nodes where both were observed; NaN where not."""
    columns = [0.0 if node == network.reference else _column(response, node) for node in (a, b)]
    if any(column is None for column in columns):
        return math.nan
    return float(np.fmax.reduce(np.abs(np.subtract(*columns)), axis=None, initial=0.0))


def _column(response: TimeResponse | PeriodicResponse, node: str) -> Any:
    observable = ob.NodeVoltage(node)
    return response[observable] if observable in response else None
