"""Area B, coupled circuits in the sinusoidal state, through the public client.

Reactances of the books are realised at ω = 1 rad/s, so that X ohm is X henry or 1/X farad.
"""

from __future__ import annotations

import cmath
import math

import numpy as np
import pytest

import interwind as iw

UNIT_HZ = 1 / (2 * math.pi)


def polar(magnitude: float, degrees: float) -> complex:
    return cmath.rect(magnitude, math.radians(degrees))


def pair(first_h: float, second_h: float, mutual_h: float, resistance_ohm=0.0) -> iw.WindingSet:
    return iw.WindingSet(("1", "2"), [[first_h, mutual_h], [mutual_h, second_h]], resistance_ohm)


def supply(volts: complex, phasor_node: str = "in") -> iw.VoltageSource:
    return iw.VoltageSource("V", phasor_node, "0", phasor=volts)


def current(answer: iw.FrequencyResponse, label: str) -> complex:
    return complex(answer[iw.WindingCurrent("T", label)][0])


def inductance(solver, coils: iw.WindingSet, terminals, hertz: float = 1e3) -> float:
    """What a port from node a to node 0 sees, H."""
    net = iw.Network("0", [iw.Windings("T", coils, terminals)], [iw.Port("p", "a", "0", 1.0)])
    return float(solver.port_response(net, [hertz]).impedance_ohm[0, 0, 0].imag / (2 * math.pi * hertz))


AIDING = {"1": ("a", "m"), "2": ("m", "0")}
OPPOSING = {"1": ("a", "m"), "2": ("0", "m")}
PARALLEL = {"1": ("a", "0"), "2": ("a", "0")}


def test_b01_two_meshes(solver):
    """Alexander & Sadiku, Fundamentals of Electric Circuits, Example 13.1 (from memory): 13.01∠−49.39°, 2.91∠14.04°."""
    net = iw.Network(
        "0",
        [
            supply(12.0),
            iw.Capacitor("C", "in", "a", 1 / 4),
            iw.Windings("T", pair(5.0, 6.0, 3.0), {"1": ("a", "0"), "2": ("0", "b")}),
            iw.Resistor("R", "b", "0", 12.0),
        ],
    )
    answer = solver.frequency_response(net, [UNIT_HZ])
    assert current(answer, "1") == pytest.approx(polar(13.0158, -49.3987), rel=1e-4)
    # the book's second mesh current leaves the dotted end of the second coil
    assert -current(answer, "2") == pytest.approx(polar(2.91043, 14.0362), rel=1e-4)


def test_b02_meshes_sharing_a_branch(solver):
    """Alexander & Sadiku, Example 13.2 (from memory): 20.3∠3.5°, 8.693∠19°.

    Meshes [[4 + j3, −j8], [−j8, 5 + j18]]: 4 − j3 Ω and the coil j6 in the first, j6 shared, the coil j8 and 5 Ω in the
    second, M = j2 between the coils.
    """
    coils = pair(6.0, 8.0, 2.0)
    net = iw.Network(
        "0",
        [
            supply(100.0),
            iw.Resistor("R4", "in", "x", 4.0),
            iw.Capacitor("C", "x", "m", 1 / 3),
            # the shared coil carries I1 − I2, the second I2; the fields of I2 in both count 6 + 8 + 2·2 = 18 and the
            # mutual impedance 6 + 2 = 8, so that I2 enters the second at its dot and leaves the first at its dot
            iw.Windings("T", coils, {"1": ("m", "0"), "2": ("c", "m")}),
            iw.Resistor("R5", "0", "c", 5.0),
        ],
    )
    answer = solver.frequency_response(net, [UNIT_HZ], [iw.ElementCurrent("R4"), iw.ElementCurrent("R5")])
    assert complex(answer[iw.ElementCurrent("R4")][0]) == pytest.approx(polar(20.300, 3.5015), rel=1e-4)
    assert -complex(answer[iw.ElementCurrent("R5")][0]) == pytest.approx(polar(8.69308, 19.0256), rel=1e-4)


