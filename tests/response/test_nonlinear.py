"""Smooth laws: exponential diodes, arresters and saturable branches by RODAS4."""

from __future__ import annotations

import numpy as np
import pytest
import ring_modulator
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

import interwind as iw
from interwind_service.network.topology import number
from interwind_service.response.request.recording import Window
from interwind_service.response.smooth.nonlinear import NonlinearRecord, NonlinearRun
from interwind_service.response.smooth.rosenbrock import Effort, integrate
from interwind_service.response.smooth.smooth_network import Stretch, smooth_network
from interwind_service.response.switched.handover import Handover
from interwind_service.response.switching import time_response_switching


def test_ring_modulator_is_its_published_equations():
    """The network of windings and diodes follows the published right-hand side (Radau at 1e-10, scipy)."""
    stop = 4e-6
    reference = solve_ivp(ring_modulator.equations, (0, stop), np.zeros(15), method="Radau", rtol=1e-10, atol=1e-14)
    wave = time_response_switching(ring_modulator.network(), stop, stop / 4, ring_modulator.OBSERVE, None, 1e-7)
    expected = reference.y[:7, -1] * ring_modulator.SIGNS
    assert np.allclose(wave.samples[-1], expected, rtol=0.0, atol=1e-7 * 0.5)  # of the source's 0.5 V
    assert wave.evidence.energy_error < 1e-7


def follow(topology, time_s, observables, tolerance: float) -> tuple[NonlinearRun, np.ndarray]:
    """A run over evenly spaced instants, and its samples."""
    steps = len(time_s) - 1
    out = Handover(topology, observables, Window(0, steps, 1))
    run = NonlinearRun(topology, float(time_s[-1]) / steps, steps, out, None, tolerance)
    return run, out.recorder.samples


def clipped_tank(thermal_v: float | None) -> iw.Network:
    """A driven tank with a diode to a battery: a smooth run that bends hard."""
    law = {"saturation_current_a": 1e-6, "thermal_voltage_v": thermal_v} if thermal_v else {}
    return iw.Network(
        "g",
        [
            iw.VoltageSource("drive", "in", "g", iw.Sine(2.0, 50e3)),
            iw.Resistor("R", "in", "a", 20.0),
            iw.Inductor("L", "a", "b", 50e-6),
            iw.Capacitor("C", "b", "g", 50e-9),
            iw.Diode("D", "b", "c", **law),
            iw.Resistor("Rd", "c", "d", 5.0),
            iw.VoltageSource("battery", "d", "g", iw.Constant(0.5)),
        ],
    )


def test_order_four():
    """The error falls with the fourth power of the step."""
    topology, time_s = number(clipped_tank(0.05)), np.linspace(0.0, 10e-6, 5)
    observed = [iw.ElementVoltage("C"), iw.ElementCurrent("L")]
    _, exact = follow(topology, time_s, observed, 1e-12)
    steps, errors = [], []
    for tolerance in (1e-6, 1e-7, 1e-8, 1e-9):
        run, samples = follow(topology, time_s, observed, tolerance)
        steps.append(run.effort.accepted)
        errors.append(np.abs((samples - exact)[[-1]] / np.abs(exact).max(axis=0)).max())
    order = -np.polyfit(np.log(steps), np.log(errors), 1)[0]
    assert order == pytest.approx(4.0, abs=0.35)


def even_steps(topology, stop_s: float, steps: int) -> tuple[np.ndarray, float]:
    """The state after steps of one length, the tolerance out of reach, and the gap of the ledger, J."""
    network = smooth_network(topology, stop_s, stop_s, 1.0)
    drives, mode = network.tableau.drives, network.start_mode(np.zeros(network.tableau.states))
    field, ledger = network.equations(mode)
    w, h = drives.state(0.0), stop_s / steps
    y = start = field.consistent(np.zeros(field.size), field.drives(w))
    record = NonlinearRecord(network, stop_s, 1, Handover(topology, [], Window(0, 1, 1)))
    record.begin(Stretch(field, ledger, mode, 0.0, stop_s, w))
    for k in range(steps):
        effort = Effort(size=1.0, step_s=2.0 * h)
        y = integrate(field, drives, y, w, k * h, (k + 1) * h, 1e30, effort, record.take, None)
        assert effort.accepted == 1
        w = drives.moved(drives.state(0.0), (k + 1) * h)
    energy = record.energy(start[: field.states], y[: field.states], 0.0)
    return y[: field.states], abs(energy.ledger.numerical_j)


