"""Controlled sources over time: closed forms, and random networks that are either right or refused."""

from __future__ import annotations

import dataclasses
import importlib.util
from pathlib import Path

import numpy as np
import pytest

from interwind.errors import AccuracyNotReached, InvalidRequest
from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model import waveform as wf
from interwind.model.network import Network
from interwind_service.response.time import time_response

_spec = importlib.util.spec_from_file_location("random_networks", Path(__file__).with_name("random_networks.py"))
networks = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(networks)


def test_two_sections_behind_a_buffer():
    """Two R-C sections, the second behind a gain of 2: partial fractions (derived)."""
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Step(1.0)),
            el.Resistor("R1", "a", "b", 1e3),
            el.Capacitor("C1", "b", "0", 1e-6),
            el.VoltageByVoltage("E", "c", "0", ("b", "0"), 2.0),
            el.Resistor("R2", "c", "d", 2e3),
            el.Capacitor("C2", "d", "0", 1e-6),
        ],
    )
    answer = time_response(net, 5e-3, 1e-4, [ob.NodeVoltage("d")])
    expected = 2 * (1 - 2 * np.exp(-answer.time_s / 2e-3) + np.exp(-answer.time_s / 1e-3))
    assert np.abs(answer.samples[:, 0] - expected).max() < 1e-12
    assert answer.evidence.energy_error < 1e-12


def test_gyrated_capacitor_is_an_inductor():
    """Two transconductances turn C into L = C/g² (Tellegen 1948; derived)."""
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Step(1.0)),
            el.Resistor("R", "a", "b", 1e3),
            el.CurrentByVoltage("G1", "b", "0", ("c", "0"), 1e-3),
            el.CurrentByVoltage("G2", "0", "c", ("b", "0"), 1e-3),
            el.Capacitor("C", "c", "0", 1e-6),
        ],
    )
    answer = time_response(net, 5e-3, 1e-4, [ob.ElementCurrent("R")])
    assert np.abs(answer.samples[:, 0] + 1e-3 * np.expm1(-answer.time_s / 1e-3)).max() < 1e-15


@pytest.mark.parametrize("sensed", ["C", "L", "R", "V"])
def test_current_mirrors_copy_any_current(sensed):
    """Twice the current of an element, driven into 1 Ω, is its current doubled at every sample."""
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Step(1.0)),
            el.Resistor("R", "a", "b", 10.0),
            el.Inductor("L", "b", "c", 1e-3),
            el.Capacitor("C", "c", "0", 1e-6),
            el.CurrentByCurrent("F", "0", "m", sensed, 2.0),
            el.Resistor("M", "m", "0", 1.0),
        ],
    )
    answer = time_response(net, 1e-3, 1e-5, [ob.NodeVoltage("m"), ob.ElementCurrent(sensed), ob.NodeVoltage("c")])
    assert np.abs(answer.samples[:, 0] - 2 * answer.samples[:, 1]).max() < 1e-12
    assert answer.samples[10, 2] == pytest.approx(1.604565789, abs=1e-9)  # the series circuit itself, at 100 µs


def test_capacitor_tied_to_another_by_a_buffer():
    """A buffer across a second capacitor leaves one state; its current is C dv/dt."""
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Ramp(1e3)),
            el.Resistor("R", "a", "b", 1e3),
            el.Capacitor("C1", "b", "0", 1e-6),
            el.VoltageByVoltage("E", "c", "0", ("b", "0"), 1.0),
            el.Capacitor("C2", "c", "0", 1e-6),
        ],
    )
    answer = time_response(net, 5e-3, 1e-4, [ob.NodeVoltage("b"), ob.ElementCurrent("C2")])
    rise = -np.expm1(-answer.time_s / 1e-3)
    assert np.abs(answer.samples[:, 0] - 1e3 * (answer.time_s - 1e-3 * rise)).max() < 1e-12
    assert np.abs(answer.samples[:, 1] - 1e-3 * rise).max() < 1e-14


def test_an_unstable_loop_says_how_fast_it_grows():
    net = Network(
        "0",
        [
            el.CurrentByVoltage("G", "0", "a", ("a", "0"), 1e-3),
            el.Capacitor("C", "a", "0", 1e-9),
            el.Resistor("R", "a", "0", 1e6),
        ],
    )
    with pytest.raises(InvalidRequest, match="unstable"):
        time_response(net, 1.0, 1e-3)
    answer = time_response(net, 1e-6, 1e-7, [ob.NodeVoltage("a")], {ob.ElementVoltage("C"): 1.0})
    assert answer.samples[-1, 0] == pytest.approx(np.exp(0.999e6 * 1e-6), rel=1e-12)


def test_random_active_networks_are_right_or_refused():
    """What is returned does not depend on the step; what cannot be trusted is not returned."""
    returned = 0
    for seed in range(30):
        base = networks.random_network(seed, "narrow", active=True)
        elements = [
            dataclasses.replace(e, waveform=wf.Step(1.0)) if isinstance(e, el.VoltageSource | el.CurrentSource) else e
            for e in base.elements
        ]
        network = Network(base.reference, elements)
        try:
            one, other = (time_response(network, 1e-3, 1e-3 / steps) for steps in (1, 100))
        except (InvalidRequest, AccuracyNotReached):
            continue
        returned += 1
        for k in range(len(other.observables)):
            same = isinstance(other.observables[k], ob.NodeVoltage)
            kind = [isinstance(item, ob.NodeVoltage) == same for item in other.observables]
            size = np.abs(other.samples[:, kind]).max()
            assert abs(one.samples[-1, k] - other.samples[-1, k]) <= 1e-6 * size, seed
    assert returned >= 8
