"""Figures of the ports through the public client: insertion loss, mixed modes, transfers, the best link."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw

HERTZ = np.array([150e3, 1e6])
LINE = iw.Differential("line in", "neutral in"), iw.Differential("line out", "neutral out")
COMMON = iw.Common("line in", "neutral in"), iw.Common("line out", "neutral out")


@pytest.fixture(scope="module")
def solver():
    with iw.connect() as solver:
        yield solver


def choke(second_h: float = 1e-3) -> iw.Network:
    """A common-mode choke in two lines over a chassis, a port at each of its four ends."""
    coils = iw.WindingSet.from_coupling(("line", "neutral"), [1e-3, second_h], [[1, 0.999], [0.999, 1]])
    ends = {"line": ("a", "c"), "neutral": ("b", "d")}
    names = {"line in": "a", "neutral in": "b", "line out": "c", "neutral out": "d"}
    return iw.Network(
        "chassis",
        [iw.Windings("T", coils, ends), *(iw.Resistor(f"leak {x}", x, "chassis", 1e12) for x in "abcd")],
        ports=[iw.Port(name, node, "chassis", 50.0) for name, node in names.items()],
    )


def test_d15_insertion_loss_of_a_common_mode_choke(solver):
    """D-15, derived: DM inductance 2L(1 − k), CM inductance L(1 + k)/2, both between 50 Ω and 50 Ω."""
    figures = [iw.InsertionLoss(*LINE), iw.InsertionLoss(*COMMON)]
    found = solver.port_figures(choke(), HERTZ, figures)
    np.testing.assert_allclose(found[figures[0]], [0.001542799, 0.068045175], atol=1e-8)
    np.testing.assert_allclose(found[figures[1]], [19.529746215, 35.960354378], atol=1e-8)


@pytest.mark.parametrize(("source_ohm", "load_ohm"), [(50.0, 50.0), (0.1, 100.0), (100.0, 0.1)])
def test_insertion_loss_between_the_usual_terminations(solver, source_ohm, load_ohm):
    """A shunt capacitor: |1 + jωC R_S R_L/(R_S + R_L)|, a series inductor: |1 + jωL/(R_S + R_L)| (derived)."""
    hertz = np.geomspace(1e4, 3e7, 31)
    figure = iw.InsertionLoss("in", "out", source_ohm, load_ohm)
    ports = [iw.Port("in", "a", "0", 50.0), iw.Port("out", "b", "0", 50.0)]
    across = [iw.Resistor("wire", "a", "b", 0.0), iw.Capacitor("C", "a", "0", 1e-6)]
    found = solver.port_figures(iw.Network("0", across, ports=ports), hertz, [figure])[figure]
    parallel = source_ohm * load_ohm / (source_ohm + load_ohm)
    np.testing.assert_allclose(found, 20 * np.log10(np.abs(1 + 2j * np.pi * hertz * 1e-6 * parallel)), atol=1e-8)
    along = [iw.Inductor("L", "a", "b", 1e-3), iw.Resistor("leak", "a", "0", 1e9)]
    found = solver.port_figures(iw.Network("0", along, ports=ports), hertz, [figure])[figure]
    expected = 20 * np.log10(np.abs(1 + 2j * np.pi * hertz * 1e-3 / (source_ohm + load_ohm)))
    np.testing.assert_allclose(found, expected, atol=2e-6)  # 100 Ω beside 1 GΩ


def test_symmetric_choke_converts_nothing_and_an_unequal_one_does(solver):
    """Only imbalance converts between the modes, and the mixed-mode matrix stays unitary without loss."""
    places = [*LINE, *COMMON]
    figures = [iw.Scattering(measured, driven) for measured in places for driven in places]
    even = solver.port_figures(choke(), HERTZ, figures).samples.reshape(2, 4, 4)
    assert np.abs(even[:, :2, 2:]).max() < 1e-12
    assert np.abs(even[:, 0, 1]).min() > 0.9
    uneven = solver.port_figures(choke(1.1e-3), HERTZ, figures).samples.reshape(2, 4, 4)
    assert np.abs(uneven[:, :2, 2:]).max() > 1e-3
    unit = uneven @ uneven.conj().transpose(0, 2, 1)
    np.testing.assert_allclose(unit, np.broadcast_to(np.eye(4), unit.shape), atol=1e-7)  # leaks of 1 TΩ aside


def test_transfers_and_input_angle_of_a_pair(solver):
    """Open secondary: M/L1; shorted: M/L2; input impedance with the secondary matched (derived)."""
    henry, k, hertz = (4e-3, 1e-3), 0.6, np.array([1e3, 1e5])
    M = k * np.sqrt(henry[0] * henry[1])
    coils = iw.WindingSet.from_coupling(("p", "s"), henry, [[1, k], [k, 1]])
    net = iw.Network(
        "0",
        [iw.Windings("T", coils, {"p": ("a", "0"), "s": ("b", "0")})],
        ports=[iw.Port("p", "a", "0", 50.0), iw.Port("s", "b", "0", 50.0)],
    )
    figures = [iw.VoltageTransfer("s", "p"), iw.CurrentTransfer("s", "p"), iw.InputImpedance("p"), iw.InputAngle("p")]
    found = solver.port_figures(net, hertz, figures)
    np.testing.assert_allclose(found[figures[0]], [M / henry[0]] * 2, rtol=1e-9)
    np.testing.assert_allclose(found[figures[1]], [M / henry[1]] * 2, rtol=1e-9)
    jw = 2j * np.pi * hertz
    expected = jw * henry[0] - (jw * M) ** 2 / (jw * henry[1] + 50.0)
    np.testing.assert_allclose(found[figures[2]], expected, rtol=1e-9)
    np.testing.assert_allclose(found[figures[3]], np.angle(expected), rtol=1e-9)


def link(kq: float, sending: int = 1, taking: int = 1, hertz: float = 1e6) -> iw.Network:
    """Coils of Q = 100, each transmitter coupled alike to each receiver and nothing else, a port on each."""
    names = [*(f"tx{k}" for k in range(sending)), *(f"rx{k}" for k in range(taking))]
    henry, quality = 10e-6, 100.0
    coupling = np.eye(len(names))
    coupling[:sending, sending:] = coupling[sending:, :sending] = kq / quality
    coils = iw.WindingSet.from_coupling(names, [henry] * len(names), coupling, 2 * np.pi * hertz * henry / quality)
    ports = [iw.Port(name, name, "0", 50.0) for name in names]
    return iw.Network("0", [iw.Windings("T", coils, {name: (name, "0") for name in names})], ports=ports)


@pytest.mark.parametrize(
    ("kq", "efficiency"),
    [(0.5, 0.055728090), (1, 0.171572875), (2, 0.381966011), (5, 0.672078439), (10, 0.819002488), (50, 0.960792001)],
)
def test_e13_best_link_efficiency(solver, kq, efficiency):
    """E-13 (and E-14's a = √(1 + x)), derived: η = x/(1 + √(1 + x))², x = (kQ)²; load R √(1 + x) − jωL."""
    best = iw.LinkEfficiency(("tx0",), ("rx0",))
    load = iw.OptimumLoad(best, "rx0")
    found = solver.port_figures(link(kq), [1e6], [best, load])
    np.testing.assert_allclose(found[best], [efficiency], atol=1e-9)
    reactance = 2 * np.pi * 1e6 * 10e-6
    np.testing.assert_allclose(found[load], [reactance * (np.sqrt(1 + kq**2) / 100 - 1j)], rtol=1e-9)


def test_several_transmitters_and_one_receiver(solver):
    """With x = ω² mᵀ R_t⁻¹ m / R_r (derived) three equal ones count as one of √3 times the coupling, driven alike."""
    best = iw.LinkEfficiency(("tx0", "tx1", "tx2"), ("rx0",))
    drives = [iw.OptimumDrive(best, name) for name in best.transmitters]
    found = solver.port_figures(link(2.0, sending=3), [1e6], [best, *drives])
    x = 3 * 2.0**2
    np.testing.assert_allclose(found[best], [x / (1 + np.sqrt(1 + x)) ** 2], rtol=1e-9)
    np.testing.assert_allclose(found.samples[0, 1:], np.full(3, 1 / np.sqrt(3)), rtol=1e-9)


def test_best_loads_and_drives_give_the_best_efficiency_in_a_plain_solve(solver):
    """Two transmitters, two receivers, all coupled: loads and drives put into the network, efficiency read as power."""
    rng = np.random.default_rng(3)
    names = ("t0", "t1", "r0", "r1")
    factors = rng.normal(size=(4, 9))
    L = 1e-6 * (factors @ factors.T)
    coils = iw.WindingSet(names, L, rng.uniform(0.1, 1.0, 4))
    windings = iw.Windings("T", coils, {name: (name, "0") for name in names})
    net = iw.Network("0", [windings], ports=[iw.Port(name, name, "0", 50.0) for name in names])
    best = iw.LinkEfficiency(names[:2], names[2:])
    asked = [best, *(iw.OptimumLoad(best, n) for n in names[2:]), *(iw.OptimumDrive(best, n) for n in names[:2])]
    found = solver.port_figures(net, [1e6], asked)
    elements = [windings]
    for name in names[2:]:
        load = complex(found[iw.OptimumLoad(best, name)][0])
        assert load.real > 0
        reactive = (
            iw.Inductor(f"X {name}", f"{name} x", "0", load.imag / (2e6 * np.pi))
            if load.imag > 0
            else iw.Capacitor(f"X {name}", f"{name} x", "0", -1 / (2e6 * np.pi * load.imag))
        )
        elements += [iw.Resistor(f"R {name}", name, f"{name} x", load.real), reactive]
    for name in names[:2]:
        drive = complex(found[iw.OptimumDrive(best, name)][0])
        elements.append(iw.CurrentSource(f"I {name}", "0", name, phasor=drive))
    loads, drives = ["R r0", "R r1"], ["I t0", "I t1"]
    power = solver.frequency_response(
        iw.Network("0", elements), [1e6], [iw.ElementPower(name) for name in (*loads, *drives)]
    ).samples[0]
    assert power[:2].real.sum() / -power[2:].real.sum() == pytest.approx(float(found[best][0]), rel=1e-9)


def test_a_link_without_coupling_gives_nothing_and_says_so(solver):
    """Nothing arrives; the best load does not exist, and a finding names the figure."""
    best = iw.LinkEfficiency(("tx0",), ("rx0",))
    found = solver.port_figures(link(0.0), [1e6], [best, iw.OptimumLoad(best, "rx0")])
    assert found[best][0] == 0.0
    assert [x.field for x in found.findings if x.code == "FIGURE_UNDETERMINED"] == ["figures[1]"]


@pytest.mark.parametrize(
    ("figure", "field"),
    [
        (iw.Scattering("tx0", "none"), "figures[0].port"),
        (iw.Scattering("tx0", iw.Common("tx0", "rx0")), "figures[0].port"),
        (iw.InsertionLoss("tx0", "rx0", source_ohm=0.0), "figures[0].source_ohm"),
        (iw.VoltageTransfer("tx0", "tx0"), "figures[0]"),
        (iw.LinkEfficiency(("tx0",), ()), "figures[0].receivers"),
        (iw.LinkEfficiency(("tx0",), ("tx0",)), "figures[0].receivers"),
        (iw.OptimumLoad(iw.LinkEfficiency(("tx0",), ("rx0",)), "tx0"), "figures[0].receiver"),
    ],
)
def test_what_cannot_be_asked_is_refused_by_its_field(solver, figure, field):
    with pytest.raises(iw.InvalidRequest) as refused:
        solver.port_figures(link(1.0), [1e6], [figure])
    assert refused.value.violations[0].field == field