def test_state_and_energy_are_of_order_four_in_the_step():
    """With steps of one length both errors fall with its fourth power (Hairer & Wanner 1996: RODAS is of order 4)."""
    topology, stop_s, numbers = number(clipped_tank(0.3)), 10e-6, np.array([50, 100, 200, 400])
    exact, _ = even_steps(topology, stop_s, 1600)
    runs = [even_steps(topology, stop_s, int(steps)) for steps in numbers]
    of_state = [float(np.linalg.norm(y - exact)) for y, _ in runs]
    of_energy = [gap for _, gap in runs]
    for errors in (of_state, of_energy):
        order = np.polyfit(np.log(stop_s / numbers), np.log(errors), 1)[0]
        assert order == pytest.approx(4.0, abs=0.1)


def test_ledger_closes_with_the_tolerance():
    """The energy error is a quadrature by the same stages, so it falls with the local tolerance."""
    topology, time_s = number(clipped_tank(0.05)), np.linspace(0.0, 40e-6, 3)
    gaps = [follow(topology, time_s, [], tolerance)[0].evidence.energy_error for tolerance in (1e-6, 1e-8, 1e-10)]
    assert gaps[0] < 1e-5
    assert gaps[1] < 1e-7
    assert gaps[2] < 1e-9


def test_dense_output_is_of_order_three():
    """Samples between the steps follow the exact solution; the interpolant loses one order, not more."""
    topology = number(clipped_tank(0.05))
    coarse, fine = np.linspace(0.0, 10e-6, 101), [iw.ElementVoltage("C")]
    _, exact = follow(topology, coarse, fine, 1e-11)
    _, samples = follow(topology, coarse, fine, 1e-7)
    assert np.abs(samples - exact).max() < 1e-4 * np.abs(exact).max()


def test_exponential_diode_becomes_the_ideal_one():
    """The mean current of a half-wave rectifier approaches that of the ideal diode in first order of V_T.

    At a fixed current the forward voltage V_T ln(1 + i/I_s) is proportional to V_T.
    """

    def charge(law: dict) -> float:
        net = iw.Network(
            "g",
            [
                iw.VoltageSource("line", "a", "g", iw.Sine(10.0, 50.0)),
                iw.Diode("D", "a", "b", **law),
                iw.Resistor("R", "b", "c", 10.0),
                iw.Inductor("L", "c", "g", 20e-3),
                iw.CurrentByCurrent("copy", "s", "g", "R", -1.0),
                iw.Capacitor("sum", "s", "g", 1.0),
                iw.Resistor("leak", "s", "g", 1e9),
            ],
        )
        return float(time_response_switching(net, 0.02, 0.01, [iw.ElementVoltage("sum")], None, 1e-6).samples[-1, 0])

    ideal = charge({})
    thermal = np.array([0.1, 0.05, 0.025])
    gap = [ideal - charge({"saturation_current_a": 1e-3, "thermal_voltage_v": v}) for v in thermal]
    assert min(gap) > 0.0
    assert np.polyfit(np.log(thermal), np.log(gap), 1)[0] == pytest.approx(1.0, abs=0.06)