def test_b05_input_impedance(solver):
    """Alexander & Sadiku, Example 13.4 (from memory): Zin = 100.14∠−53.1° Ω, I1 = 0.5∠113.1° A."""
    net = iw.Network(
        "0",
        [
            supply(polar(50.0, 60.0)),
            iw.Resistor("R1", "in", "x", 60.0),
            iw.Capacitor("C1", "x", "a", 1 / 100),
            iw.Windings("T", pair(20.0, 40.0, 5.0), {"1": ("a", "0"), "2": ("b", "0")}),
            iw.Resistor("R2", "b", "c", 110.0),
            iw.Inductor("X2", "c", "0", 100.0),
        ],
    )
    answer = solver.frequency_response(net, [UNIT_HZ], [iw.ElementCurrent("R1")])
    i1 = complex(answer[iw.ElementCurrent("R1")][0])
    assert i1 == pytest.approx(polar(0.499299, 113.1283), rel=1e-4)
    assert polar(50.0, 60.0) / i1 == pytest.approx(polar(100.140, -53.1283), rel=1e-4)


def test_b06_input_impedance(solver):
    """Alexander & Sadiku, Practice Problem 13.4 (from memory): 8.58∠58.05° Ω, 4.662∠−58.05° A."""
    net = iw.Network(
        "0",
        [
            supply(40.0),
            iw.Resistor("R1", "in", "a", 4.0),
            iw.Windings("T", pair(8.0, 10.0, 3.0), {"1": ("a", "0"), "2": ("b", "0")}),
            iw.Capacitor("C2", "b", "c", 1 / 6),
            iw.Resistor("R2", "c", "d", 6.0),
            iw.Inductor("X2", "d", "0", 4.0),
        ],
    )
    i1 = complex(solver.frequency_response(net, [UNIT_HZ], [iw.ElementCurrent("R1")])[iw.ElementCurrent("R1")][0])
    assert i1 == pytest.approx(polar(4.66221, -58.0512), rel=1e-4)
    assert 40.0 / i1 == pytest.approx(polar(8.57963, 58.0512), rel=1e-4)


def test_b07_tee_and_pi_are_the_same_two_port(solver):
    """Alexander & Sadiku, Example 13.5 (from memory): L1 = 10, L2 = 4, M = 2 H; T 8, 2, 2 H; Π 18, 4.5, 18 H."""
    ports = [iw.Port("1", "a", "0"), iw.Port("2", "b", "0")]
    coupled = iw.Network("0", [iw.Windings("T", pair(10.0, 4.0, 2.0), {"1": ("a", "0"), "2": ("b", "0")})], ports)
    tee = iw.Network(
        "0",
        [iw.Inductor("La", "a", "m", 8.0), iw.Inductor("Lb", "b", "m", 2.0), iw.Inductor("Lc", "m", "0", 2.0)],
        ports,
    )
    pi = iw.Network(
        "0",
        [iw.Inductor("LA", "a", "0", 18.0), iw.Inductor("LB", "b", "0", 4.5), iw.Inductor("LC", "a", "b", 18.0)],
        ports,
    )
    expected = 1j * np.array([[10.0, 2.0], [2.0, 4.0]])
    for net in (coupled, tee, pi):
        Z = solver.port_response(net, [UNIT_HZ]).impedance_ohm[0]
        np.testing.assert_allclose(Z, expected, rtol=1e-13)


def test_b10_linear_transformer(solver):
    """Data looked up, answers from memory (Nilsson & Riedel): i1 = 0.5∠−53.13° A, i2 = 0.08∠0° A."""
    coils = iw.WindingSet.from_coupling(("1", "2"), [0.5, 0.125], [[1, 0.4], [0.4, 1]], [100.0, 40.0])
    net = iw.Network(
        "0",
        [
            supply(245.20),
            iw.Resistor("ZS", "in", "a", 184.0),
            iw.Windings("T", coils, {"1": ("a", "0"), "2": ("0", "b")}),
            iw.Resistor("RL", "b", "c", 360.0),
            iw.Inductor("LL", "c", "0", 0.25),
        ],
    )
    answer = solver.frequency_response(net, [800 / (2 * math.pi)])
    assert current(answer, "1") == pytest.approx(0.5 * (0.6 - 0.8j), rel=1e-6)
    # the book's second current leaves the dotted end of the second coil
    assert -current(answer, "2") == pytest.approx(0.08, rel=1e-6)


