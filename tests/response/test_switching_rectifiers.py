"""Rectifiers against their transcendental equations: extinction to 1e-6 degree, means and RMS to 1e-8."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

import interwind as iw

OMEGA = 100 * np.pi
PERIOD_S = 2 * np.pi / OMEGA


def sine(amplitude: float) -> iw.Sine:
    return iw.Sine(amplitude, OMEGA / (2 * np.pi))


@pytest.fixture(scope="module")
def solver():
    with iw.connect() as client:
        yield client


def steady(solver: iw.Client, elements, observe) -> iw.PeriodicResponse:
    return solver.periodic_response(iw.Network("g", elements), PERIOD_S, PERIOD_S / 100, observe)


def mean_and_rms(i, start: float, stop: float, period: float = 2 * np.pi) -> tuple[float, float]:
    """Mean and RMS over a period of i(angle), which is 0 outside start .. stop, by quadrature."""
    exact = {"epsabs": 1e-13, "epsrel": 1e-13}
    return (
        quad(i, start, stop, **exact)[0] / period,
        np.sqrt(quad(lambda a: i(a) ** 2, start, stop, **exact)[0] / period),
    )


def when(wave: iw.PeriodicResponse, element: str, state: str) -> list[float]:
    """Angles in degrees at which an element takes a state."""
    return [np.degrees(OMEGA * e.time_s) for e in wave.events if (e.element, e.state) == (element, state)]


@pytest.mark.parametrize("load_deg", [15, 30, 45, 60, 75, 85])
def test_half_wave_on_resistance_and_inductance(solver, load_deg):
    """Extinction: sin(β − θ) + sin θ e^(−β/tan θ) = 0; i = Vm/Z (sin(ωt − θ) + sin θ e^(−ωt/tan θ)) (closed form)."""
    theta = np.radians(load_deg)
    R = 10.0
    L = R * np.tan(theta) / OMEGA
    beta = brentq(
        lambda b: np.sin(b - theta) + np.sin(theta) * np.exp(-b / np.tan(theta)), np.pi * 0.99 + 0.01, 2 * np.pi
    )

    def i(a: float) -> float:
        return 100.0 / (R / np.cos(theta)) * (np.sin(a - theta) + np.sin(theta) * np.exp(-a / np.tan(theta)))

    mean, rms = mean_and_rms(i, 0.0, beta)
    current = iw.ElementCurrent("R")
    wave = steady(
        solver,
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


def test_half_wave_on_a_counter_voltage(solver):
    """120 V, 2 ohm, 20 mH, 100 V: conducts from arcsin(E/Vm) until its current is zero (closed form)."""
    omega, R, L, E, peak = 377.0, 2.0, 20e-3, 100.0, 120.0 * np.sqrt(2)
    theta, Z, alpha = np.arctan2(omega * L, R), np.hypot(omega * L, R), np.arcsin(E / peak)
    start = -peak / Z * np.sin(alpha - theta) + E / R

    def i(a: float) -> float:
        return peak / Z * np.sin(a - theta) - E / R + start * np.exp(-(a - alpha) / np.tan(theta))

    beta = brentq(i, 2.0, 4.0)
    mean, rms = mean_and_rms(i, alpha, beta)
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
    wave = solver.periodic_response(net, period, period / 10, [current])
    angles = {e.state: np.degrees(omega * e.time_s) for e in wave.events}
    assert angles["conducting"] == pytest.approx(np.degrees(alpha), abs=1e-6)
    assert angles["blocking"] == pytest.approx(np.degrees(beta), abs=1e-6)
    assert wave.mean(current) == pytest.approx(mean, rel=1e-8)
    assert wave.rms(current) == pytest.approx(rms, rel=1e-8)


def test_controlled_half_wave(solver):
    """A gate of 45 degrees delays the start: i = Vm/Z (sin(ωt−θ) − sin(α−θ) e^(−(ωt−α)/tan θ)) (closed form)."""
    R, L, alpha = 10.0, 30e-3, np.pi / 4
    theta = np.arctan2(OMEGA * L, R)
    Z = np.hypot(R, OMEGA * L)

    def i(a: float) -> float:
        return 100.0 / Z * (np.sin(a - theta) - np.sin(alpha - theta) * np.exp(-(a - alpha) / np.tan(theta)))

    beta = brentq(i, np.pi, 2 * np.pi - 0.01)
    mean, rms = mean_and_rms(i, alpha, beta)
    current = iw.ElementCurrent("R")
    wave = steady(
        solver,
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


BRIDGE = [
    iw.Diode("D1", "a", "p"),
    iw.Diode("D2", "b", "p"),
    iw.Diode("D3", "n", "a"),
    iw.Diode("D4", "n", "b"),
    iw.Resistor("zero", "n", "g", 1e6),
]


def test_bridge_on_a_capacitor(solver):
    """Each pair charges C until the capacitor would have to push: tan(β) = −ωRC; then e^(−(ωt − β)/ωRC) until the
    other pair takes over, sin(α − π) = sin β e^(−(α − β)/ωRC) (closed forms).
    """
    R, C = 50.0, 1e-3
    tau = OMEGA * R * C
    beta = np.pi - np.arctan(tau)
    alpha = brentq(lambda a: np.sin(a - np.pi) - np.sin(beta) * np.exp(-(a - beta) / tau), np.pi + 1e-6, 1.5 * np.pi)
    start = alpha - np.pi

    def voltage(a: float) -> float:
        return 100.0 * (np.sin(a) if a < beta else np.sin(beta) * np.exp(-(a - beta) / tau))

    exact = {"points": [beta], "epsabs": 1e-13, "epsrel": 1e-13}
    mean = quad(voltage, start, start + np.pi, **exact)[0] / np.pi
    rms = np.sqrt(quad(lambda a: voltage(a) ** 2, start, start + np.pi, **exact)[0] / np.pi)
    _, line_rms = mean_and_rms(
        lambda a: 100.0 * (np.sin(a) / R + OMEGA * C * np.cos(a)), start, beta, np.pi
    )  # charging and load current of one pair
    out, line = iw.NodeVoltage("p", "n"), iw.ElementCurrent("line")
    wave = steady(
        solver,
        [
            iw.VoltageSource("line", "a", "b", sine(100.0)),
            *BRIDGE,
            iw.Capacitor("C", "p", "n", C),
            iw.Resistor("R", "p", "n", R),
        ],
        [out, line],
    )
    for pair, on, off in ((("D1", "D4"), start, beta), (("D2", "D3"), alpha, beta + np.pi)):
        conducting, blocking = ([when(wave, diode, state) for diode in pair] for state in ("conducting", "blocking"))
        assert max(conducting) == pytest.approx([np.degrees(on)], abs=1e-6)
        assert min(blocking) == pytest.approx([np.degrees(off)], abs=1e-6)  # the first to block ends the current
    assert wave.mean(out) == pytest.approx(mean, rel=1e-8)
    assert wave.rms(out) == pytest.approx(rms, rel=1e-8)
    assert wave.rms(line) == pytest.approx(line_rms, rel=1e-8)
    assert wave.mean(line) == pytest.approx(0.0, abs=1e-8 * line_rms)
    assert wave.evidence.energy_error < 1e-11


def test_bridge_from_rest_changes_once_a_diode_and_half_cycle(solver):
    """Two diodes that take over at one instant do so once, in each of 20 half cycles: none is missed or repeated.

    Heat of the load: sin² up to the first extinction, then like every later half cycle (closed form).
    """
    R, C, halves = 50.0, 1e-3, 20
    tau = OMEGA * R * C
    beta = np.pi - np.arctan(tau)
    alpha = brentq(lambda a: np.sin(a - np.pi) - np.sin(beta) * np.exp(-(a - beta) / tau), np.pi + 1e-6, 1.5 * np.pi)
    net = iw.Network(
        "g",
        [
            iw.VoltageSource("line", "s", "b", sine(100.0)),
            iw.Resistor("stray", "s", "a", 0.0),
            *BRIDGE,
            iw.Capacitor("C", "p", "n", C),
            iw.Resistor("R", "p", "n", R),
        ],
    )
    wave = solver.time_response(net, halves * PERIOD_S / 2, PERIOD_S / 100)
    assert len(wave.events) == 4 * halves

    def charged(to: float) -> float:
        return quad(lambda a: np.sin(a) ** 2, to, beta, epsabs=1e-13)[0]

    def falling(until: float) -> float:
        return np.sin(beta) ** 2 * tau / 2 * (1 - np.exp(-2 * (until - beta) / tau))

    heat = charged(0.0) + (halves - 1) * (falling(alpha) + charged(alpha - np.pi)) + falling(np.pi)
    assert wave.ledger.dissipated_by_element_j["R"] == pytest.approx(1e4 / R * heat / OMEGA, rel=1e-7)


def test_bridge_on_a_counter_voltage_through_an_inductor(solver):
    """L i' = |Vm sin ωt| − E from arcsin(E/Vm) on, until the area above E is given back:
    cos α − cos β = (E/Vm)(β − α) (closed form).
    """
    L, E = 20e-3, 80.0
    alpha = np.arcsin(E / 100.0)
    beta = brentq(lambda b: np.cos(alpha) - np.cos(b) - E / 100.0 * (b - alpha), np.pi / 2, np.pi)

    def i(a: float) -> float:
        return (100.0 * (np.cos(alpha) - np.cos(a)) - E * (a - alpha)) / (OMEGA * L)

    mean, rms = mean_and_rms(i, alpha, beta, np.pi)
    current = iw.ElementCurrent("L")
    wave = steady(
        solver,
        [
            iw.VoltageSource("line", "a", "b", sine(100.0)),
            *BRIDGE,
            iw.Inductor("L", "p", "q", L),
            iw.VoltageSource("battery", "q", "n", iw.Constant(E)),
        ],
        [current],
    )
    assert when(wave, "D1", "blocking") == pytest.approx([np.degrees(beta)], abs=1e-6)
    assert when(wave, "D2", "blocking") == pytest.approx([np.degrees(beta) + 180.0], abs=1e-6)
    assert wave.mean(current) == pytest.approx(mean, rel=1e-8)
    assert wave.rms(current) == pytest.approx(rms, rel=1e-8)


def test_bridge_behind_a_source_inductance(solver):
    """With inductance in the line the pairs overlap or pause as they must, and the energy still closes."""
    wave = steady(
        solver,
        [
            iw.VoltageSource("line", "s", "b", sine(100.0)),
            iw.Inductor("stray", "s", "a", 1e-4),
            *BRIDGE,
            iw.Capacitor("C", "p", "n", 1e-3),
            iw.Resistor("R", "p", "n", 50.0),
        ],
        [iw.NodeVoltage("p", "n")],
    )
    assert wave.evidence.energy_error < 1e-11
    assert abs(sum(wave.mean_power_w.values())) < 1e-9 * abs(wave.mean_power_w["line"])


def test_critical_damping_costs_no_digits(solver):
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
    wave = solver.periodic_response(net, 1e-5, 1e-6, [out, iw.ElementCurrent("L")])
    assert wave.mean(out) == pytest.approx(4.0, rel=1e-8)
    assert wave.evidence.energy_error < 1e-10
    assert abs(sum(wave.mean_power_w.values())) < 1e-10 * wave.mean_power_w["R"]
