"""The periodic state of networks with smooth laws, against closed forms, quadratures and long plain runs."""

from __future__ import annotations

import functools

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

import interwind as iw
from interwind_service.response.periodic import periodic_response
from interwind_service.response.switching import time_response_switching

LAW = {"saturation_current_a": 1e-9, "thermal_voltage_v": 0.04}
OMEGA = 100.0 * np.pi


def line(volt: float, *elements: iw.Element) -> iw.Network:
    return iw.Network("g", [iw.VoltageSource("E", "a", "g", iw.Sine(volt, 50.0)), *elements])


def test_without_any_state_it_is_algebra_at_every_instant():
    """Diode and resistor: v + R I_s (e^(v/V_T) - 1) = e(t), one root; means by quadrature (scipy)."""
    network = line(1.0, iw.Diode("D", "a", "b", **LAW), iw.Resistor("R", "b", "g", 1.0))
    answer = periodic_response(network, 0.02, 1e-3, [iw.ElementCurrent("D")])

    def current(t: float) -> float:
        e = np.sin(OMEGA * t)
        return e - brentq(lambda v: v + 1e-9 * np.expm1(v / 0.04) - e, -1.001, 1.0, xtol=1e-15)

    mean = quad(current, 0.0, 0.01, limit=200, epsabs=1e-12)[0] + quad(current, 0.01, 0.02, epsabs=1e-14)[0]
    square = quad(lambda t: current(t) ** 2, 0.0, 0.01, limit=200, epsabs=1e-12)[0]
    assert answer.means[0] == pytest.approx(mean / 0.02, rel=1e-6)
    assert answer.rmses[0] == pytest.approx(np.sqrt(square / 0.02), rel=1e-6)
    assert answer.peaks[0] == pytest.approx(current(0.005), rel=1e-7)
    assert np.allclose(answer.samples[:, 0], [current(t) for t in answer.time_s], atol=1e-9)
    assert answer.multipliers.size == 0


def test_a_half_wave_rectifier_becomes_the_ideal_one():
    """The mean current goes to V/(πR), that of the ideal diode, in first order of V_T.

    At a fixed current the forward voltage V_T ln(1 + i/I_s) is proportional to V_T.
    """
    thermal = np.array([0.1, 0.05, 0.025])
    gap = []
    for volt in thermal:
        diode = iw.Diode("D", "a", "b", saturation_current_a=1e-3, thermal_voltage_v=volt)
        network = line(10.0, diode, iw.Resistor("R", "b", "g", 10.0))
        answer = periodic_response(network, 0.02, 1e-3, [iw.ElementCurrent("D")])
        gap.append(1.0 / np.pi - answer.means[0])
    assert min(gap) > 0.0
    assert np.polyfit(np.log(thermal), np.log(gap), 1)[0] == pytest.approx(1.0, abs=0.06)


def test_an_arrester_clips_a_sine():
    """Always v + R I_ref |v/V_ref|^25 sign(v) = e(t): mean power and harmonics from the roots (scipy, numpy)."""
    network = line(3000.0, iw.Resistor("R", "a", "b", 10.0), iw.Arrester("Z", "b", "g", 1000.0, 1.0, 25.0))
    answer = periodic_response(network, 0.02, 1e-3, [iw.NodeVoltage("b"), iw.ElementPower("Z")])

    def voltage(e: float) -> float:
        size = brentq(lambda u: u + 10.0 * (u / 1000.0) ** 25.0 - abs(e), 0.0, 3000.1, xtol=1e-11)
        return float(np.sign(e)) * size

    wave = np.array([voltage(3000.0 * np.sin(2.0 * np.pi * k / 2048)) for k in range(2048)])
    power = wave * (3000.0 * np.sin(2.0 * np.pi * np.arange(2048) / 2048) - wave) / 10.0
    spectrum = 2.0 * np.fft.fft(wave)[1:20] / 2048
    assert answer.mean_power_w["Z"] == pytest.approx(power.mean(), rel=1e-6)
    assert answer.means[1] == pytest.approx(power.mean(), rel=1e-6)
    assert np.abs(answer.harmonics(iw.NodeVoltage("b"), 19) - spectrum).max() < 1e-6 * np.abs(spectrum).max()
    assert sum(answer.mean_power_w.values()) == pytest.approx(0.0, abs=1e-9 * power.mean())


