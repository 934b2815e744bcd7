"""Recordings of switched and nonlinear runs: window, decimation, envelope, exact figures, pieces handed over."""

from __future__ import annotations

import tracemalloc

import numpy as np
import pytest

import interwind as iw
from interwind_service.response.time import time_response

T = 1e-5
OBSERVE = [iw.NodeVoltage("x"), iw.ElementCurrent("L"), iw.ElementPower("R")]
SMOOTH = {"saturation_current_a": 1e-9, "thermal_voltage_v": 0.026}


def chopper(**law: float) -> iw.Network:
    return iw.Network(
        "g",
        [
            iw.VoltageSource("E", "in", "g", iw.Constant(10.0)),
            iw.Switch("S", "in", "x", iw.Gate(T, 0.413 * T), 0.01, 1e6),
            iw.Diode("D", "g", "x", **law),
            iw.Inductor("L", "x", "o", 1e-4),
            iw.Capacitor("C", "o", "g", 1e-6),
            iw.Resistor("R", "o", "g", 5.0),
        ],
    )


def rectifier(**law: float) -> iw.Network:
    return iw.Network(
        "g",
        [
            iw.VoltageSource("line", "a", "g", iw.Sine(100.0, 1.0 / T)),
            iw.Diode("D", "a", "b", **law),
            iw.Resistor("R", "b", "g", 50.0),
            *([iw.Capacitor("stray", "b", "g", 1e-9)] if law else []),
        ],
    )


@pytest.mark.parametrize("law", [{}, SMOOTH], ids=["straight", "exponential"])
def test_a_window_is_a_part_of_the_whole(law):
    """Every third sample from 2 to 8 periods, the envelope of those between, the same events and ledger."""
    step_s = T / 50
    whole = time_response(chopper(**law), 10 * T, step_s, OBSERVE)
    part = time_response(
        chopper(**law), 10 * T, step_s, OBSERVE, recording=iw.Recording(2 * T, 8 * T, 3, envelope=True)
    )
    own = whole.samples[100:401]
    assert part.time_s == pytest.approx(whole.time_s[100:401:3], rel=1e-14)
    assert np.array_equal(part.samples, own[::3])
    assert np.array_equal(part.lowest, [own[k : k + 3].min(axis=0) for k in range(0, 301, 3)])
    assert np.array_equal(part.highest, [own[k : k + 3].max(axis=0) for k in range(0, 301, 3)])
    assert part.events == whole.events
    assert part.ledger == whole.ledger
    assert part.cautions == whole.cautions


@pytest.mark.parametrize("start", [0, 1, 2])
def test_figures_of_a_half_wave_are_exact_at_any_step(start):
    """Mean Vm/π, RMS Vm/2, peak Vm at a quarter period, over any whole period, though three samples miss the crest."""
    out, power = iw.NodeVoltage("b"), iw.ElementPower("R")
    recording = iw.Recording(start * T / 3, start * T / 3 + T)
    figures = time_response(rectifier(), 2 * T, T / 3, [out, power], recording=recording).figures
    crest = T / 4 if start == 0 else 1.25 * T
    assert figures.means == pytest.approx([100.0 / np.pi, 50.0], rel=1e-8)  # 100² / (4 · 50) W
    assert figures.rmses == pytest.approx([50.0, 200.0 * np.sqrt(3.0 / 16.0)], rel=1e-8)  # mean sin⁴ = 3/8, half of it
    assert figures.peaks == pytest.approx([100.0, 200.0], rel=1e-8)
    assert figures.peak_times_s == pytest.approx([crest, crest], rel=1e-5)


def test_figures_of_a_smooth_run_are_those_of_its_dense_output():
    """Two windows add up to one, and samples a hundred times denser give the same figures to their own error."""
    net, out = rectifier(**SMOOTH), [iw.NodeVoltage("b")]

    def figures(first: float, last: float, step_s: float = T / 4):
        return time_response(net, 2 * T, step_s, out, recording=iw.Recording(first, last)).figures

    whole, one, other = figures(0.0, 2 * T), figures(0.0, T / 2), figures(T / 2, 2 * T)
    assert whole.means == pytest.approx(0.25 * one.means + 0.75 * other.means, rel=1e-9)
    assert whole.rmses**2 == pytest.approx(0.25 * one.rmses**2 + 0.75 * other.rmses**2, rel=1e-9)
    dense = time_response(net, 2 * T, T / 4000, out).samples[:, 0]
    assert whole.means[0] == pytest.approx(dense[:-1].mean(), rel=1e-5)
    assert whole.rmses[0] == pytest.approx(np.sqrt(np.mean(dense[:-1] ** 2)), rel=1e-5)
    assert whole.peaks[0] == pytest.approx(dense.max(), rel=1e-6)


def test_what_is_undefined_in_the_window_has_no_figures():
    """A node behind open switches is NaN for a stretch: figures over it are NaN, before it they are not."""
    net = iw.Network(
        "g",
        [
            iw.VoltageSource("E", "in", "g", iw.Constant(10.0)),
            iw.Switch("one", "in", "a", iw.GateTimes([T], initially_closed=True)),
            iw.Switch("other", "a", "b", iw.GateTimes([], initially_closed=False)),
            iw.Resistor("R", "b", "g", 5.0),
        ],
    )
    a = [iw.NodeVoltage("a")]
    before = time_response(net, 2 * T, T / 10, a, recording=iw.Recording(0.0, T / 2)).figures
    across = time_response(net, 2 * T, T / 10, a, recording=iw.Recording(0.0, 2 * T)).figures
    assert before.rmses == pytest.approx([10.0])
    assert np.isnan(across.rmses).all()


def test_long_runs_are_handed_over_in_pieces():
    """Half a million samples of a switched run pass through the sink, in order, while a few megabytes are held."""
    seen = {"next": 0, "largest": 0}

    def sink(first: int, rows: np.ndarray) -> None:
        assert first == seen["next"]
        seen["next"] += len(rows)
        seen["largest"] = max(seen["largest"], len(rows))

    net = chopper()
    time_response(net, T, T / 10, OBSERVE[:2])  # loads what it needs
    tracemalloc.start()
    answer = time_response(net, 50 * T, T / 10_000, OBSERVE[:2], sink=sink)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert seen["next"] == 500_001
    assert seen["largest"] < 50_000
    assert len(answer.samples) == 0
    assert peak < 24e6


def test_samples_of_smooth_laws_are_held_until_the_ledger_closes():
    """So more than a response may hold is refused, and a decimated record of the same run is not."""
    net = rectifier(**SMOOTH)
    with pytest.raises(iw.InvalidRequest) as refused:
        time_response(net, T, T / 2e8, [iw.NodeVoltage("b")], sink=lambda first, rows: None)
    assert refused.value.violations[0].field == "observe"
    answer = time_response(net, T, T / 1e4, [iw.NodeVoltage("b")], recording=iw.Recording(every=1000))
    assert answer.samples.shape == (11, 1)
