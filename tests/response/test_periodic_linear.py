"""Periodic steady state of linear networks: closed forms, the phasor, and states that do not exist."""

from __future__ import annotations

import dataclasses
import importlib.util
from pathlib import Path

import numpy as np
import pytest

from interwind.errors import AccuracyNotReached
from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model import waveform as wf
from interwind.model.network import Network
from interwind.model.windings import WindingSet
from interwind_service.response.frequency import frequency_response
from interwind_service.response.periodic import periodic_response
from interwind_service.response.time import time_response

_spec = importlib.util.spec_from_file_location("random_networks", Path(__file__).with_name("random_networks.py"))
networks = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(networks)


def test_sine_with_offset_is_the_phasor():
    """Series R L C: harmonic 1, RMS, mean, peak and mean power against the phasor (derived)."""
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Sine(1.0, 1e3, 0.2, offset=0.5)),
            el.Resistor("R", "a", "b", 10.0),
            el.Inductor("L", "b", "c", 1e-3),
            el.Capacitor("C", "c", "0", 1e-6),
        ],
    )
    current, voltage, power = ob.ElementCurrent("L"), ob.NodeVoltage("c"), ob.ElementPower("R")
    answer = periodic_response(net, 1e-3, 1e-4, [current, voltage, power])
    w = 2 * np.pi * 1e3
    phasor = np.exp(1j * (0.2 - np.pi / 2)) / (10.0 + 1j * w * 1e-3 + 1 / (1j * w * 1e-6))
    size = abs(phasor)
    assert abs(answer.harmonics(current, 1)[0] - phasor) < 1e-12 * size
    assert answer.rms(current) == pytest.approx(size / np.sqrt(2), rel=1e-12)
    assert answer.mean(voltage) == pytest.approx(0.5, rel=1e-12)
    assert answer.peak(current) == pytest.approx(-size, rel=1e-9) or answer.peak(current) == pytest.approx(
        size, rel=1e-9
    )
    assert answer.mean(power) == pytest.approx(5.0 * size**2, rel=1e-12)
    assert abs(answer.harmonics(power, 2)[1] - 5.0 * phasor**2) < 1e-12 * size**2
    assert answer.mean_power_w["V"] == pytest.approx(-5.0 * size**2, rel=1e-12)
    assert abs(sum(answer.mean_power_w.values())) < 1e-12 * size**2


def test_square_wave_into_r_l():
    """Peak at the falling edge between samples, harmonics of the square wave through 1/(R + jωL) (derived)."""
    wave = wf.Trapezoid(low=0, high=1, period_s=1e-3, rise_s=0, high_s=0.3e-3, fall_s=0, delay_s=0.123e-3)
    net = Network(
        "0",
        [el.VoltageSource("V", "a", "0", wave), el.Resistor("R", "a", "b", 10.0), el.Inductor("L", "b", "0", 1e-3)],
    )
    current, voltage = ob.ElementCurrent("L"), ob.NodeVoltage("a")
    answer = periodic_response(net, 1e-3, 1e-5, [current, voltage])
    jw = 2j * np.pi * 1e3 * np.arange(1, 21)
    square = 2e3 * (np.exp(-jw * 0.123e-3) - np.exp(-jw * 0.423e-3)) / jw
    assert np.abs(answer.harmonics(voltage, 20) - square).max() < 1e-13
    assert np.abs(answer.harmonics(current, 20) - square / (10.0 + jw * 1e-3)).max() < 1e-14
    assert answer.peak(current) == pytest.approx(0.1 * np.expm1(-3.0) / np.expm1(-10.0), rel=1e-12)
    assert answer.peak_time_s(current) == pytest.approx(0.423e-3, rel=1e-9)
    assert answer.mean(current) == pytest.approx(0.03, rel=1e-12)
    assert answer.rms(voltage) == pytest.approx(np.sqrt(0.3), rel=1e-12)
    assert np.abs(answer.multipliers - np.exp(-10.0)).max() < 1e-15


def test_high_quality_link_from_one_factorisation():
    """A resonant link of Q = 300 that rings for 660 periods: one period gives what waiting 3000 periods gives."""
    f, L, Q = 100e3, 24e-6, 300.0
    w = 2 * np.pi * f
    coils = WindingSet.from_coupling(("tx", "rx"), [L, L], [[1.0, 0.01], [0.01, 1.0]], w * L / Q)
    square = wf.Trapezoid(low=-10, high=10, period_s=1 / f, rise_s=0, high_s=0.5 / f, fall_s=0)
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", square),
            el.Capacitor("C1", "a", "b", 1 / (w * w * L)),
            el.Windings("T", coils, {"tx": ("b", "0"), "rx": ("c", "0")}),
            el.Capacitor("C2", "c", "d", 1 / (w * w * L)),
            el.Resistor("load", "d", "0", 0.05),
        ],
    )
    observe = [ob.WindingCurrent("T", "tx"), ob.WindingCurrent("T", "rx")]
    answer = periodic_response(net, 1 / f, 0.01 / f, observe)
    assert answer.evidence.periods_propagated <= 3
    assert 0.98 < abs(answer.multipliers[0]) < 1.0
    waited = time_response(net, 3000 / f, 0.01 / f, observe)
    last = waited.samples[-101:]
    assert np.abs(answer.samples - last).max() < 1e-8 * np.abs(last).max()
    supplied = -answer.mean_power_w["V"]
    assert answer.mean_power_w["T"] + answer.mean_power_w["load"] == pytest.approx(supplied, rel=1e-10)


def test_random_networks_agree_with_the_phasor():
    """Over twelve decades of element values the first harmonic is the solution at that frequency."""
    for spread in ("narrow", "wide"):
        for seed in range(20):
            base = networks.random_network(seed, spread)
            elements = [
                dataclasses.replace(e, waveform=wf.Sine(1.0, 1e4), phasor=-1j)
                if isinstance(e, el.VoltageSource | el.CurrentSource)
                else e
                for e in base.elements
            ]
            network = Network(base.reference, elements)
            steady = frequency_response(network, [1e4])
            answer = periodic_response(network, 1e-4, 1e-5)
            for kind in (True, False):
                own = [k for k, o in enumerate(answer.observables) if isinstance(o, ob.NodeVoltage) == kind]
                if own:
                    gap = np.abs(answer.harmonic_values[own, 0] - steady.samples[0, own]).max()
                    assert gap <= 1e-8 * np.abs(steady.samples[0, own]).max(), (spread, seed)


def test_a_mean_that_nothing_holds_back_is_no_periodic_state():
    """A mean voltage across an inductor alone, and a lossless circuit driven at its own frequency."""
    net = Network(
        "0", [el.VoltageSource("V", "a", "0", wf.Sine(1.0, 1e3, offset=0.1)), el.Inductor("L", "a", "0", 1e-3)]
    )
    with pytest.raises(AccuracyNotReached) as caught:
        periodic_response(net, 1e-3, 1e-5)
    assert caught.value.reason == "NOT_PERIODIC"
    L = 1e-3
    resonant = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Sine(1.0, 1e3)),
            el.Inductor("L", "a", "b", L),
            el.Capacitor("C", "b", "0", 1 / ((2 * np.pi * 1e3) ** 2 * L)),
        ],
    )
    with pytest.raises(AccuracyNotReached) as caught:
        periodic_response(resonant, 1e-3, 1e-5)
    assert caught.value.reason == "NOT_PERIODIC"
