"""Area D, the standard impulses: what a resistor sees of them, measured as the standards say."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw

MICRO = 1e-6


def seen(solver, wave, stop_s: float, step_s: float) -> tuple[np.ndarray, np.ndarray]:
    net = iw.Network("0", [iw.VoltageSource("V", "a", "0", wave), iw.Resistor("R", "a", "0", 50.0)])
    answer = solver.time_response(net, stop_s, step_s, [iw.NodeVoltage("a")])
    return answer.time_s, answer[iw.NodeVoltage("a")]


def rising(t: np.ndarray, v: np.ndarray, level: float) -> float:
    k = int(np.argmax(v >= level))
    return float(t[k - 1] + (level - v[k - 1]) / (v[k] - v[k - 1]) * (t[k] - t[k - 1]))


def falling(t: np.ndarray, v: np.ndarray, level: float) -> float:
    past = int(v.argmax()) + int(np.argmax(v[v.argmax() :] <= level))
    return float(t[past - 1] + (level - v[past - 1]) / (v[past] - v[past - 1]) * (t[past] - t[past - 1]))


def front_and_tail(solver, wave, tail_s: float, peak: float) -> tuple[float, float]:
    """T1 = (t90 − t30)/0.6 and T2 from the virtual origin t30 − 0.3 T1 (IEC 60060-1), s."""
    t, v = seen(solver, wave, 4 * MICRO, 0.25e-9)
    t30, t90 = rising(t, v, 0.3 * peak), rising(t, v, 0.9 * peak)
    T1 = (t90 - t30) / 0.6
    step = tail_s / 10_000
    t, v = seen(solver, wave, 13_000 * step, step)
    return T1, falling(t, v, 0.5 * peak) - (t30 - 0.3 * T1)


# D-01, D-02. From memory: Kuffel, Zaengl & Kuffel, 2nd ed., time constants; definitions IEC 60060-1.
# tail, front in µs; peak normaliser, T1, T2 in µs.
IMPULSES = [
    ("1.2/50", 68.2, 0.405, 1.03725744, 1.199886, 49.987938),
    ("1.2/5", 3.48, 0.80, 2.01390165, 1.199695, 4.997265),
    ("1.2/200", 284.0, 0.381, 1.01027976, 1.200070, 199.983877),
]


@pytest.mark.parametrize(("name", "tail", "front", "factor", "T1", "T2"), IMPULSES, ids=[row[0] for row in IMPULSES])
def test_d01_d02_lightning_impulses(solver, name, tail, front, factor, T1, T2):
    """Front and tail as defined by IEC 60060-1, and the peak 1 of the normalised wave."""
    wave = iw.DoubleExponential(factor, tail * MICRO, front * MICRO)
    top = np.log(tail / front) * tail * front / (tail - front) * MICRO
    _, v = seen(solver, wave, top, top)
    assert v[-1] == pytest.approx(1.0, rel=1e-8)
    found = front_and_tail(solver, wave, T2 * MICRO, 1.0)
    assert found[0] == pytest.approx(T1 * MICRO, rel=1e-6)
    assert found[1] == pytest.approx(T2 * MICRO, rel=1e-6)


def test_d01_standard_impulse_is_the_same_wave(solver):
    """The named 1.2/50 impulse has the constants of D-01, its crest at 2.08855941 µs."""
    named = iw.StandardImpulse(iw.ImpulseShape.LIGHTNING_1_2_50, 750e3)
    _, v = seen(solver, named, 2.08855941 * MICRO, 2.08855941 * MICRO)
    assert v[-1] == pytest.approx(750e3, rel=1e-12)
    _, plain = seen(solver, iw.DoubleExponential(1.03725744, 68.2 * MICRO, 0.405 * MICRO), 60 * MICRO, MICRO)
    _, same = seen(solver, named, 60 * MICRO, MICRO)
    assert np.abs(same / 750e3 - plain).max() < 1e-8


def test_switching_impulse_crest_and_half_value(solver):
    """250/2500: crest at 250 µs, half of it at 2500 µs (IEC 60060-1, from memory; derived constants)."""
    _, v = seen(solver, iw.StandardImpulse(iw.ImpulseShape.SWITCHING_250_2500, 1.0), 2500 * MICRO, 1 * MICRO)
    assert v.argmax() == 250
    assert v[250] == pytest.approx(1.0, rel=1e-9)
    assert v[2500] == pytest.approx(0.5, rel=1e-7)


def test_d04_analytic_surge(solver):
    """1.037 (1 − e^(−t/0.4074)) e^(−t/68.22), µs. From memory: IEEE C62.41/C62.45 and IEC 61000-4-5."""
    both = 1 / (1 / 0.4074 + 1 / 68.22)
    wave = iw.DoubleExponential(1.037, 68.22 * MICRO, both * MICRO)
    _, v = seen(solver, wave, 2.0885979 * MICRO, 2.0885979 * MICRO)
    assert v[-1] == pytest.approx(0.99976224, rel=1e-7)
    t, v = seen(solver, wave, 4 * MICRO, 0.25e-9)
    peak = 0.99976224
    # front by 1.67 (t90 − t30), tail from the virtual origin
    t30, t90 = rising(t, v, 0.3 * peak), rising(t, v, 0.9 * peak)
    assert 1.67 * (t90 - t30) == pytest.approx(1.2022569 * MICRO, rel=1e-6)
    t, v = seen(solver, wave, 60 * MICRO, 5e-9)
    origin = t30 - 0.3 * (t90 - t30) / 0.6
    assert falling(t, v, 0.5 * peak) - origin == pytest.approx(50.0018174 * MICRO, rel=2e-6)


def test_d07_ring_wave(solver):
    """1.590 (1 − e^(−t/0.533)) e^(−t/9.788) cos(2π 0.1 t), µs. From memory: IEEE C62.41/C62.45, IEC 61000-4-5."""
    wave = iw.StandardImpulse(iw.ImpulseShape.RING_100_KHZ, 1.0)
    t, v = seen(solver, wave, 2 * MICRO, 0.1e-9)
    assert v.max() == pytest.approx(1.00008706, abs=1e-7)
    assert t[v.argmax()] == pytest.approx(0.8524 * MICRO, rel=1e-4)
    rise = rising(t, v, 0.9 * v.max()) - rising(t, v, 0.1 * v.max())
    assert rise == pytest.approx(0.49990 * MICRO, rel=1e-4)


def test_current_impulse_8_20(solver):
    """8/20: front 1.25 (t90 − t10) and time to half value within a few per cent of 8 and 20 µs.

    From memory: IEEE C62.41.2, 0.01243 µs⁻³ t³ e^(−t/3.911 µs); IEC 60060-1 allows 20 %.
    """
    t, v = seen(solver, iw.StandardImpulse(iw.ImpulseShape.CURRENT_8_20, 1.0), 40 * MICRO, 5e-9)
    assert v.max() == pytest.approx(1.0, rel=1e-3)
    t10, t90 = rising(t, v, 0.1 * v.max()), rising(t, v, 0.9 * v.max())
    front = 1.25 * (t90 - t10)
    assert front == pytest.approx(8 * MICRO, rel=0.02)
    assert falling(t, v, 0.5 * v.max()) - (t10 - 0.1 * front) == pytest.approx(20 * MICRO, rel=0.02)
