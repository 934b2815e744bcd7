"""Sampled records: a corner at every sample, on the grid, between its points, and both in one run."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import signal

from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model import waveform as wf
from interwind.model.network import Network
from interwind_service.response.time import time_response

STEP_S, STEPS = 1e-6, 6000
R, L, C = 20.0, 1e-3, 1e-7
OBSERVE = [ob.NodeVoltage("c"), ob.ElementCurrent("L")]


def ringing(first: wf.Waveform, second: wf.Waveform | None = None) -> Network:
    return Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", first),
            el.Resistor("R", "a", "b", R),
            el.Inductor("L", "b", "c", L),
            el.Capacitor("C", "c", "0", C),
            el.CurrentSource("J", "0", "c", second),
        ],
    )


def run(*waveforms: wf.Waveform, step_s: float = STEP_S):
    answer = time_response(ringing(*waveforms), STEPS * STEP_S, step_s, OBSERVE)
    assert answer.evidence.energy_error < 1e-11
    return answer.samples


def noise(seed: int) -> np.ndarray:
    return np.random.default_rng(seed).standard_normal(STEPS + 1)


def test_a_record_on_the_grid_is_the_first_order_hold():
    """scipy.signal.lsim takes its input as straight lines between samples, exactly (reference library)."""
    A = [[-R / L, -1 / L], [1 / C, 0.0]]
    value = noise(0)
    system = (A, [[1 / L], [0.0]], [[0.0, 1.0], [1.0, 0.0]], np.zeros((2, 1)))
    _, expected, _ = signal.lsim(system, value, STEP_S * np.arange(STEPS + 1))
    samples = run(wf.SampledRecord(STEP_S, value))
    assert np.abs(samples - expected).max() < 1e-12 * np.abs(expected).max()


@pytest.mark.parametrize("coarser", [1.5, 4.0], ids=["between the points", "several a step"])
def test_the_output_grid_changes_nothing(coarser):
    """Corners inside steps give the samples that corners on the grid give."""
    record = wf.SampledRecord(STEP_S, noise(1))
    fine, coarse = run(record), run(record, step_s=coarser * STEP_S)
    common = round(2 * coarser)
    gap = np.abs(fine[::common] - coarse[::2])
    assert gap.max() < 1e-11 * np.abs(fine).max()


def test_jumps_on_the_grid():
    """A staircase of random levels is the sum of its steps (superposition)."""
    rng = np.random.default_rng(2)
    at, height = np.sort(rng.choice(STEPS, 40, replace=False)) * STEP_S, rng.standard_normal(40)
    level = np.concatenate([[0.0], np.cumsum(height)])
    time_s = np.repeat(at, 2)
    staircase = wf.PiecewiseLinear(time_s, np.repeat(level, 2)[1:-1])
    expected = sum(run(wf.Step(h, t)) for h, t in zip(height.tolist(), at.tolist(), strict=True))
    assert np.abs(run(staircase) - expected).max() < 1e-11 * np.abs(expected).max()


def test_corners_on_the_grid_beside_corners_between_its_points():
    """Two sources at once are the sum of each alone: the one's corners lie on the grid, the other's in some steps."""
    record = wf.SampledRecord(STEP_S, noise(3))
    train = wf.Trapezoid(low=0.0, high=0.01, period_s=0.37e-3, rise_s=1.3e-6, high_s=0.1e-3, fall_s=0.0)
    expected = run(record) + run(wf.Step(0.0), train)
    assert np.abs(run(record, train) - expected).max() < 1e-11 * np.abs(expected).max()