def test_a_saturable_branch_across_a_sine():
    """φ = (V/ω)(1 − cos ωt), for no resistance takes the offset away: harmonics of i(φ) from the table itself."""
    table_a, table_wb = np.array([0.0, 0.02, 1.0, 6.0]), np.array([0.0, 1.0, 1.6, 2.2]) / OMEGA
    network = line(
        1.0, iw.SaturableInductor("S", "a", "g", table_a[1:], table_wb[1:]), iw.Arrester("Z", "a", "g", 2.0, 1.0, 5.0)
    )
    answer = periodic_response(network, 0.02, 1e-3, [iw.ElementCurrent("S"), iw.StoredEnergy("S")])
    assert [finding.code for finding in answer.findings] == ["OFFSET_UNDETERMINED"]
    flux = (1.0 - np.cos(2.0 * np.pi * np.arange(65536) / 65536)) / OMEGA
    current = np.interp(flux, table_wb, table_a)
    spectrum = 2.0 * np.fft.fft(current)[1:16] / 65536
    assert answer.means[0] == pytest.approx(current.mean(), rel=1e-5)
    assert np.abs(answer.harmonics(iw.ElementCurrent("S"), 15) - spectrum).max() < 1e-5 * np.abs(spectrum).max()
    stored = np.trapezoid(np.interp(np.linspace(0.0, flux.max(), 200001), table_wb, table_a)) * flux.max() / 200000
    assert answer.peaks == pytest.approx([current.max(), stored], rel=1e-5)


def rectifier() -> iw.Network:
    """Source with resistance, diode, and a capacitor that keeps two thirds of its voltage over a period."""
    return line(
        10.0,
        iw.Resistor("Rs", "a", "b", 2.0),
        iw.Diode("D", "b", "c", **LAW),
        iw.Capacitor("C", "c", "g", 5e-3),
        iw.Resistor("R", "c", "g", 10.0),
    )


OBSERVE = (iw.NodeVoltage("c"), iw.ElementCurrent("D"), iw.ElementPower("D"))


@functools.cache
def settled() -> iw.PeriodicResponse:
    return periodic_response(rectifier(), 0.02, 1e-3, OBSERVE)


def test_the_long_wait_leads_to_the_same_state():
    """After 24 plain periods the run repeats what was found in fewer; μ is the decay of their distance."""
    answer = settled()
    wave = time_response_switching(rectifier(), 24 * 0.02, 1e-3, [OBSERVE[0]], None, 1e-7)
    assert np.allclose(wave.samples[-21:, 0], answer.samples[:, 0], rtol=0.0, atol=3e-6 * answer.peaks[0])
    assert answer.evidence.periods_propagated < 24
    ends = wave.samples[::20, 0] - answer.samples[0, 0]
    assert answer.multipliers[0] == pytest.approx((ends[8] / ends[4]) ** 0.25, rel=1e-2)


def test_the_ledger_closes_over_the_period():
    """Mean powers sum to zero, the capacitor's is zero, and figures agree with the ledger."""
    answer = settled()
    given = -answer.mean_power_w["E"]
    assert answer.ledger is not None
    assert sum(answer.mean_power_w.values()) == pytest.approx(0.0, abs=1e-12 * given)
    assert answer.mean_power_w["C"] == pytest.approx(0.0, abs=3e-6 * given)
    assert answer.mean_power_w["D"] == pytest.approx(answer.mean(OBSERVE[2]), rel=1e-5)
    assert answer.mean_power_w["R"] == pytest.approx(answer.rms(OBSERVE[0]) ** 2 / 10.0, rel=1e-6)
    assert answer.mean(OBSERVE[1]) == pytest.approx(answer.mean(OBSERVE[0]) / 10.0, rel=1e-5)
    assert answer.ledger.supplied_j == pytest.approx(0.02 * given)
    assert answer.evidence.energy_error < 1e-6


