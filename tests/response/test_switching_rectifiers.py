"""Rectifiers against their transcendental equations: extinction to 1e-6 degree, means and RMS to 1e-8."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

import interwind as iw
from interwind_service.response.periodic import periodic_response

OMEGA = 100 * np.pi
PERIOD_S = 2 * np.pi / OMEGA


def sine(amplitude: float) -> iw.Sine:
    return iw.Sine(amplitude, OMEGA / (2 * np.pi))


def steady(elements, observe) -> iw.PeriodicResponse:
    return periodic_response(iw.Network("g", elements), PERIOD_S, PERIOD_S / 100, observe)


def when(wave: iw.PeriodicResponse, element: str, state: str) -> list[float]:
    """Angles in degrees at which an element takes a state."""
    return [np.degrees(OMEGA * e.time_s) for e in wave.events if (e.element, e.state) == (element, state)]


@pytest.mark.parametrize("load_deg", [15, 30, 45, 60, 75, 85])
def test_half_wave_on_resistance_and_inductance(load_deg):
    """Extinction: sin(β − θ) + sin θ e^(−β/tan θ) = 0; i = Vm/Z (sin(ωt − θ) + sin θ e^(−ωt/tan θ)) (closed form)."""
    theta = np.radians(load_deg)
    R = 10.0
    L = R * np.tan(theta) / OMEGA
    beta = brentq(
        lambda b: np.sin(b - theta) + np.sin(theta) * np.exp(-b / np.tan(theta)), np.pi * 0.99 + 0.01, 2 * np.pi
    )

    def i(a: float) -> float:
        return 100.0 / (R / np.cos(theta)) * (np.sin(a - theta) + np.sin(theta) * np.exp(-a / np.tan(theta)))

    mean = quad(i, 0, beta, epsabs=1e-13, epsrel=1e-13)[0] / (2 * np.pi)
    rms = np.sqrt(quad(lambda a: i(a) ** 2, 0, beta, epsabs=1e-13, epsrel=1e-13)[0] / (2 * np.pi))
    current = iw.ElementCurrent("R")
    wave = steady(
        [
            iw.VoltageSource("line", "a", "g", sine(100.0)),
            iw.Diode("D", "a", "b"),
            iw.Resistor("R", "b", "c", R),
            iw.Inductor("L", "c", "g", L),
        ],
        [current],
    )
    assert when(wave, "D", "blocking") == pytest.approx([np.degrees(beta)], abs=1e-6)
    assert wave.mean(current) == pytest.approx(mean, rel=1e-8)
    assert wave.rms(current) == pytest.approx(rms, rel=1e-8)


def test_half_wave_on_a_counter_voltage():
    """120 V, 2 ohm, 20 mH, 100 V: conducts from arcsin(E/Vm) until its current is zero (closed form)."""
    omega, R, L, E, peak = 377.0, 2.0, 20e-3, 100.0, 120.0 * np.sqrt(2)
    theta, Z, alpha = np.arctan2(omega * L, R), np.hypot(omega * L, R), np.arcsin(E / peak)
    start = -peak / Z * np.sin(alpha - theta) + E / R

    def i(a: float) -> float:
        return peak / Z * np.sin(a - theta) - E / R + start * np.exp(-(a - alpha) / np.tan(theta))

    beta = brentq(i, 2.0, 4.0)
    mean = quad(i, alpha, beta, epsabs=1e-12, epsrel=1e-12)[0] / (2 * np.pi)
    rms = np.sqrt(quad(lambda a: i(a) ** 2, alpha, beta, epsabs=1e-13, epsrel=1e-13)[0] / (2 * np.pi))
    current = iw.ElementCurrent("R")
    period = 2 * np.pi / omega
    net = iw.Network(
        "g",
        [
            iw.VoltageSource("line", "a", "g", iw.Sine(peak, omega / (2 * np.pi))),
            iw.Diode("D", "a", "b"),
            iw.Resistor("R", "b", "c", R),
            iw.Inductor("L", "c", "d", L),
            iw.VoltageSource("battery", "d", "g", iw.Constant(E)),
        ],
    )
    wave = periodic_response(net, period, period / 10, [current])
    angles = {e.state: np.degrees(omega * e.time_s) for e in wave.events}
    assert angles["conducting"] == pytest.approx(np.degrees(alpha), abs=1e-6)
    assert angles["blocking"] == pytest.approx(np.degrees(beta), abs=1e-6)
    assert wave.mean(current) == pytest.approx(mean, rel=1e-8)
    assert wave.rms(current) == pytest.approx(rms, rel=1e-8)


def test_controlled_half_wave():
    """A gate of 45 degrees delays the start: i = Vm/Z (sin(ωt−θ) − sin(α−θ) e^(−(ωt−α)/tan θ)) (closed form)."""
    R, L, alpha = 10.0, 30e-3, np.pi / 4
    theta = np.arctan2(OMEGA * L, R)
    Z = np.hypot(R, OMEGA * L)

    def i(a: float) -> float:
        return 100.0 / Z * (np.sin(a - theta) - np.sin(alpha - theta) * np.exp(-(a - alpha) / np.tan(theta)))

    beta = brentq(i, np.pi, 2 * np.pi - 0.01)
    mean = quad(i, alpha, beta, epsabs=1e-13, epsrel=1e-13)[0] / (2 * np.pi)
    rms = np.sqrt(quad(lambda a: i(a) ** 2, alpha, beta, epsabs=1e-13, epsrel=1e-13)[0] / (2 * np.pi))
    current = iw.ElementCurrent("R")
    wave = steady(
        [
            iw.VoltageSource("line", "a", "g", sine(100.0)),
            iw.Diode("D", "a", "b"),
            iw.Switch("gate", "b", "c", iw.Gate(PERIOD_S, 0.85 * PERIOD_S, PERIOD_S / 8)),
            iw.Resistor("R", "c", "d", R),
            iw.Inductor("L", "d", "g", L),
        ],
        [current],
    )
    assert when(wave, "D", "blocking")[-1] == pytest.approx(np.degrees(beta), abs=1e-6)
    assert wave.mean(current) == pytest.approx(mean, rel=1e-8)
    assert wave.rms(current) == pytest.approx(rms, rel=1e-8)


@pytest.mark.parametrize("source_h", [0.0, 1e-4])
def test_bridge_on_a_capacitor(source_h):
    """Without source inductance each diode pair conducts from the crossing to arctan; with it the energy still closes.

    The discharge starts where the capacitor current changes sign, tan(ωt) = −ωRC, and lasts until
    sin(ωt − π) = sin(ω t_off) e^(−(t − t_off)/RC) (closed form).
    """
    R, C = 50.0, 1e-3
    out = iw.NodeVoltage("p", "n")
    source = [iw.Inductor("stray", "s", "a", source_h)] if source_h else [iw.Resistor("stray", "s", "a", 0.0)]
    wave = steady(
        [
            iw.VoltageSource("line", "s", "b", sine(100.0)),
            *source,
            iw.Diode("D1", "a", "p"),
            iw.Diode("D2", "b", "p"),
            iw.Diode("D3", "n", "a"),
            iw.Diode("D4", "n", "b"),
            iw.Capacitor("C", "p", "n", C),
            iw.Resistor("R", "p", "n", R),
            iw.Resistor("zero", "n", "g", 1e6),
        ],
        [out],
    )
    assert wave.evidence.energy_error < 1e-11
    assert abs(sum(wave.mean_power_w.values())) < 1e-9 * abs(wave.mean_power_w["line"])
    if source_h:
        return
    tau = OMEGA * R * C
    off = np.pi - np.arctan(tau)
    on = brentq(lambda a: np.sin(a - np.pi) - np.sin(off) * np.exp(-(a - off) / tau), np.pi + 1e-6, 1.5 * np.pi)
    area = quad(np.sin, on - np.pi, off)[0] + np.sin(off) * tau * (1 - np.exp(-(on - off) / tau))
    assert wave.mean(out) == pytest.approx(100.0 * area / np.pi, rel=1e-7)


def test_critical_damping_costs_no_digits():
    """A chopper with a critically damped filter, R = ½ √(L/C): two modes coincide, and the energy still closes."""
    net = iw.Network(
        "g",
        [
            iw.VoltageSource("E", "in", "g", iw.Constant(10.0)),
            iw.Switch("S", "in", "x", iw.Gate(1e-5, 4e-6)),
            iw.Diode("D", "g", "x"),
            iw.Inductor("L", "x", "o", 1e-4),
            iw.Resistor("R", "o", "g", 5.0),
            iw.Capacitor("C", "o", "g", 1e-6),
        ],
    )
    out = iw.NodeVoltage("o")
    wave = periodic_response(net, 1e-5, 1e-6, [out, iw.ElementCurrent("L")])
    assert wave.mean(out) == pytest.approx(4.0, rel=1e-8)
    assert wave.evidence.energy_error < 1e-10
    assert abs(sum(wave.mean_power_w.values())) < 1e-10 * wave.mean_power_w["R"]
