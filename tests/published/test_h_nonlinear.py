"""Published nonlinear benchmarks, built as networks."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import fsolve

import interwind as iw


def transistor_amplifier() -> iw.Network:
    """H-01 as a circuit: each transistor an exponential diode with a current source of 0.99 times its current."""
    ohm = 9e3
    elements = [
        iw.VoltageSource("Ue", "e", "g", iw.Sine(0.1, 100.0)),
        iw.VoltageSource("Ub", "b", "g", iw.Constant(6.0)),
        iw.Resistor("R0", "e", "1", 1e3),
    ]
    for k, (a, b) in enumerate([("2", "g"), ("2", "b"), ("3", "g"), ("4", "b"), ("5", "g"), ("5", "b"), ("6", "g"),
                                ("7", "b"), ("8", "g")], start=1):  # fmt: skip
        elements.append(iw.Resistor(f"R{k}", a, b, ohm))
    for k, (a, b) in enumerate([("1", "2"), ("3", "g"), ("4", "5"), ("6", "g"), ("7", "8")], start=1):
        elements.append(iw.Capacitor(f"C{k}", a, b, k * 1e-6))
    for k, (base, emitter, collector) in enumerate([("2", "3", "4"), ("5", "6", "7")], start=1):
        elements += [
            iw.Diode(f"T{k}", base, emitter, saturation_current_a=1e-6, thermal_voltage_v=0.026),
            iw.CurrentByCurrent(f"T{k} collector", collector, base, f"T{k}", 0.99),
        ]
    return iw.Network("g", elements)


def test_h01_transistor_amplifier(solver):
    """H-01 (looked up: Test Set for IVP Solvers, Mazzia & Magherini): the eight voltages at 0.2 s to 1e-9."""
    initial = {iw.ElementVoltage(f"C{k}"): v for k, v in enumerate((-3.0, 3.0, 3.0, 3.0, 6.0), start=1)}
    nodes = [iw.NodeVoltage(str(k)) for k in range(1, 9)]
    wave = solver.time_response(
        transistor_amplifier(), stop_s=0.2, step_s=0.01, observe=nodes, initial=initial, tolerance=3e-10, timeout_s=240
    )
    published = (-0.5562145012262709e-2, 3.006522471903042, 2.849958788608128, 2.926422536206241, 2.704617865010554,
                 2.761837778393145, 4.770927631616772, 1.236995868091548)  # fmt: skip
    assert np.allclose(wave.samples[-1], published, rtol=0.0, atol=1e-9)


def test_h01_starts_at_its_operating_point(solver):
    """The point at which H-01's published right-hand sides vanish (scipy's fsolve): nothing moves after it."""
    nodes = [iw.NodeVoltage(str(k)) for k in range(1, 9)]
    still = iw.Network("g", [iw.VoltageSource("Ue", "e", "g", iw.Constant(0.0)), *transistor_amplifier().elements[1:]])
    wave = solver.time_response(still, stop_s=0.01, step_s=0.005, observe=nodes, initial=iw.SteadyStart())

    def right(y: np.ndarray) -> np.ndarray:
        base, emitter, collector = y
        flow = 1e-6 * np.expm1((base - emitter) / 0.026)
        return np.array([2.0 * base - 6.0 + 90.0 * flow, emitter - 9e3 * flow, collector - 6.0 + 8910.0 * flow])

    stage = fsolve(right, [3.0, 2.8, 3.0], xtol=1e-13)
    expected = np.array([0.0, *stage, *stage, 0.0])
    assert np.allclose(wave.samples, expected, rtol=0.0, atol=1e-9)


def test_h01_in_its_periodic_state(solver):
    """Over a period of the 0.1 V, 100 Hz drive no capacitor gains charge, so H-01's equations hold for the means."""
    means = [iw.NodeVoltage(str(k)) for k in range(1, 9)] + [iw.ElementCurrent("T1"), iw.ElementCurrent("T2")]
    answer = solver.periodic_response(transistor_amplifier(), period_s=0.01, step_s=1e-4, observe=means)
    first, base1, emitter1, collector1, base2, emitter2, collector2, last, flow1, flow2 = answer.means
    for base, emitter, collector, flow in (base1, emitter1, collector1, flow1), (base2, emitter2, collector2, flow2):
        assert 2.0 * base - 6.0 + 90.0 * flow == pytest.approx(0.0, abs=1e-5)
        assert emitter - 9e3 * flow == pytest.approx(0.0, abs=1e-5)
        assert collector - 6.0 + 8910.0 * flow == pytest.approx(0.0, abs=1e-5)
    assert [first, last] == pytest.approx([0.0, 0.0], abs=1e-5)
    assert answer.evidence.periods_propagated < 20
    assert answer.rms(means[7]) > 20.0 * answer.rms(means[0])  # it amplifies
