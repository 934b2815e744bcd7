"""Area E, resonant power links in the sinusoidal state, through the public client."""

from __future__ import annotations

import math

import numpy as np
import pytest

import interwind as iw

# E-12, derived: first-harmonic gain of a series-resonant converter with magnetizing inductance, L_n = Lm/Lr and
# Q = √(Lr/Cr)/R, at f over the series resonance.
F = np.array([0.5, 0.6, 0.8, 1.0, 1.2, 1.5, 2.0])
GAINS = [
    (5.0, 0.5, [1.176470588, 1.195439464, 1.092207423, 1.0, 0.928649668, 0.84269626, 0.728357041]),
    (3.0, 0.3, [2.222222222, 1.93029765, 1.214124106, 1.0, 0.903073977, 0.825582884, 0.752709929]),
]


@pytest.mark.parametrize(("inductance_ratio", "quality", "gain"), GAINS)
def test_e12_resonant_converter_gain(solver, inductance_ratio, quality, gain):
    series_h, series_f = 20e-6, 100e-9
    resonance_hz = 1 / (2 * math.pi * math.sqrt(series_h * series_f))
    load = math.sqrt(series_h / series_f) / quality
    net = iw.Network(
        "0",
        [
            iw.VoltageSource("V", "in", "0", phasor=1.0),
            iw.Inductor("Lr", "in", "a", series_h),
            iw.Capacitor("Cr", "a", "b", series_f),
            iw.Windings("Lm", iw.WindingSet(("m",), [[inductance_ratio * series_h]]), {"m": ("b", "0")}),
            iw.Resistor("R", "b", "0", load),
        ],
    )
    found = np.abs(solver.frequency_response(net, F * resonance_hz)[iw.NodeVoltage("b")])
    np.testing.assert_allclose(found, gain, rtol=1e-9)


def link_efficiency(solver, kq: float, load_factor: float) -> float:
    """Two series-resonant coils of equal Q = 100, loaded with ``load_factor`` times the receiver's own resistance."""
    henry, hertz, quality = 10e-6, 1e6, 100.0
    omega = 2 * math.pi * hertz
    resistance, farad = omega * henry / quality, 1 / (omega**2 * henry)
    k = kq / quality
    coils = iw.WindingSet.from_coupling(("tx", "rx"), [henry, henry], [[1, k], [k, 1]], resistance)
    net = iw.Network(
        "0",
        [
            iw.VoltageSource("V", "in", "0", phasor=1.0),
            iw.Capacitor("C1", "in", "a", farad),
            iw.Windings("T", coils, {"tx": ("a", "0"), "rx": ("b", "0")}),
            iw.Capacitor("C2", "b", "c", farad),
            iw.Resistor("load", "c", "0", load_factor * resistance),
        ],
    )
    power = solver.frequency_response(net, [hertz], [iw.ElementPower("load"), iw.ElementPower("V")]).samples[0]
    return float(power[0].real / -power[1].real)


# E-13, from memory: Kurs et al. 2007; Zargham & Gulak; derived: η = x²/(1 + √(1 + x²))², x = kQ, at the load √(1 + x²).
BEST = [(0.5, 0.055728090), (1.0, 0.171572875), (2.0, 0.381966011), (5.0, 0.672078439), (10.0, 0.819002488),
        (50.0, 0.960792001)]  # fmt: skip


@pytest.mark.parametrize(("kq", "best"), BEST)
def test_e13_best_link_efficiency(solver, kq, best):
    optimum = math.sqrt(1 + kq**2)
    assert link_efficiency(solver, kq, optimum) == pytest.approx(best, rel=1e-8)
    assert link_efficiency(solver, kq, optimum * 1.05) < best
    assert link_efficiency(solver, kq, optimum / 1.05) < best


# E-14, from memory: Kurs et al. 2007: a = √(1 + x), x = (κ/Γ)²; equal to E-13 with kQ = κ/Γ.
OPTIMUM = [(1.0, 1.414213562, 0.171572875), (2.0, 2.236067977, 0.381966011), (5.0, 5.099019514, 0.672078439),
           (10.0, 10.049875621, 0.819002488)]  # fmt: skip


@pytest.mark.parametrize(("ratio", "load", "best"), OPTIMUM)
def test_e14_coupled_mode_optimum(solver, ratio, load, best):
    assert link_efficiency(solver, ratio, load) == pytest.approx(best, rel=1e-8)
    x, a = ratio**2, load
    assert a * x / ((1 + a) * x + (1 + a) ** 2) == pytest.approx(best, rel=1e-8)
