"""Recordings: window, decimation, envelope and figures; long runs in bounded memory."""

from __future__ import annotations

import tracemalloc

import numpy as np
import pytest

from interwind.errors import InvalidRequest
from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model import waveform as wf
from interwind.model.network import Network
from interwind.model.recording import Recording
from interwind_service.response.time import time_response

OBSERVE = [ob.NodeVoltage("c"), ob.ElementCurrent("L"), ob.ElementPower("R")]


def ringing(waveform: wf.Waveform) -> Network:
    return Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", waveform),
            el.Resistor("R", "a", "b", 10.0),
            el.Inductor("L", "b", "c", 1e-3),
            el.Capacitor("C", "c", "0", 1e-6),
        ],
    )


TRAIN = wf.Trapezoid(low=0.0, high=1.0, period_s=0.37e-3, rise_s=1e-6, high_s=0.1e-3, fall_s=0.0)


@pytest.mark.parametrize("waveform", [wf.Step(1.0), wf.Sine(1.0, 3e3), TRAIN], ids=["step", "sine", "train"])
def test_a_window_is_a_part_of_the_whole(waveform):
    """Every third sample from 0.5 to 3 ms, with the envelope of those between, and the same ledger."""
    whole = time_response(ringing(waveform), 4e-3, 1e-6, OBSERVE)
    part = time_response(
        ringing(waveform), 4e-3, 1e-6, OBSERVE, recording=Recording(0.5e-3, 3e-3, every=3, envelope=True)
    )
    own = whole.samples[500:3001]
    size = np.abs(whole.samples).max(axis=0)
    assert len(part.time_s) == 834
    assert np.array_equal(part.time_s, whole.time_s[500:3001:3])
    assert (np.abs(part.samples - own[::3]) / size).max() < 1e-12
    low = np.array([own[k : k + 3].min(axis=0) for k in range(0, len(own), 3)])
    high = np.array([own[k : k + 3].max(axis=0) for k in range(0, len(own), 3)])
    assert (np.abs(part.lowest - low) / size).max() < 1e-12
    assert (np.abs(part.highest - high) / size).max() < 1e-12
    assert part.ledger.supplied_j == pytest.approx(whole.ledger.supplied_j, rel=1e-12)
    where = np.abs(own).argmax(axis=0)
    assert part.figures.peaks == pytest.approx(own[where, [0, 1, 2]], rel=1e-12)
    assert part.figures.peak_times_s == pytest.approx(whole.time_s[500 + where])


@pytest.mark.parametrize("step_s", [1e-3, 1e-4, 1e-6])
def test_mean_and_rms_are_those_of_the_exact_solution(step_s):
    """Over whole periods of the late response to a sine: RMS = |phasor|/√2 at any step, mean 0 (derived)."""
    net = ringing(wf.Sine(1.0, 2e3))
    answer = time_response(net, 12e-3, step_s, OBSERVE[:2], recording=Recording(from_s=8e-3))
    w = 2 * np.pi * 2e3
    impedance = 10.0 + 1j * w * 1e-3 + 1 / (1j * w * 1e-6)
    expected = [abs(1 / (1j * w * 1e-6) / impedance) / np.sqrt(2), abs(1 / impedance) / np.sqrt(2)]
    assert answer.figures.rmses == pytest.approx(expected, rel=1e-9)
    assert np.abs(answer.figures.means).max() < 1e-9


def test_mean_of_a_charging_capacitor():
    """R-C step: mean of 1 − e^(−t/τ) over five time constants is 1 − (1 − e^(−5))/5 (derived)."""
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Step(1.0)),
            el.Resistor("R", "a", "b", 1e3),
            el.Capacitor("C", "b", "0", 1e-6),
        ],
    )
    answer = time_response(net, 5e-3, 5e-3, [ob.NodeVoltage("b")], recording=Recording())
    assert answer.figures.means[0] == pytest.approx(1 + np.expm1(-5.0) / 5, rel=1e-12)


def test_long_records_are_streamed_in_bounded_memory():
    """Two million samples pass through the sink, in order, while a few megabytes are held."""
    seen = {"next": 0, "sum": 0.0}

    def sink(first: int, rows: np.ndarray) -> None:
        assert first == seen["next"]
        seen["next"] += len(rows)
        seen["sum"] += float(rows.sum())

    network = ringing(wf.Sine(1.0, 3e3))
    time_response(network, 1e-3, 1e-7, OBSERVE[:2], sink=lambda first, rows: None)  # loads what it needs
    tracemalloc.start()
    answer = time_response(network, 0.2, 1e-7, OBSERVE[:2], sink=sink)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert seen["next"] == 2_000_001
    assert answer.samples.shape == (0, 2)
    assert answer.evidence.energy_error < 1e-9
    assert peak < 40e6


def test_a_decimated_record_needs_no_memory_for_the_rest():
    """A grid of a hundred million values is refused whole, and recorded every 1000th sample."""
    network = ringing(wf.Step(1.0))
    with pytest.raises(InvalidRequest) as caught:
        time_response(network, 40.0, 1e-6, OBSERVE[:2])
    assert caught.value.violations[0].field == "observe"
    answer = time_response(network, 2.0, 1e-6, OBSERVE[:2], recording=Recording(every=1000))
    assert answer.samples.shape == (2001, 2)


@pytest.mark.parametrize(
    ("recording", "field"),
    [
        (Recording(from_s=-1.0), "recording.from_s"),
        (Recording(from_s=0.5e-6), "recording.from_s"),
        (Recording(until_s=9.0), "recording.until_s"),
        (Recording(from_s=2e-3, until_s=1e-3), "recording.until_s"),
        (Recording(until_s=float("nan")), "recording.until_s"),
    ],
)
def test_windows_off_the_grid_are_refused(recording, field):
    with pytest.raises(InvalidRequest) as caught:
        time_response(ringing(wf.Step(1.0)), 4e-3, 1e-6, OBSERVE, recording=recording)
    assert caught.value.violations[0].field == field


def test_decimation_is_a_whole_number():
    with pytest.raises(InvalidRequest):
        Recording(every=0)
