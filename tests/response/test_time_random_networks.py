"""Random networks over twelve decades of element values: no step shows in the response, and its energy closes."""

from __future__ import annotations

import dataclasses
import importlib.util
from pathlib import Path

import numpy as np
import pytest

from interwind.errors import InvalidNetwork
from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model import waveform as wf
from interwind.model.network import Network
from interwind_service.response.frequency import frequency_response
from interwind_service.response.time import time_response

_spec = importlib.util.spec_from_file_location("random_networks", Path(__file__).with_name("random_networks.py"))
networks = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(networks)

STOP_S = 1e-3


def driven(network: Network, waveform: wf.Waveform) -> Network:
    elements = [
        dataclasses.replace(e, waveform=waveform) if isinstance(e, el.VoltageSource | el.CurrentSource) else e
        for e in network.elements
    ]
    return Network(network.reference, elements)


def solved(network: Network, steps: int):
    try:
        return time_response(network, STOP_S, STOP_S / steps)
    except InvalidNetwork:
        return None


def gap(one: np.ndarray, other: np.ndarray, answer) -> float:
    """Largest difference over the largest value of the run, voltages and currents each in their own unit."""
    voltages = np.array([isinstance(item, ob.NodeVoltage) for item in answer.observables])
    worst = 0.0
    for kind in (voltages, ~voltages):
        size = np.abs(answer.samples[:, kind]).max(initial=0.0)
        if size > 0.0:
            worst = max(worst, float(np.abs(one[kind] - other[kind]).max()) / size)
    return worst


WAVES = {
    "step": wf.Step(1.0),
    "sine": wf.Sine(1.0, 1e4, 0.3),
    "train": wf.Trapezoid(low=-1.0, high=1.0, period_s=1e-4, rise_s=1e-6, high_s=3e-5, fall_s=0.0),
}


@pytest.mark.parametrize("wave", WAVES)
@pytest.mark.parametrize("spread", ["narrow", "wide"])
def test_the_step_does_not_matter(spread, wave):
    """1, 30 and 1000 steps agree at both ends to 1e-9 of the peak, and every ledger closes."""
    checked = 0
    for seed in range(16):
        network = driven(networks.random_network(seed, spread), WAVES[wave])
        fine = solved(network, 1000)
        if fine is None:
            continue
        checked += 1
        assert fine.evidence.energy_error < 1e-6, seed
        for steps in (1, 30):
            coarse = solved(network, steps)
            assert gap(coarse.samples[0], fine.samples[0], fine) < 1e-9, seed
            assert gap(coarse.samples[-1], fine.samples[-1], fine) < 1e-9, seed
    assert checked >= 14


def test_late_response_is_the_phasor():
    """When all modes have died out, the response to a sine is the sinusoidal steady state."""
    checked = 0
    for seed in range(40):
        network = networks.random_network(seed, "narrow")
        elements = []
        frequency_hz = 1e4
        for e in network.elements:
            if isinstance(e, el.VoltageSource | el.CurrentSource):
                wave = wf.Sine(abs(e.phasor), frequency_hz, float(np.angle(e.phasor)))
                e = dataclasses.replace(e, waveform=wave)
            elements.append(e)
        network = Network(network.reference, elements)
        try:
            late = time_response(network, 10.0, 10.0, None)
            steady = frequency_response(network, [frequency_hz])
        except InvalidNetwork:
            continue
        half = time_response(network, 10.0 + 0.5 / frequency_hz, 10.0 + 0.5 / frequency_hz, None)
        earlier = time_response(network, 9.0, 9.0, None)
        if gap(late.samples[-1], earlier.samples[-1], late) > 1e-9:
            continue  # an undamped mode rings for ever
        alternating = 0.5 * (late.samples[-1] - half.samples[-1])  # a lossless loop keeps its offset for ever
        checked += 1
        phasor = steady.samples[0].imag  # sin(2 pi f t) is 0 at t = 10 s: the value is the imaginary part
        for kind in (True, False):
            own = [k for k, item in enumerate(late.observables) if isinstance(item, ob.NodeVoltage) == kind]
            if own:
                size = np.abs(steady.samples[0, own]).max()
                assert np.abs(alternating[own] - phasor[own]).max() <= 1e-8 * size, seed
    assert checked >= 12


def test_the_singular_are_named():
    """Two ideal sources in parallel: refused with the elements at fault."""
    two = Network(
        "0", [el.VoltageSource("V1", "a", "0"), el.VoltageSource("V2", "a", "0"), el.Resistor("R", "a", "0", 1.0)]
    )
    with pytest.raises(InvalidNetwork, match="V1, V2"):
        time_response(two, 1e-3, 1e-4)


def test_inputs_are_not_changed():
    """A second run of the same network gives the same bits."""
    network = driven(networks.random_network(3, "wide"), WAVES["train"])
    one, other = (time_response(network, STOP_S, STOP_S / 100) for _ in range(2))
    assert np.array_equal(one.samples, other.samples)
    assert one.ledger == other.ledger


def test_what_the_sources_see_is_reciprocal_and_passive():
    """On the real axis the transfer matrix is symmetric up to sign and positive, and the evidence says so."""
    for spread in ("narrow", "wide"):
        for seed in range(8):
            answer = solved(driven(networks.random_network(seed, spread), WAVES["step"]), 10)
            if answer is not None:
                assert answer.evidence.reciprocity_error < 1e-12, (spread, seed)
                assert answer.evidence.passivity_margin > -1e-12, (spread, seed)
