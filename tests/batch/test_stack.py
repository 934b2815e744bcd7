"""Variants solved as one stack are the variants solved one by one."""

from __future__ import annotations

import link
import numpy as np
import pytest

import interwind as iw
from interwind_service import engine
from interwind_service.batch.overrides import lay_out
from interwind_service.network.topology import number
from interwind_service.response.stacked.tape import Program, Tape, largest

CLOSE = 1e-12  # of the largest value: what the two methods may differ by


def stacked(network, frequency_hz, observe, columns):
    stack = engine.prepare_stack(network, frequency_hz, observe)
    assert stack is not None
    overrides, numbers = lay_out(network, columns)
    into = np.empty((len(stack.observables), len(numbers), len(frequency_hz)), dtype=complex)
    answered = engine.stacked_responses(stack, overrides.columns(numbers), into)
    return into, answered, overrides, numbers


def compare(network, frequency_hz, observe, columns, rows):
    into, answered, overrides, numbers = stacked(network, frequency_hz, observe, columns)
    for row in rows:
        if answered[row]:
            response = engine.frequency_response(overrides.variant(numbers[row]), frequency_hz, observe)
            expected = response.samples.T
            assert np.abs(into[:, row] - expected).max() <= CLOSE * np.abs(expected).max()
    return answered


def test_link_variants_meet_the_closed_form():
    """Two hundred links: couplings and loads at random, against coupled loops in closed form."""
    rng = np.random.default_rng(1)
    coupling, load = rng.uniform(-0.6, 0.6, 200), rng.uniform(2.0, 50.0, 200)
    columns = [iw.VaryCoupling("T1", ("tx", "rx"), coupling), iw.Vary("load", "resistance_ohm", load)]
    into, answered, _, _ = stacked(link.network(), link.FREQUENCY_HZ, link.OBSERVE, columns)
    assert answered.all()
    for values, expected in zip(into, link.closed_form(coupling, load), strict=True):
        assert np.allclose(values, expected, rtol=1e-11, atol=0.0)


def test_everything_that_varies_agrees_with_one_by_one():
    """All columns a stack takes, at once, all observables it takes."""
    rng = np.random.default_rng(2)
    count = 12
    net = link.network()
    net = iw.Network(
        "zero",
        [
            *net.elements,
            iw.Inductor("choke", "out", "m", 10e-6),
            iw.Resistor("leak", "m", "zero", 1e3),
            iw.IdealTransformer("ideal", "m", "zero", "w", "zero", 2.0),
            iw.Resistor("end", "w", "zero", 7.0),
            iw.CurrentSource("pull", "zero", "w", phasor=0.1j),
            iw.VoltageByVoltage("amp", "y", "zero", ("w", "zero"), 3.0),
            iw.Resistor("sink", "y", "zero", 5.0),
        ],
    )
    L = net.element("T1").windings.inductance_h * rng.uniform(0.9, 1.1, (count, 1, 1))
    columns = [
        iw.VaryMatrix("T1", L),
        iw.Vary("load", "resistance_ohm", rng.uniform(1, 30, count)),
        iw.Vary("c1", "capacitance_f", rng.uniform(1e-7, 3e-7, count)),
        iw.Vary("choke", "inductance_h", rng.uniform(1e-6, 3e-5, count)),
        iw.Vary("source", "phasor", rng.uniform(1, 20, count)),
        iw.Vary("pull", "phasor", rng.uniform(-1, 1, count)),
    ]
    observe = [
        *(iw.NodeVoltage(name) for name in ("in", "a", "out", "w", "y")), iw.NodeVoltage("a", "p"),
        *(iw.ElementVoltage(name) for name in ("c1", "choke", "pull")),
        *(iw.ElementCurrent(name) for name in ("c2", "choke", "source", "pull", "ideal", "amp", "load")),
        iw.WindingVoltage("T1", "tx"), iw.WindingCurrent("T1", "rx"), iw.FluxLinkage("T1", "tx"),
    ]  # fmt: skip
    assert compare(net, link.FREQUENCY_HZ[::7], observe, columns, range(count)).all()


def test_entries_and_couplings_of_three_windings():
    """Self-inductances first, couplings after them with the new self-inductances, in whatever order they are stated."""
    rng = np.random.default_rng(3)
    coils = iw.WindingSet(("a", "b", "c"), [[4e-3, 1e-3, 5e-4], [1e-3, 2e-3, 3e-4], [5e-4, 3e-4, 1e-3]], 0.1)
    net = iw.Network(
        "zero",
        [
            iw.VoltageSource("v", "x", "zero", phasor=1.0),
            iw.Windings("T", coils, {"a": ("x", "zero"), "b": ("y", "zero"), "c": ("z", "y")}),
            iw.Resistor("r", "z", "zero", 10.0),
        ],
    )
    columns = [
        iw.VaryCoupling("T", ("a", "b"), rng.uniform(-0.5, 0.5, 5)),
        iw.VaryInductance("T", ("a", "a"), rng.uniform(3e-3, 5e-3, 5)),
        iw.VaryInductance("T", ("c", "b"), rng.uniform(1e-4, 5e-4, 5)),
    ]
    _, _, overrides, numbers = stacked(net, np.array([1e3]), None, columns)
    variant = overrides.variant(numbers[0]).element("T").windings
    expected = columns[0].values[0] * np.sqrt(columns[1].values_h[0] * 2e-3)
    assert expected == pytest.approx(variant.inductance_h[0, 1], rel=1e-15)
    assert compare(net, np.geomspace(10, 1e6, 9), None, columns, range(5)).all()


