"""What a call is forecast to need is what it takes, and sparse networks are let in where dense ones cannot be."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw
from interwind.codec.calls import BY_ENGINE
from interwind_service.workers.estimate import compute_bytes


def forecast(engine: str, **arguments) -> int:
    """The bytes that admission reserves for a call."""
    call = BY_ENGINE[engine]
    return compute_bytes(call.encode_request(**arguments).size, 0, call.path)


def chain(count: int, windings_count: int) -> iw.Network:
    """Resistors along, capacitors to ground, and one set of windings."""
    labels = [f"w{k}" for k in range(windings_count)]
    coils = iw.WindingSet(labels, np.eye(windings_count) * 1e-6)
    elements: list = [iw.Windings("T", coils, {label: ("n0", "g") for label in labels})]
    for k in range(count):
        elements.append(iw.Resistor(f"r{k}", f"n{k}", f"n{k + 1}", 1.0))
        elements.append(iw.Capacitor(f"c{k}", f"n{k + 1}", "g", 1e-12))
    return iw.Network("g", elements)


@pytest.mark.parametrize(("windings_count", "measured_mb"), [(500, 150), (1000, 510), (2000, 2250)])
def test_dense_sets_are_forecast_within_thirty_percent(windings_count, measured_mb):
    """Measured: growth of a worker during a port response of tests/benchmarks/frequency_large.py's network."""
    unknowns = int(0.9 * windings_count) + 1 + windings_count + 153  # nodes, windings, elements of that network
    nodes = unknowns - windings_count - 1  # as a chain: nodes + elements = 2 + 3 count
    needed = forecast(
        "port_response", network=chain((nodes - 2) // 3, windings_count), frequency_hz=np.geomspace(1e4, 1e9, 1000)
    )
    assert needed / 1e6 == pytest.approx(measured_mb, rel=0.3)


def test_a_sparse_network_of_thirty_thousand_unknowns_is_let_in():
    """Over frequency it takes sparse factors; over time it would take dense ones, and is refused by its forecast."""
    network = chain(10_000, 40)
    assert forecast("frequency_response", network=network, frequency_hz=[1e3]) < 2e9
    assert forecast("time_response", network=network, stop_s=1e-6, step_s=1e-9) > 1e11
