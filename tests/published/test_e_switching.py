"""Published switching cases: rectifier, flyback clamp, active bridge, and the jumps of constant flux and charge."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw


def test_e06_half_wave_rectifier(solver):
    """E-06 (from memory: Hart, Power Electronics, Example 3-2): 100 sin 377t V on 100 ohm, 0.1 H, ideal diode."""
    omega = 377.0
    period = 2 * np.pi / omega
    net = iw.Network(
        "g",
        [
            iw.VoltageSource("line", "a", "g", iw.Sine(100.0, omega / (2 * np.pi))),
            iw.Diode("D", "a", "b"),
            iw.Resistor("R", "b", "c", 100.0),
            iw.Inductor("L", "c", "g", 0.1),
        ],
    )
    current = iw.ElementCurrent("R")
    wave = solver.periodic_response(net, period_s=period, step_s=period / 100, observe=[current])
    extinction = next(e.time_s for e in wave.events if e.state == "blocking") * omega
    assert extinction == pytest.approx(3.502148, abs=1e-6)
    assert wave.mean(current) == pytest.approx(0.308076, abs=1e-6)
    assert wave.rms(current) == pytest.approx(0.473582, abs=1e-6)
    assert wave.mean_power_w["R"] == pytest.approx(22.428, abs=1e-3)
    factor = wave.mean_power_w["R"] / (100.0 / np.sqrt(2) * wave.rms(current))
    assert factor == pytest.approx(0.669746, abs=1e-5)


def test_e10_flyback_clamp(solver):
    """E-10 (derived): 2 µH at 3 A reset against 200 V − 100 V in 60 ns and give the clamp 1.8 W at 100 kHz."""
    period = 1e-5
    net = iw.Network(
        "g",
        [
            iw.VoltageSource("reflected", "g", "a", iw.Constant(-100.0)),
            iw.Inductor("leakage", "a", "d", 2e-6),
            iw.Diode("clamp diode", "d", "c"),
            iw.VoltageSource("clamp", "c", "g", iw.Constant(200.0)),
        ],
    )
    current = iw.ElementCurrent("leakage")
    wave = solver.time_response(net, stop_s=period, step_s=1e-8, observe=[current], initial={current: 3.0})
    off = next(e.time_s for e in wave.events if e.state == "blocking")
    assert off == pytest.approx(60e-9, rel=1e-9)
    charge = 0.5 * 3.0 * off
    assert 200.0 * charge / period == pytest.approx(1.8, rel=1e-9)


@pytest.mark.parametrize(
    ("degrees", "watts"), [(15, 3055.555556), (30, 5555.555556), (45, 7500.0), (60, 8888.888889), (90, 10000.0)]
)
def test_e11_active_bridge(solver, degrees, watts):
    """E-11 (from memory: De Doncker, Divan & Kheraluwala 1991): square sources to 1e-9, ideal switches to 1e-5."""
    period, lag = 1e-5, degrees / 360 * 1e-5

    def square(volts: float, delay_s: float) -> iw.Trapezoid:
        return iw.Trapezoid(
            low=-volts, high=volts, period_s=period, rise_s=0.0, high_s=period / 2, fall_s=0.0, delay_s=delay_s
        )

    sources = [
        iw.VoltageSource("V1", "a", "g", square(400.0, 0.0)),
        iw.Inductor("L", "a", "b", 20e-6),
        iw.IdealTransformer("N", "b", "g", "c", "g", 4.0),
        iw.VoltageSource("V2", "c", "g", square(100.0, lag)),
    ]
    wave = solver.periodic_response(iw.Network("g", sources), period_s=period, step_s=period / 10, observe=[])
    assert wave.mean_power_w["V2"] == pytest.approx(watts, rel=1e-9)
    assert wave.mean_power_w["V1"] == pytest.approx(-watts, rel=1e-9)

    def leg(name: str, top: str, bottom: str, middle: str, delay_s: float) -> list[iw.Switch]:
        upper = iw.Switch(f"{name}+", top, middle, iw.Gate(period, period / 2, delay_s))
        lower = iw.Switch(f"{name}-", middle, bottom, iw.Gate(period, period / 2, delay_s + period / 2))
        return [upper, lower]

    switched = [
        iw.VoltageSource("V1", "p", "g", iw.Constant(400.0)),
        iw.VoltageSource("V2", "q", "h", iw.Constant(100.0)),
        *leg("A", "p", "g", "a", 0.0),
        *leg("B", "p", "g", "a2", period / 2),
        *leg("C", "q", "h", "c", lag),
        *leg("D", "q", "h", "c2", lag + period / 2),
        iw.Inductor("L", "a", "b", 20e-6),
        iw.IdealTransformer("N", "b", "a2", "c", "c2", 4.0),
    ]
    wave = solver.periodic_response(iw.Network("g", switched), period_s=period, step_s=period / 10, observe=[])
    assert wave.mean_power_w["V2"] == pytest.approx(watts, rel=1e-5)
    assert wave.mean_power_w["V1"] == pytest.approx(-watts, rel=1e-5)


def test_e17_two_capacitors(solver):
    """E-17 (derived): 1 µF at 10 V closed onto 2 µF at 0 V: 10/3 V and 100/3 µJ lost."""
    net = iw.Network(
        "g",
        [
            iw.Capacitor("one", "a", "g", 1e-6),
            iw.Capacitor("two", "b", "g", 2e-6),
            iw.Switch("S", "a", "b", iw.GateTimes([1e-3])),
        ],
    )
    wave = solver.time_response(net, stop_s=2e-3, step_s=1e-3, initial={iw.ElementVoltage("one"): 10.0})
    assert wave[iw.NodeVoltage("b")] == pytest.approx([0.0, 10 / 3, 10 / 3], rel=1e-12)
    assert wave.ledger.lost_in_jumps_j == pytest.approx(100e-6 / 3, rel=1e-12)


def test_inrush_of_a_saturating_branch(solver):
    """Derived: v = sin t per unit, R = .00102, L_m = 500, knee 1.18, L_air = .12: first peaks 13.350 and 6.784.

    The lossless estimate (2 + residual − knee) / L_air is 13.50 and 6.83.
    """
    omega = 100 * np.pi
    for residual, peak in ((0.8, 13.350), (0.0, 6.784)):
        net = iw.Network(
            "g",
            [
                iw.VoltageSource("line", "a", "g", iw.Sine(1.0, 50.0)),
                iw.Resistor("R", "a", "b", 0.00102),
                iw.SaturableInductor(
                    "core",
                    "b",
                    "g",
                    [1.18 / 500, 1.18 / 500 + 1 / 0.12],
                    [1.18 / omega, 2.18 / omega],
                    residual / omega,
                ),
            ],
        )
        current = iw.ElementCurrent("core")
        wave = solver.time_response(net, stop_s=0.02, step_s=1e-5, observe=[current])
        assert wave[current].max() == pytest.approx(peak, abs=6e-4)
        assert wave.evidence.energy_error < 1e-11
