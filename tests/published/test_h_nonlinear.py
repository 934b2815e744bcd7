"""Published nonlinear benchmarks, built as networks."""

from __future__ import annotations

import numpy as np

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
