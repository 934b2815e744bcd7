"""Area H, published benchmark systems in the sinusoidal state, through the public client."""

from __future__ import annotations

import cmath
import math

import numpy as np
import pytest
import scipy.io

import interwind as iw

# H-03, derived from the published data of the ring modulator (Test Set for IVP Solvers), its diodes replaced by the
# conductance γδ: V(y1), V(y3) and I14 per volt of Uin1 at 1, 10 and 100 kHz.
RING = {
    "y1": [(0.997288458501, -0.348647720), (1.133286572, -5.956743787), (0.085718043614, -175.482939592)],
    "y3": [(0.498631793955, -0.348920060), (0.566631368972, -5.959467189), (0.042874872, -175.510184549)],
    "I14": [(7.630199497e-5, 57.493976161), (1.136259453e-3, 81.715527215), (8.617620247e-4, -85.715022393)],
}


def ring_modulator() -> iw.Network:
    """The circuit behind the published equations: two transformers 1 : ½ : ½ with stray inductances, four diodes.

    y3, y4, y5, y6 are the voltages of the four small capacitors; y7 that of the intermediate frequency port.
    """
    conductance = 7.219162157e-7
    turns = np.array([1.0, 0.5, -0.5])
    elements: list = [
        iw.VoltageSource("Uin1", "in", "0", phasor=1.0),
        # the published equations take y1 behind the stray inductance of the first winding: series elements, and a core
        # of perfect coupling
        iw.Resistor("Ri", "in", "i1", 50.0 + 36.3),
        iw.Inductor("Ls1a", "i1", "y1", 2e-3),
        iw.Resistor("Rc", "0", "i2", 600.0 + 36.3),
        iw.Inductor("Ls1b", "i2", "y2", 2e-3),
        iw.Capacitor("C1", "y1", "0", 1.6e-8),
        iw.Resistor("R1", "y1", "0", 25e3),
        iw.Capacitor("C2", "y2", "0", 1.6e-8),
        iw.Resistor("R2", "y2", "0", 25e3),
        iw.Capacitor("Cp", "y7", "0", 1e-8),
        iw.Resistor("Rp", "y7", "0", 50.0),
    ]
    core = iw.WindingSet(("1", "2", "3"), 4.45 * np.outer(turns, turns))
    for name, own, first, second in (("A", "y1", "y3", "y4"), ("B", "y2", "y5", "y6")):
        # half windings from the centre tap (the zero node) to the two outer nodes
        elements.append(iw.Windings(name, core, {"1": (own, "0"), "2": (f"h{first}", "0"), "3": ("0", f"h{second}")}))
        for node in (first, second):
            elements.append(iw.Inductor(f"Ls{node}", f"h{node}", f"r{node}", 5e-4))
            elements.append(iw.Resistor(f"Rg{node}", f"r{node}", node, 17.3))
            elements.append(iw.Capacitor(f"Cs{node}", node, "0", 2e-12))
    # UD1 = y3 − y5 − y7, UD2 = −y4 + y6 − y7, UD3 = y4 + y5 + y7, UD4 = −y3 − y6 + y7, with the currents of the
    # equations for y3..y7: written as conductances between nodes by controlled sources
    signs = {"D1": {"y3": 1, "y5": -1, "y7": -1}, "D2": {"y4": -1, "y6": 1, "y7": -1},
             "D3": {"y4": 1, "y5": 1, "y7": 1}, "D4": {"y3": -1, "y6": -1, "y7": 1}}  # fmt: skip
    for name, terms in signs.items():
        for out, a in terms.items():
            for source, b in terms.items():
                elements.append(
                    iw.CurrentByVoltage(f"{name}{out}{source}", out, "0", (source, "0"), a * b * conductance)
                )
    return iw.Network("0", elements)


def test_h03_linearised_ring_modulator(solver):
    observe = [iw.NodeVoltage("y1"), iw.NodeVoltage("y3"), iw.ElementCurrent("Ls1a"), iw.NodeVoltage("y2")]
    answer = solver.frequency_response(ring_modulator(), [1e3, 1e4, 1e5], observe)
    for column, name in enumerate(("y1", "y3", "I14")):
        expected = [cmath.rect(size, math.radians(angle)) for size, angle in RING[name]]
        np.testing.assert_allclose(answer.samples[:, column], expected, rtol=1e-8)
    assert np.abs(answer[iw.NodeVoltage("y2")]).max() < 1e-12