def test_b11_step_up_with_load(solver):
    """Hayt, Kemmerly & Durbin, ch. 13 (from memory): I2 = 0.1724, V2/V1 = 6.896."""
    net = iw.Network(
        "0",
        [
            supply(10.0),
            iw.Resistor("R1", "in", "a", 1.0),
            iw.Windings("T", pair(1.0, 100.0, 9.0), {"1": ("a", "0"), "2": ("b", "0")}),
            iw.Resistor("R2", "b", "0", 400.0),
        ],
    )
    observe = [iw.ElementCurrent("R2"), iw.NodeVoltage("b")]
    answer = solver.frequency_response(net, [10 / (2 * math.pi)], observe)
    assert complex(answer.samples[0, 0]) == pytest.approx(polar(0.172409, -16.6992), rel=1e-5)
    assert complex(answer.samples[0, 1]) / 10.0 == pytest.approx(polar(6.89635, -16.6992), rel=1e-5)


def test_b15_three_coils_in_series(solver):
    """Alexander & Sadiku, Problem 13.2 (from memory): 22 H; eigenvalues 3.64476644, 5.32215659, 21.03307697 H."""
    coils = iw.WindingSet(("1", "2", "3"), [[10, 6, -4], [6, 12, -6], [-4, -6, 8]])
    series = {"1": ("a", "m"), "2": ("m", "n"), "3": ("n", "0")}
    assert inductance(solver, coils, series) == pytest.approx(22.0, rel=1e-8)
    found = solver.check(coils).eigenvalues_h
    np.testing.assert_allclose(found, [3.64476644, 5.32215659, 21.03307697], rtol=1e-8)


# case, L1, L2, M or k (H), aiding, opposing, tolerance; sources beside each
SERIES = [
    # Alexander & Sadiku, Problem 13.3 (from memory): 250 and 150 mH aiding and opposing, L1 = 3 L2
    ("B-16", 150e-3, 50e-3, 25e-3, 250e-3, 150e-3, 1e-12),
    # Alexander & Sadiku, Problem 13.5 (from memory)
    ("B-17", 25e-3, 60e-3, 0.5 * math.sqrt(25e-3 * 60e-3), 123.729833e-3, None, 1e-6),
    # Problems 10-5, 10-6 of an electronics text by Gibilisco (looked up): printed 643 µH; 118.8 µH
    ("B-18 opposing", 835e-6, 2.44e-3, 0.922 * math.sqrt(835e-6 * 2.44e-3), None, 642.920e-6, 1e-5),
    ("B-18 aiding", 30e-6, 50e-6, 0.5 * math.sqrt(30e-6 * 50e-6), 118.730e-6, None, 1e-5),
    # "Introduction to Electric Circuits", Example 2.18 (looked up)
    ("B-19 M = 8 mH", 2.5e-3, 40e-3, 8e-3, 58.5e-3, 26.5e-3, 1e-12),
    ("B-19 k = 1", 2.5e-3, 40e-3, 10e-3, 62.5e-3, 22.5e-3, 1e-12),
    # a public question and answer collection (looked up)
    ("B-20", 5.0, 5.0, 2.0, 14.0, 6.0, 1e-12),
]


@pytest.mark.parametrize("case", SERIES, ids=[case[0] for case in SERIES])
def test_series_aiding_and_opposing(solver, case):
    _, first, second, mutual, aiding, opposing, tolerance = case
    coils = pair(first, second, mutual)
    if aiding is not None:
        assert inductance(solver, coils, AIDING) == pytest.approx(aiding, rel=tolerance)
    if opposing is not None:
        assert inductance(solver, coils, OPPOSING) == pytest.approx(opposing, rel=tolerance)


def test_b17_parallel_aiding(solver):
    """Alexander & Sadiku, Problem 13.5 (from memory): 24.31 mH; recomputed 24.313723."""
    mutual = 0.5 * math.sqrt(25e-3 * 60e-3)
    assert inductance(solver, pair(25e-3, 60e-3, mutual), PARALLEL) == pytest.approx(24.313723e-3, rel=1e-6)


@pytest.mark.parametrize(("k", "shorted_uh"), [(0.1, 99.0), (0.5, 75.0), (0.9, 19.0), (0.99, 1.99)])
def test_b21_short_circuit_inductance(solver, k, shorted_uh):
    """L1 (1 − k²) with the second coil shorted (derived; Terman, Radio Engineers' Handbook)."""
    coils = iw.WindingSet.from_coupling(("1", "2"), [100e-6, 37e-6], [[1, k], [k, 1]])
    shorted = inductance(solver, coils, {"1": ("a", "0"), "2": ("x", "x")})
    assert shorted == pytest.approx(shorted_uh * 1e-6, rel=1e-12)
    assert math.sqrt(1 - shorted / 100e-6) == pytest.approx(k, rel=1e-11)


