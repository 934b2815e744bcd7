"""Switched and nonlinear networks against general stiff integrators on the same equations, ratios in one run.

Run it as a script; it prints the ratios. One BLAS thread on both sides (set OPENBLAS_NUM_THREADS=1).
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

import numpy as np
from scipy.integrate import solve_ivp

sys.path.insert(0, str(Path(__file__).parents[1] / "response"))

import ring_modulator
from converters import CELL_LIFT_PERIOD_S, cell_lift_supply, cell_lift_windings

import interwind as iw

T = CELL_LIFT_PERIOD_S
FORWARD, SLOPE = np.array([0.55, 0.6, 0.6, 0.7]), np.array([0.02, 0.1, 0.1, 0.3])
FARAD, LOAD = np.array([47e-6, 4.7e-6, 2.2e-6, 2.2e-6]), np.array([24.0, 150.0, 750.0, 800.0])
KNEE_V, KNEE_A = 0.1, 1e-7


def smooth_cell_lift(closed: bool):
    """The cell-lift supply with smooth diodes, as dy/dt of 5 winding currents, drain, clamp and four rails."""
    coils = cell_lift_windings()
    inverse, R = np.linalg.inv(coils.inductance_h), coils.resistance_ohm
    switch_s = 1 / 0.5 if closed else 1 / 5e6

    def rate(t: float, y: np.ndarray) -> np.ndarray:
        i, drain, clamp, rail = y[:5], y[5], y[6], y[7:]
        off, on = 1e6 * i[1:], FORWARD + SLOPE * i[1:]
        diode_v = 0.5 * (off + on - np.sqrt((off - on) ** 2 + KNEE_V**2))
        v = drain - 600.0 - clamp
        off, on = v / 5e6, (v - 0.9) / 2.0
        clamp_a = 0.5 * (off + on + np.sqrt((off - on) ** 2 + KNEE_A**2))
        voltage = np.concatenate([[600.0 - drain], -(rail + diode_v)])
        return np.concatenate(
            [
                inverse @ (voltage - R * i),
                [(i[0] - drain * switch_s - clamp_a) / 70e-12, (clamp_a - clamp / 100e3) / 2.2e-9],
                (i[1:] - rail / LOAD) / FARAD,
            ]
        )

    return rate


def radau_period(y: np.ndarray) -> tuple[float, np.ndarray]:
    """Time and end state of one period by Radau at rtol 1e-7."""
    begin = time.perf_counter()
    for closed, start, stop in ((True, 0.0, 0.103 * T), (False, 0.103 * T, T)):
        y = solve_ivp(smooth_cell_lift(closed), (start, stop), y, method="Radau", rtol=1e-7, atol=1e-9).y[:, -1]
    return time.perf_counter() - begin, y


def cell_lift(solver: iw.Client, periods: int = 100) -> tuple[float, float]:
    """Return (Radau seconds a period over ours, largest difference of the rails after a period)."""
    windings = [iw.WindingCurrent("T1", f"W{k}") for k in range(1, 6)]
    volts = [iw.NodeVoltage("drain"), iw.ElementVoltage("clamp"), *(iw.NodeVoltage(f"rail{k}") for k in (2, 3, 4, 5))]
    network = cell_lift_supply()
    steady = solver.periodic_response(network, period_s=T, step_s=T, observe=[*windings, *volts])
    y = steady.samples[0]
    stores = [
        iw.ElementVoltage("output capacitance"),
        *(iw.ElementVoltage(n) for n in ("clamp", "C2", "C3", "C4", "C5")),
    ]
    initial = dict(zip([*windings, *stores], y.tolist(), strict=True))
    begin = time.perf_counter()
    run = solver.time_response(
        network, stop_s=periods * T, step_s=T, observe=[*windings, *volts], initial=initial, timeout_s=300
    )
    ours = (time.perf_counter() - begin) / periods
    theirs, end = radau_period(y)
    return theirs / ours, float(np.abs(run.samples[1, 7:] / end[7:] - 1.0).max())


def settling_flyback() -> tuple[iw.Network, float]:
    """A flyback whose output settles in thousands of periods."""
    period, L1, L2, k = 1 / 65e3, 500e-6, 5e-6, 0.999
    M = k * np.sqrt(L1 * L2)
    coils = iw.WindingSet(("p", "s"), [[L1, M], [M, L2]], [0.5, 0.01])
    elements = [
        iw.VoltageSource("bus", "in", "g", iw.Constant(300.0)),
        iw.Windings("T", coils, {"p": ("in", "d"), "s": ("g", "a")}),
        iw.Switch("Q", "d", "g", iw.Gate(period, 0.2 * period), 0.2, 1e6),
        iw.Diode("Dc", "d", "c", 0.8, 0.5, 1e6),
        iw.Capacitor("Cc", "c", "in", 10e-9),
        iw.Resistor("Rc", "c", "in", 47e3),
        iw.Diode("D", "a", "o", 0.6, 0.02, 1e5),
        iw.Capacitor("C", "o", "g", 1000e-6),
        iw.Resistor("R", "o", "g", 5.0),
    ]
    return iw.Network("g", elements), period


def flyback(solver: iw.Client, periods: int = 3000) -> tuple[float, int, float]:
    """Return (waiting over direct solve, periods propagated, relative difference of the output after the wait)."""
    network, period = settling_flyback()
    out = iw.NodeVoltage("o")
    begin = time.perf_counter()
    steady = solver.periodic_response(network, period_s=period, step_s=period, observe=[out])
    direct = time.perf_counter() - begin
    begin = time.perf_counter()
    wait = solver.time_response(network, stop_s=periods * period, step_s=period, observe=[out], timeout_s=300)
    waited = time.perf_counter() - begin
    return waited / direct, steady.evidence.periods_propagated, float(abs(wait[out][-1] / steady[out][0] - 1.0))


def ring(solver: iw.Client) -> tuple[tuple[float, float], tuple[float, float]]:
    """Return (seconds, worst error over the largest voltage) of the ring modulator to 1 ms, ours and Radau's."""
    exact = ring_modulator.PUBLISHED_AT_1_MS

    def gap(y: np.ndarray) -> float:
        return float(np.abs(y - exact).max() / np.abs(exact).max())

    begin = time.perf_counter()
    wave = solver.time_response(
        ring_modulator.network(), stop_s=1e-3, step_s=1e-3, observe=list(ring_modulator.OBSERVE), tolerance=1e-7,
        timeout_s=600,
    )  # fmt: skip
    ours = time.perf_counter() - begin, gap(wave.samples[-1] * ring_modulator.SIGNS)
    begin = time.perf_counter()
    y = solve_ivp(ring_modulator.equations, (0.0, 1e-3), np.zeros(15), method="Radau", rtol=1e-5, atol=1e-8).y[:7, -1]
    return ours, (time.perf_counter() - begin, gap(y))


if __name__ == "__main__":
    with iw.connect() as client:
        ratio, gap = cell_lift(client)
        print(f"cell-lift supply over 100 periods: {ratio:.0f} times Radau, rails within {gap:.1e}")
        ratio, count, gap = flyback(client)
        print(f"flyback of 3000 periods: {count} periods propagated, {ratio:.0f} times faster, output within {gap:.1e}")
        for method, (seconds, gap) in zip(("ours", "Radau"), ring(client), strict=True):
            print(f"ring modulator to 1 ms, {method}: {seconds:.1f} s, error {gap:.1e}")