def test_arrester_holds_its_voltage():
    """A power law in series with a resistance at DC: v + R I_ref (v/V_ref)^α = E (closed form, one root)."""
    E, R, reference_v, reference_a, alpha = 3000.0, 10.0, 1000.0, 1.0, 25.0
    net = iw.Network(
        "g",
        [
            iw.VoltageSource("surge", "in", "g", iw.Step(E)),
            iw.Resistor("R", "in", "a", R),
            iw.Capacitor("C", "a", "g", 1e-9),
            iw.Arrester("Z", "a", "g", reference_v, reference_a, alpha),
        ],
    )
    wave = time_response_switching(net, 1e-6, 1e-7, [iw.NodeVoltage("a"), iw.ElementCurrent("Z")])
    v = brentq(lambda u: u + R * reference_a * (u / reference_v) ** alpha - E, 1.0, E)
    assert wave.samples[-1] == pytest.approx([v, (E - v) / R], rel=1e-6)


def test_arrester_without_a_capacitance():
    """The same without the capacitor is an algebraic equation at every instant."""
    net = iw.Network(
        "g",
        [
            iw.VoltageSource("line", "in", "g", iw.Sine(3000.0, 50.0)),
            iw.Resistor("R", "in", "a", 10.0),
            iw.Arrester("Z", "a", "g", 1000.0, 1.0, 25.0),
            iw.Inductor("beside", "in", "b", 1.0),
            iw.Resistor("Rb", "b", "g", 100.0),
        ],
    )
    wave = time_response_switching(net, 20e-3, 1e-3, [iw.NodeVoltage("a")], None, 1e-6)
    for t, found in zip(wave.time_s, wave.samples[:, 0], strict=True):
        E = 3000.0 * np.sin(100 * np.pi * t)
        v = brentq(lambda u, E=E: u + 10.0 * np.sign(u) * (abs(u) / 1000.0) ** 25.0 - E, -3000.1, 3000.1)
        assert found == pytest.approx(v, abs=1e-3 * 1000.0 * 1e-2)


def test_saturable_branch_beside_an_exponential_diode():
    """Mixed laws agree with the run by straight pieces, to the tolerance, when the diode is out of reach."""
    omega = 100 * np.pi
    knee = iw.SaturableInductor("Lm", "b", "g", [0.002, 8.0], [1.2 / omega, 2.2 / omega], 0.5 / omega)
    base = [iw.VoltageSource("line", "a", "g", iw.Sine(1.0, 50.0)), iw.Resistor("R", "a", "b", 0.01), knee]
    current = iw.ElementCurrent("Lm")
    straight = time_response_switching(iw.Network("g", base), 0.02, 1e-3, [current])
    blocked = iw.Diode("far", "g", "c", saturation_current_a=1e-15, thermal_voltage_v=0.03)
    bias = [blocked, iw.VoltageSource("bias", "c", "b", iw.Constant(5.0))]
    smooth = time_response_switching(iw.Network("g", base + bias), 0.02, 1e-3, [current], None, 1e-7)
    assert np.allclose(smooth.samples, straight.samples, rtol=0.0, atol=1e-6 * np.abs(straight.samples).max())


def test_switches_and_smooth_laws_together():
    """An opened inductor is caught by an arrester, and the energy goes where it should."""
    net = iw.Network(
        "g",
        [
            iw.VoltageSource("E", "in", "g", iw.Constant(10.0)),
            iw.Inductor("L", "in", "a", 1e-3),
            iw.Switch("S", "a", "g", iw.GateTimes([1e-4], initially_closed=True), 0.01, 1e6),
            iw.Capacitor("C", "a", "g", 1e-9),
            iw.Arrester("Z", "a", "g", 100.0, 1.0, 20.0),
        ],
    )
    wave = time_response_switching(net, 3e-4, 1e-6, [iw.NodeVoltage("a")])
    assert [(e.element, e.state) for e in wave.events] == [("S", "closed"), ("S", "open")]
    assert 80.0 < wave[iw.NodeVoltage("a")].max() < 101.0
    assert wave.ledger.dissipated_by_element_j["Z"] > 0.5e-3
    assert wave.evidence.energy_error < 1e-6