@pytest.mark.parametrize("mode_hz", [4.798702089e6, 5.305164770e6])
def test_b23_splitting_of_an_identical_pair(solver, mode_hz):
    """Two coils of 10 µH with 100 pF each, k = 0.1 (derived): the reactance at a port changes sign at f0/√(1 ± k)."""
    coils = iw.WindingSet.from_coupling(("1", "2"), [10e-6, 10e-6], [[1, 0.1], [0.1, 1]])
    assert_mode(solver, coils, 100e-12, mode_hz)


@pytest.mark.parametrize("ratio", [0.816496581, 1.154700538])
def test_b25_three_identical_coils(solver, ratio):
    """K = 0.25 (derived): modes at ω0/√(1 + 2k) and, double, at ω0/√(1 − k)."""
    k = np.full((3, 3), 0.25) + 0.75 * np.eye(3)
    coils = iw.WindingSet.from_coupling(("1", "2", "3"), [10e-6] * 3, k)
    assert_mode(solver, coils, 100e-12, ratio / (2 * math.pi * math.sqrt(10e-6 * 100e-12)))


def assert_mode(solver, coils: iw.WindingSet, farad: float, mode_hz: float) -> None:
    """Every coil has its own capacitor; the impedance at the first has a pole within 1e-9 of the mode."""
    elements: list = [iw.Windings("T", coils, {label: (label, "0") for label in coils.labels})]
    elements += [iw.Capacitor(f"C{label}", label, "0", farad) for label in coils.labels]
    net = iw.Network("0", elements, [iw.Port("p", coils.labels[0], "0")])
    around = np.array([1 - 1e-9, 1 + 1e-9]) * mode_hz
    below, above = solver.port_response(net, around).impedance_ohm[:, 0, 0].imag
    assert below > 0 > above


def test_b28_tapped_winding(solver):
    """Aiding parts of 100 and 400 µH, k = 1 (derived): 900 µH in all; the tap of the first part stands at a third."""
    coils = iw.WindingSet.from_coupling(("2", "1"), [400e-6, 100e-6], [[1, 1], [1, 1]])
    terminals = {"2": ("a", "tap"), "1": ("tap", "0")}
    assert inductance(solver, coils, terminals) == pytest.approx(900e-6, rel=1e-13)
    net = iw.Network("0", [supply(1.0, "a"), iw.Windings("T", coils, terminals)])
    tap = solver.frequency_response(net, [1e3])[iw.NodeVoltage("tap")][0]
    assert complex(tap) == pytest.approx(1 / 3, rel=1e-13)


def test_b29_ideal_transformer_limit(solver):
    """Lm = 1 H, n = 10, k = 1, 100 Ω at ω = 377 (derived): jωLm in parallel with 1 Ω."""
    coils = iw.WindingSet.from_coupling(("1", "2"), [1.0, 100.0], [[1, 1], [1, 1]])
    net = iw.Network(
        "0",
        [iw.Windings("T", coils, {"1": ("a", "0"), "2": ("b", "0")}), iw.Resistor("RL", "b", "0", 100.0)],
        [iw.Port("p", "a", "0")],
    )
    Z = complex(solver.port_response(net, [377 / (2 * math.pi)]).impedance_ohm[0, 0, 0])
    assert Z == pytest.approx(0.99999296 + 0.00265250j, abs=1e-8)
    assert Z == pytest.approx(1 / (1 / 377j + 1), rel=1e-13)


def test_b30_mutual_from_coupling(solver):
    """Dorf & Svoboda, data of Example 11.9-1 (looked up): 4 H, 3 H, k = 0.58 give M = 2.009178938 H."""
    coils = iw.WindingSet.from_coupling(("1", "2"), [4.0, 3.0], [[1, 0.58], [0.58, 1]])
    system = solver.stamp(iw.Network("0", [iw.Windings("T", coils, {"1": ("a", "0"), "2": ("b", "0")})]))
    assert system.C[2, 3] == pytest.approx(2.009178938, rel=1e-9)