@pytest.mark.parametrize("series_ohm", [0.5, pytest.param(1e-3, marks=pytest.mark.long)])
def test_a_bridge_of_exponential_diodes(series_ohm: float):
    """From a state of exactly 0, the source across two diodes and a capacitor: charge balance, and the peak at most
    the crest less two drops at the mean current.
    """
    arms = {"D1": ("b", "x"), "D2": ("g", "x"), "D3": ("y", "b"), "D4": ("y", "g")}
    network = line(
        20.0,
        iw.Resistor("Rs", "a", "b", series_ohm),
        iw.Capacitor("C", "x", "y", 2e-3),
        iw.Resistor("R", "x", "y", 50.0),
        *(iw.Diode(k, a, b, saturation_current_a=1e-12, thermal_voltage_v=0.02585) for k, (a, b) in arms.items()),
    )
    volt, flow = iw.NodeVoltage("x", "y"), iw.ElementCurrent("D1")
    answer = periodic_response(network, 0.02, 1e-3, [volt, flow])
    assert answer.mean(volt) / 50.0 == pytest.approx(2.0 * answer.mean(flow), rel=1e-5)
    assert 17.0 < answer.mean(volt) < answer.peak(volt) < 20.0 - 2.0 * 0.02585 * np.log(answer.mean(flow) / 1e-12)
    assert [answer.mean_power_w[k] for k in arms] == pytest.approx([answer.mean_power_w["D1"]] * 4, rel=1e-4)


def test_a_chopper_with_timed_switch():
    """Mean voltages of the inductor vanish; a period of the diode's own time is that of the switch."""
    period = 1e-4
    network = iw.Network(
        "g",
        [
            iw.VoltageSource("E", "a", "g", iw.Constant(24.0)),
            iw.Switch("S", "a", "b", iw.Gate(period, 0.4 * period), 0.01, 1e7),
            iw.Diode("D", "g", "b", **LAW),
            iw.Capacitor("Cj", "g", "b", 1e-9),
            iw.Inductor("L", "b", "c", 1e-3),
            iw.Resistor("R", "c", "g", 4.0),
        ],
    )
    b, i = iw.NodeVoltage("b"), iw.ElementCurrent("L")
    answer = periodic_response(network, period, period / 100, [b, i])
    assert answer.mean(b) == pytest.approx(4.0 * answer.mean(i), rel=1e-5)
    drop = 0.04 * np.log(answer.mean(i) / 1e-9)
    on = 24.0 - 0.01 * answer.mean(i)
    assert answer.mean(b) == pytest.approx(0.4 * on - 0.6 * drop, rel=2e-3)
    assert [(e.element, e.state) for e in answer.events] == [("S", "closed"), ("S", "open")]
    assert -answer.mean_power_w["E"] == pytest.approx(sum(answer.mean_power_w[k] for k in ("S", "D", "R")), rel=1e-6)
    assert abs(answer.multipliers[0]) == pytest.approx(np.exp(-4.0 * period / 1e-3), rel=2e-3)


def resonance(*elements: iw.Element) -> iw.Network:
    """A capacitor in series with a core that saturates above the voltage applied: it has a low and a high state."""
    core = iw.SaturableInductor("S", "c", "g", [0.01, 1.0], [1.1 / OMEGA, 1.3 / OMEGA])
    return line(
        0.3, iw.Resistor("R", "a", "b", 0.02), iw.Capacitor("C", "b", "c", 1.0 / (2.0 * OMEGA)), core, *elements
    )


@pytest.mark.parametrize("elements", [(), (iw.Arrester("Z", "a", "g", 10.0, 1.0, 10.0),)], ids=["straight", "smooth"])
def test_ferroresonance_has_two_states(elements: tuple[iw.Element, ...]):
    """The low state is linear: V/(X_m − X_C) with X_m = 110; the high one is told of, and is there in time."""
    current = iw.ElementCurrent("S")
    answer = periodic_response(resonance(*elements), 0.02, 1e-3, [current])
    assert abs(answer.peaks[0]) == pytest.approx(0.3 / 108.0, rel=1e-5)
    assert "SEVERAL_PERIODIC_STATES" in [finding.code for finding in answer.findings]
    if not elements:
        wave = time_response_switching(resonance(), 3.0, 1e-3, [current], {iw.ElementVoltage("C"): 2.0})
        assert np.abs(wave.samples[-100:]).max() > 1.5
