"""Time responses against closed forms, at any output step. All values derived: anyone can recompute them."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest
import scipy.linalg as sl

from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model import waveform as wf
from interwind.model.network import Network
from interwind.model.windings import WindingSet
from interwind_service.response.time import time_response

EXACT = 1e-9
STEPS_PER_CONSTANT = (1, 3, 10, 100, 1000)


def series_rl(waveform: wf.Waveform) -> Network:
    return Network(
        "0",
        [el.VoltageSource("V", "a", "0", waveform), el.Resistor("R", "a", "b", 5.0), el.Inductor("L", "b", "0", 0.02)],
    )


def rl_current(waveform: wf.Waveform, t: np.ndarray) -> np.ndarray:
    R, L = 5.0, 0.02
    tau = L / R
    if isinstance(waveform, wf.Step):
        late = np.maximum(t - waveform.at_s, 0.0)
        return waveform.value / R * -np.expm1(-late / tau)
    if isinstance(waveform, wf.Ramp):
        late = np.maximum(t - waveform.at_s, 0.0)
        return waveform.slope_per_s / R * (late + tau * np.expm1(-late / tau))
    if isinstance(waveform, wf.Sine):
        w = 2 * np.pi * waveform.frequency_hz
        phasor = waveform.amplitude * np.exp(1j * waveform.phase_rad) / (R + 1j * w * L)
        steady = waveform.offset / R
        return (phasor * np.exp(1j * w * t)).imag + steady - (phasor.imag + steady) * np.exp(-t / tau)
    if isinstance(waveform, wf.DoubleExponential):
        total = np.zeros_like(t)
        for sign, own in ((1.0, waveform.tail_s), (-1.0, waveform.front_s)):
            gain = waveform.amplitude / (R - L / own)
            total += sign * gain * (np.exp(-t / own) - np.exp(-t / tau))
        return total
    raise AssertionError(waveform)


@pytest.mark.parametrize("per_constant", STEPS_PER_CONSTANT)
@pytest.mark.parametrize(
    "waveform",
    [
        wf.Step(10.0),
        wf.Step(10.0, at_s=3.3e-3),
        wf.Ramp(2e3, at_s=1.234e-3),
        wf.Sine(7.0, 130.0, 0.4, offset=1.5),
        wf.DoubleExponential(10.0, 5e-3, 2e-4),
    ],
    ids=lambda w: f"{type(w).__name__}",
)
def test_any_step_is_exact(waveform, per_constant):
    """The current of R and L is the closed form to 1e-9 from 1 to 1000 steps a time constant."""
    tau = 4e-3
    answer = time_response(series_rl(waveform), 12 * tau, tau / per_constant, [ob.ElementCurrent("L")])
    expected = rl_current(waveform, answer.time_s)
    assert np.abs(answer.samples[:, 0] - expected).max() <= EXACT * np.abs(expected).max()
    assert answer.evidence.energy_error < 1e-12


@pytest.mark.parametrize("steps", [1, 7, 100, 4096, 50_000])
def test_trapezoid_between_samples_is_exact(steps):
    """Corners anywhere between samples: the sum of ramp responses, at any step."""
    train = wf.Trapezoid(
        low=-1.0, high=2.0, period_s=0.7e-3, rise_s=0.03e-3, high_s=0.21e-3, fall_s=0.05e-3, delay_s=0.11e-3
    )
    stop = 20e-3
    answer = time_response(series_rl(train), stop, stop / steps, [ob.ElementCurrent("L")])
    tau, R = 4e-3, 5.0
    corners, slopes, before = [], [], 0.0
    first = train.delay_s - train.period_s
    for n in range(32):
        for at, slope in (
            (0.0, 3.0 / train.rise_s),
            (train.rise_s, 0.0),
            (train.rise_s + train.high_s, -3.0 / train.fall_s),
            (train.rise_s + train.high_s + train.fall_s, 0.0),
        ):
            corners.append(first + n * train.period_s + at)
            slopes.append(slope - before)
            before = slope
    corners, slopes = np.array(corners), np.array(slopes)
    start = -1.0 + np.sum(slopes * np.maximum(-corners, 0.0))
    late = np.maximum(answer.time_s[:, None] - np.maximum(corners, 0.0), 0.0)
    past = (slopes * (corners < 0)).sum()
    slopes = np.where(corners < 0, 0.0, slopes)
    t = answer.time_s
    expected = start / R * -np.expm1(-t / tau) + past / R * (t + tau * np.expm1(-t / tau))
    expected = expected + (slopes / R * (late + tau * np.expm1(-late / tau))).sum(axis=1)
    assert np.abs(answer.samples[:, 0] - expected).max() <= EXACT * np.abs(expected).max()


def test_resonance_at_its_own_frequency():
    """A lossless L and C driven at resonance: v_C = (sin ωt − ωt cos ωt)/2, where a particular solution blows up."""
    L, C = 1e-3, 1e-6
    w = 1 / np.sqrt(L * C)
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Sine(1.0, w / (2 * np.pi))),
            el.Inductor("L", "a", "b", L),
            el.Capacitor("C", "b", "0", C),
        ],
    )
    answer = time_response(net, 2e-3, 2e-6, [ob.NodeVoltage("b")])
    x = w * answer.time_s
    expected = 0.5 * (np.sin(x) - x * np.cos(x))
    assert np.abs(answer.samples[:, 0] - expected).max() <= EXACT * np.abs(expected).max()


def test_decoupled_ladder_matches_the_matrix_exponential():
    """A driven ladder of R, L, C against the exponential of its hand-written state matrix."""
    n, R, L, C = 5, 2.0, 1e-3, 1e-6
    elements: list[el.Element] = [el.VoltageSource("V", "n0", "0", wf.Step(1.0))]
    for k in range(n):
        elements += [
            el.Inductor(f"L{k}", f"n{k}", f"m{k}", L),
            el.Resistor(f"R{k}", f"m{k}", f"n{k + 1}", R),
            el.Capacitor(f"C{k}", f"n{k + 1}", "0", C),
        ]
    A = np.zeros((2 * n, 2 * n))
    B = np.zeros(2 * n)
    B[0] = 1 / L
    for k in range(n):
        A[k, k] = -R / L
        A[k, n + k] = -1 / L
        A[n + k, k] = 1 / C
        if k:
            A[k, n + k - 1] = 1 / L
            A[n + k - 1, k] = -1 / C
    answer = time_response(Network("0", elements), 1e-3, 1e-5, [ob.NodeVoltage(f"n{k + 1}") for k in range(n)])
    rest = np.linalg.solve(A, -B)
    expected = np.array([(rest - sl.expm(A * t) @ rest)[n:] for t in answer.time_s])
    assert np.abs(answer.samples - expected).max() <= 1e-10


def test_loop_of_capacitors_and_an_ideal_source():
    """A step across two capacitors in series divides at once; the impulse is booked, half of its energy lost."""
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Step(10.0, at_s=1e-3)),
            el.Capacitor("C1", "a", "b", 1e-6),
            el.Capacitor("C2", "b", "0", 4e-6),
            el.Resistor("R", "b", "0", 1e3),
        ],
    )
    answer = time_response(net, 4e-3, 0.5e-3, [ob.NodeVoltage("b"), ob.ElementCurrent("C1")])
    late = answer.time_s - 1e-3
    expected = np.where(late >= 0, 2.0 * np.exp(-np.maximum(late, 0) / 5e-3), 0.0)
    assert np.abs(answer.samples[:, 0] - expected).max() < 1e-12
    assert answer.ledger.lost_in_jumps_j == pytest.approx(0.5 * 0.8e-6 * 100.0, rel=1e-12)
    assert answer.evidence.energy_error < 1e-13


def test_cutset_of_inductors_and_a_current_source():
    """A current ramp forced through an inductor: v = L di/dt, and a step books its flux."""
    net = Network("0", [el.CurrentSource("J", "0", "a", wf.Ramp(1e3)), el.Inductor("L", "a", "0", 1e-3)])
    answer = time_response(net, 1e-3, 1e-4, [ob.NodeVoltage("a"), ob.ElementCurrent("L")])
    assert np.abs(answer.samples[:, 0] - 1.0).max() < 1e-12
    assert np.abs(answer.samples[:, 1] - 1e3 * answer.time_s).max() < 1e-12
    jump = time_response(
        Network("0", [el.CurrentSource("J", "0", "a", wf.Step(2.0, at_s=5e-4)), el.Inductor("L", "a", "0", 1e-3)]),
        1e-3, 1e-4, [ob.ElementCurrent("L")],
    )  # fmt: skip
    assert jump.ledger.stored_change_j == pytest.approx(2e-3, rel=1e-12)
    assert jump.ledger.lost_in_jumps_j == pytest.approx(2e-3, rel=1e-12)


def test_perfect_coupling_is_an_ideal_transformer_with_magnetizing_inductance():
    """Rank-1 windings n = 2 with a load: i_load follows v/n² at once, the magnetizing current as in an L-R loop."""
    coils = WindingSet(("p", "s"), [[1e-3, 2e-3], [2e-3, 4e-3]])
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Step(1.0)),
            el.Resistor("Rs", "a", "b", 3.0),
            el.Windings("T", coils, {"p": ("b", "0"), "s": ("c", "0")}),
            el.Resistor("RL", "c", "0", 8.0),
        ],
    )
    answer = time_response(net, 5e-3, 1e-4, [ob.NodeVoltage("c"), ob.NodeVoltage("b")])
    referred = 8.0 / 4
    parallel = 3.0 * referred / (3.0 + referred)
    v = referred / (3.0 + referred) * np.exp(-parallel / 1e-3 * answer.time_s)
    assert np.abs(answer.samples[:, 1] - v).max() < 1e-12
    assert np.abs(answer.samples[:, 0] - 2 * v).max() < 1e-12


def test_ideal_transformer_carries_a_ratio():
    """A capacitor behind an ideal transformer is referred by the square of the ratio."""
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Step(1.0)),
            el.Resistor("R", "a", "b", 1e3),
            el.IdealTransformer("X", "b", "0", "c", "0", 0.1),
            el.Capacitor("C", "c", "0", 1e-6),
        ],
    )
    answer = time_response(net, 4e-5, 1e-6, [ob.NodeVoltage("c"), ob.NodeVoltage("b")])
    expected = -np.expm1(-answer.time_s / (1e3 * 1e-6 / 0.1**2))  # C referred to b: C / ratio² = 100 µF
    assert np.abs(answer.samples[:, 1] - expected).max() < 1e-12
    assert np.abs(answer.samples[:, 0] - 10 * expected).max() < 1e-11


@pytest.mark.parametrize("chop_s", [3.3e-6, 5e-6])
def test_chopped_impulse_falls_to_nothing(chop_s):
    """Across a resistor the voltage is the wave itself: the full wave to the chop, a straight fall, then 0."""
    wave = wf.StandardImpulse(wf.ImpulseShape.LIGHTNING_1_2_50, 100.0, chopped_at_s=chop_s, collapse_s=0.2e-6)
    full = dataclasses.replace(wave, chopped_at_s=None)
    samples = []
    for shape in (wave, full):
        net = Network("0", [el.VoltageSource("V", "a", "0", shape), el.Resistor("R", "a", "0", 1.0)])
        samples.append(time_response(net, 10e-6, 0.05e-6, [ob.NodeVoltage("a")]).samples[:, 0])
    t = 0.05e-6 * np.arange(201)
    before, after = t < chop_s - 1e-12, t > chop_s + 0.2e-6 - 1e-12
    assert np.abs(samples[0][before] - samples[1][before]).max() < 1e-11
    assert np.abs(samples[0][after]).max() < 1e-10
    assert samples[1].max() == pytest.approx(100.0, rel=1e-3)