def test_what_leaves_the_case_is_left_out_and_harms_no_neighbour():
    """Impossible, tight, unknown and out-of-domain variants are not answered; the others have their bits as alone."""
    coupling = np.array([0.2, 1.5, 0.3, 0.9999, np.nan, 0.4, 0.5, 0.6])
    load = np.array([5.0, 5.0, -1.0, 5.0, 5.0, 0.0, np.inf, 9.0])
    columns = [iw.VaryCoupling("T1", ("tx", "rx"), coupling), iw.Vary("load", "resistance_ohm", load)]
    into, answered, _, _ = stacked(link.network(), link.FREQUENCY_HZ, link.OBSERVE, columns)
    assert [True, False, False, False, False, False, False, True] == answered.tolist()
    assert np.isnan(into[:, ~answered]).all()
    for row in (0, 7):
        alone = [
            iw.VaryCoupling("T1", ("tx", "rx"), coupling[[row]]), iw.Vary("load", "resistance_ohm", load[[row]])
        ]  # fmt: skip
        assert np.array_equal(into[:, [row]], stacked(link.network(), link.FREQUENCY_HZ, link.OBSERVE, alone)[0])


def test_bits_do_not_depend_on_place():
    """A variant has the same bits whatever its place and its neighbours: what makes a resumed batch byte-identical."""
    rng = np.random.default_rng(4)
    coupling = rng.uniform(0.05, 0.5, 700)
    whole = stacked(link.network(), link.FREQUENCY_HZ, link.OBSERVE, [iw.VaryCoupling("T1", ("tx", "rx"), coupling)])[0]
    for rows in (slice(0, 1), slice(3, 200), slice(199, 700), slice(650, 651)):
        part = iw.VaryCoupling("T1", ("tx", "rx"), coupling[rows])
        assert np.array_equal(whole[:, rows], stacked(link.network(), link.FREQUENCY_HZ, link.OBSERVE, [part])[0])


def test_a_resonance_without_loss_is_left_out():
    """Where a variant resonates without loss at a frequency asked for, its pivot cancels and it is not answered."""
    net = iw.Network(
        "zero",
        [
            iw.VoltageSource("v", "x", "zero", phasor=1.0),
            iw.Inductor("l", "x", "y", 1e-3),
            iw.Capacitor("c", "y", "zero", 1e-6),
        ],
    )
    resonance_hz = 1 / (2 * np.pi * np.sqrt(1e-3 * 1e-6))
    columns = [iw.Vary("c", "capacitance_f", np.array([0.5e-6, 1e-6, 2e-6]))]
    _, answered, _, _ = stacked(net, np.array([0.7 * resonance_hz, resonance_hz]), None, columns)
    assert answered[[0, 2]].all()
    assert not answered[1]


@pytest.mark.parametrize(
    ("frequency_hz", "observe"),
    [([0.0, 1e3], None), ([1e3], [iw.ElementPower("load")]), ([1e3], [iw.StoredEnergy("c1")])],
)
def test_no_case_for_a_stack(frequency_hz, observe):
    """0 Hz, powers and energies are answered one by one."""
    assert engine.prepare_stack(link.network(), frequency_hz, observe) is None


def test_a_column_outside_the_equations_is_answered_one_by_one():
    """What a stack cannot take it does not guess at."""
    stack = engine.prepare_stack(link.network(), link.FREQUENCY_HZ, link.OBSERVE)
    into = np.empty((2, 1, 100), dtype=complex)
    assert not engine.stacked_responses(stack, [iw.Vary("source", "waveform.value", np.array([1.0]))], into).any()


def test_tape_writes_nothing_twice_and_uses_registers_again():
    """Equal operations are one step, signs cost nothing, and results are those of plain arrays."""
    tape = Tape()
    omega, a = tape.input(over_variants=False), tape.input(over_variants=True)
    first = (a * omega + 2.0) * (a * omega - 1.0)
    second = -(a * omega) - (-a) * (-3.0)
    outputs = [first, second, abs(-first) / omega, largest(first, second)]
    x, w = np.arange(1.0, 6.0)[:, None], np.array([[0.5, 2.0, 7.0]])
    program = Program(outputs, [a], omega, w, 4)
    for start in (0, 4):
        found = [np.array(array)[: len(x[start:])] for array in program.run([x[start : start + 4]])]
        own = x[start : start + 4]
        expected = [(own * w + 2) * (own * w - 1), -(own * w) - 3 * own]
        expected += [np.abs(expected[0]) / w, np.maximum(*expected)]
        for array, known in zip(found, expected, strict=True):
            assert np.array_equal(array, known)
    assert number(link.network()).nodes  # the base network is not changed by any of this


def test_stacked_eigenvalues_are_those_of_the_verdict():
    """Sets of four windings, possible and impossible, stated either way: eigenvalues and verdicts one by one."""
    rng = np.random.default_rng(8)
    k = rng.uniform(-0.75, 0.75, (60, 6))
    coils = iw.WindingSet.from_coupling(tuple("abcd"), [1e-3, 2e-3, 5e-4, 1e-2], np.eye(4), 0.1)
    pairs = [(coils.labels[i], coils.labels[j]) for i in range(4) for j in range(i)]
    vary = [iw.VaryCoupling("T", pair, k[:, m]) for m, pair in enumerate(pairs)]
    eigenvalues, settled = engine.clear_eigenvalues(coils, vary, 60)
    net = iw.Network("zero", [iw.Windings("T", coils, {label: (label, "zero") for label in coils.labels})])
    overrides, numbers = lay_out(net, vary)
    for row in range(60):
        report = engine.check(overrides.variant(numbers[row]).element("T").windings)
        assert np.allclose(report.eigenvalues, eigenvalues[row], rtol=0.0, atol=1e-14)
        assert (report.verdict is iw.Verdict.VALID) == settled[row]
    assert 10 < settled.sum() < 50