@pytest.fixture(scope="module")
def mna_1(data_folder) -> iw.Network:
    """H-07: 578 unknowns rebuilt as resistors, capacitors, one set of 222 windings and nine ports.

    The published pencil is A x = s E x − B u with x = (node voltages, winding currents, port currents): E holds the
    capacitances and the 222 x 222 inductance matrix, −A the conductances, the incidence and the winding resistances.
    """
    data = scipy.io.loadmat(data_folder / "mna1.mat", simplify_cells=True)
    A, E, B = (np.asarray(data[k].todense() if hasattr(data[k], "todense") else data[k], float) for k in "AEB")
    return rebuild(-A, E, B)


def rebuild(G: np.ndarray, E: np.ndarray, B: np.ndarray) -> iw.Network:
    """Read the elements back from the matrices G + sE, B of a nodal formulation."""
    skew = 0.5 * (G - G.T)
    symmetric = G - skew
    ports = [int(np.flatnonzero(B[:, k])[0]) for k in range(B.shape[1])]
    branch = currents(symmetric, E, skew, ports)
    nodes = np.flatnonzero(~branch)
    name = {int(k): f"n{k}" for k in nodes}
    elements: list = []
    for matrix, make, title in (
        (symmetric, lambda n, a, b, y: iw.Resistor(n, a, b, 1.0 / y), "R"),
        (E, lambda n, a, b, y: iw.Capacitor(n, a, b, y), "C"),
    ):
        block = matrix[np.ix_(nodes, nodes)]
        for i, j in np.argwhere(np.triu(block, 1)):
            elements.append(make(f"{title}{nodes[i]}_{nodes[j]}", name[nodes[i]], name[nodes[j]], -block[i, j]))
        rest, size = block.sum(axis=1), np.abs(block).max(axis=1)
        for k in np.flatnonzero(np.abs(rest) > 1e-10 * size):
            elements.append(make(f"{title}{nodes[k]}_0", name[nodes[k]], "0", rest[k]))
    wound = [int(k) for k in np.flatnonzero(branch) if k not in ports]
    coils = iw.WindingSet([f"w{k}" for k in wound], E[np.ix_(wound, wound)], symmetric[wound, wound])
    elements.append(iw.Windings("T", coils, {f"w{k}": ends(skew, k, name) for k in wound}))
    made = []
    for k, row in enumerate(ports):
        a, b = ends(skew, row, name)  # the port current leaves a: a voltage of −B imposed from a to b
        made.append(iw.Port(f"p{k + 1}", a if a != "0" else b, "0" if a == "0" else b))
    return iw.Network("0", elements, made)


def currents(symmetric: np.ndarray, E: np.ndarray, skew: np.ndarray, ports: list[int]) -> np.ndarray:
    """Which unknowns are currents: skew entries join a current and a node, all others join like with like."""
    like = (symmetric != 0) | (E != 0)
    kind = np.full(len(E), -1)
    kind[ports] = 1
    waiting = list(ports)
    while waiting:
        k = waiting.pop()
        for neighbours, value in ((np.flatnonzero(like[k]), kind[k]), (np.flatnonzero(skew[k]), 1 - kind[k])):
            fresh = neighbours[kind[neighbours] < 0]
            kind[fresh] = value
            waiting += fresh.tolist()
    assert np.all(kind >= 0)
    return kind == 1


def ends(skew: np.ndarray, k: int, name: dict[int, str]) -> tuple[str, str]:
    """The two nodes of a current: it leaves the first."""
    first = [name[int(i)] for i in np.flatnonzero(skew[:, k] > 0)]
    second = [name[int(i)] for i in np.flatnonzero(skew[:, k] < 0)]
    return (first or ["0"])[0], (second or ["0"])[0]


def test_h07_mna_1(solver, mna_1):
    """SLICOT benchmark MNA_1 (system published, responses derived): Y11 and Y99, S, to 1e-8."""
    omega = np.array([0.0, 1e5, 1e6, 1e8])
    answer = solver.port_response(mna_1, omega / (2 * math.pi))
    Y = answer.admittance_s
    first = [550.47891666, 502.81237898 - 140.77891269j, 67.734099641 - 177.38807673j, 0.0078087717709 - 2.0370252313j]
    np.testing.assert_allclose(Y[:, 0, 0], first, rtol=1e-8)
    assert Y[0, 8, 8] == pytest.approx(431.57395020, rel=1e-8)
    assert Y[2, 8, 8] == pytest.approx(49.317271007 - 134.39620417j, rel=1e-8)
    assert answer.evidence.passivity_margin >= -1e-9
