"""One reduction a band agrees with the frequency tree at every frequency."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw
from interwind_service.network.topology import number
from interwind_service.response.frequency import frequency_response
from interwind_service.response.sinusoidal.sweep import SweptBand, sweep


def sections(count: int) -> iw.Network:
    """A winding of coupled sections with an ideal source at its head, capacitors across and to ground."""
    row = 100e-6 * 0.85 ** np.arange(count)
    L = row[np.abs(np.subtract.outer(np.arange(count), np.arange(count)))]
    labels = [f"w{k}" for k in range(count)]
    ends = [*(f"n{k}" for k in range(count)), "g"]
    terminals = {label: (ends[k], ends[k + 1]) for k, label in enumerate(labels)}
    elements = [
        iw.VoltageSource("v", "n0", "g", phasor=1.0),
        iw.Windings("T", iw.WindingSet(labels, L, 0.6), terminals),
    ]
    for k in range(count):
        elements.append(iw.Capacitor(f"across {k}", ends[k], ends[k + 1], 1e-9))
        elements.append(iw.Resistor(f"loss {k}", ends[k], ends[k + 1], 2e5))
        if k:
            elements.append(iw.Capacitor(f"ground {k}", ends[k], "g", 2e-11))
    return iw.Network("g", elements)


@pytest.mark.parametrize("count", [2, 10, 30])
def test_against_the_frequency_tree(count):
    """Five decades from one resolvent, the source standing across a chain of capacitors: 1e-10 at every point."""
    network = sections(count)
    frequency_hz = np.geomspace(1e2, 1e7, 121)
    topology = number(network)

    (band,) = sweep(topology, 2 * np.pi * frequency_hz, np.arange(121), lambda band: True)

    assert isinstance(band, SweptBand)
    branches = len(topology.kind)
    rows = np.array([2 * branches + topology.node("n1"), branches + topology.winding("T", "w0")])
    asked = [iw.NodeVoltage("n1"), iw.WindingCurrent("T", "w0")]
    tree = frequency_response(network, frequency_hz, asked).samples
    swept = band.signals(rows)[:, :, 0]
    assert np.abs(swept - tree).max() <= 1e-10 * np.abs(tree).max()
    assert (np.abs(swept - tree) / np.abs(tree)).max() <= 1e-9


def test_a_refused_band_is_halved_and_then_left():
    """Frequencies of a band that never agrees come back as positions, each once."""
    topology = number(sections(3))
    omega = 2 * np.pi * np.geomspace(1e2, 1e7, 1000)

    left = list(sweep(topology, omega, np.arange(1000), lambda band: False))

    assert len(left) == 8
    assert np.array_equal(np.concatenate(left), np.arange(1000))
