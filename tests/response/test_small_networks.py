"""Networks of one to four elements on three nodes, drawn at random: every call answers them or refuses them by type.

They are full of what larger networks seldom have: no state, no source, no unknown, both ends on one node.
"""

from __future__ import annotations

import random

import numpy as np
import pytest

import interwind as iw
from interwind_service import engine

NODES = ("g", "a", "b")
PAIR = iw.WindingSet(("x", "y"), [[1e-3, 0.5e-3], [0.5e-3, 2e-3]], [0.1, 0.2])
PERFECT = iw.WindingSet(("x", "y"), [[1e-3, 2e-3], [2e-3, 4e-3]])
PALETTE = (
    lambda name, a, b: iw.Resistor(name, a, b, 2.0),
    lambda name, a, b: iw.Resistor(name, a, b, 0.0),
    lambda name, a, b: iw.Inductor(name, a, b, 1e-3),
    lambda name, a, b: iw.Capacitor(name, a, b, 1e-6),
    lambda name, a, b: iw.VoltageSource(name, a, b, iw.Sine(1.0, 50.0), 1.0),
    lambda name, a, b: iw.CurrentSource(name, a, b, iw.Step(1.0), 1.0),
    lambda name, a, b: iw.Switch(name, a, b, iw.Gate(0.02, 0.01)),
    lambda name, a, b: iw.Windings(name, PAIR, {"x": (a, "g"), "y": (b, "g")}),
    lambda name, a, b: iw.Windings(name, PERFECT, {"x": (a, b), "y": ("g", b)}),
    lambda name, a, b: iw.IdealTransformer(name, a, "g", b, "g", 2.0),
)
DEVICES = (
    lambda name, a, b: iw.Diode(name, a, b),
    lambda name, a, b: iw.Diode(name, a, b, saturation_current_a=1e-9, thermal_voltage_v=0.026),
    lambda name, a, b: iw.SaturableInductor(name, a, b, [-1.0, 0.0, 1.0], [-0.1, 0.0, 0.1]),
)
MANY = np.concatenate(([0.0], np.geomspace(1.0, 1e6, 60)))
FREQUENCY = {
    "many": lambda net: engine.frequency_response(net, MANY),
    "few": lambda net: engine.frequency_response(net, [0.0, 10.0]),
    "adaptive": lambda net: engine.frequency_response(net, iw.AdaptiveSweep(1.0, 1e5)),
    "poles": engine.poles,
    "ports": lambda net: engine.port_response(net, MANY),
    "stamp": engine.stamp,
}
TIME = {
    "rest": lambda net: engine.time_response(net, 1e-3, 1e-4),
    "steady": lambda net: engine.time_response(net, 1e-3, 1e-4, initial=iw.SteadyStart()),
    "recording": lambda net: engine.time_response(net, 1e-3, 1e-4, recording=iw.Recording(2e-4, envelope=True)),
    "periodic": lambda net: engine.periodic_response(net, 0.02, 1e-3),
}


def networks(seed, count, palette):
    """Draw networks; one element in fifteen has both ends on one node."""
    rng = random.Random(seed)
    for _ in range(count):
        elements = []
        for position in range(rng.choice((1, 2, 2, 3, 3, 4))):
            ends = rng.sample(NODES, 2) if rng.random() < 0.93 else [rng.choice(NODES)] * 2
            elements.append(rng.choice(palette)(f"e{position}", *ends))
        ports = [iw.Port("p", *rng.sample(NODES, 2), 50.0)] if rng.random() < 0.5 else []
        yield iw.Network("g", elements, ports)


def answered(calls, network):
    """How many of the calls are answered; the others must be refused by type, bad input with the field at fault."""
    refusals = []
    for call in calls.values():
        try:
            call(network)
        except (iw.InvalidRequest, iw.AccuracyNotReached) as refusal:
            refusals.append(refusal)
    assert all(refusal.violations for refusal in refusals if isinstance(refusal, iw.InvalidRequest)), network
    return len(calls) - len(refusals)


def drawn(few, many):
    """A few networks in every run, many with --long."""
    marks = [pytest.mark.long, pytest.mark.timeout(1800)]
    return pytest.mark.parametrize(("seed", "count"), [(0, few), pytest.param(1, many, marks=marks)])


@drawn(100, 2000)
def test_over_frequency(seed, count):
    """Drawn with switches, which stand as at 0 s; a quarter of the calls at least is answered."""
    assert sum(answered(FREQUENCY, net) for net in networks(seed, count, PALETTE)) > count * len(FREQUENCY) / 4


@drawn(40, 600)
def test_over_time(seed, count):
    """Drawn with ideal and exponential diodes and saturable branches, too."""
    assert sum(answered(TIME, net) for net in networks(seed, count, PALETTE + DEVICES)) > count * len(TIME) / 4


@pytest.mark.parametrize(
    "source", [iw.VoltageSource("s", "a", "g", phasor=1.0), iw.CurrentSource("s", "g", "a", phasor=1.0)]
)
def test_no_state_and_many_frequencies(source):
    """2 ohm across 1 V or 1 A, however many frequencies: nothing stores energy, so nothing is there to reduce."""
    net = iw.Network("g", [source, iw.Resistor("R", "a", "g", 2.0)])
    volts = 1.0 if isinstance(source, iw.VoltageSource) else 2.0
    wave = engine.frequency_response(net, MANY[1:], [iw.NodeVoltage("a")])
    assert wave[iw.NodeVoltage("a")] == pytest.approx(np.full(60, volts), rel=1e-15)
    assert engine.poles(net).pole_per_s.size == 0
