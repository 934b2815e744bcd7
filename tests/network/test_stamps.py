"""Each element's stamp against a matrix written by hand. G x + C dx/dt = B u; node rows sum currents leaving."""
# ruff: noqa: E501  (a case a line reads best)

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw
from interwind.errors import InvalidNetwork
from interwind.model import elements as el
from interwind.model.devices import Diode, GateTimes, Switch
from interwind.model.network import Network
from interwind.model.observables import ElementCurrent, NodeVoltage, WindingCurrent
from interwind.model.windings import WindingSet
from interwind_service.network.system import stamp

OPEN, CLOSED = GateTimes([], initially_closed=False), GateTimes([], initially_closed=True)
GROUND = el.Resistor("ground", "b", "0", 1.0)  # ties node b to the reference; adds 1 S to G[b, b]
PAIR = WindingSet(("p", "s"), [[4.0, 1.0], [1.0, 9.0]], [[0.5, 0.1], [0.1, 0.7]])
I = ElementCurrent  # noqa: E741
V = NodeVoltage

# name, elements, unknowns, G, C, B
CASES = [
    ("resistor", [el.Resistor("x", "a", "b", 0.5), GROUND], (V("a"), V("b")), [[2, -2], [-2, 3]], [[0, 0], [0, 0]], None),
    ("capacitor", [el.Capacitor("x", "a", "b", 3.0), GROUND], (V("a"), V("b")), [[0, 0], [0, 1]], [[3, -3], [-3, 3]], None),
    ("inductor", [el.Inductor("x", "a", "b", 2.0), GROUND], (V("a"), V("b"), I("x")),
     [[0, 0, 1], [0, 1, -1], [-1, 1, 0]], [[0, 0, 0], [0, 0, 0], [0, 0, 2]], None),
    ("short circuit", [el.Resistor("x", "a", "b", 0.0), GROUND], (V("a"), V("b"), I("x")),
     [[0, 0, 1], [0, 1, -1], [-1, 1, 0]], np.zeros((3, 3)), None),
    ("voltage source", [el.VoltageSource("x", "a", "b"), GROUND], (V("a"), V("b"), I("x")),
     [[0, 0, 1], [0, 1, -1], [-1, 1, 0]], np.zeros((3, 3)), [[0], [0], [-1]]),
    ("current source", [el.CurrentSource("x", "a", "b"), el.Resistor("r", "a", "b", 1.0), GROUND], (V("a"), V("b")),
     [[1, -1], [-1, 2]], np.zeros((2, 2)), [[-1], [1]]),
    ("switch closed", [Switch("x", "a", "b", CLOSED, 0.25), GROUND], (V("a"), V("b")), [[4, -4], [-4, 5]],
     np.zeros((2, 2)), None),
    ("switch closed ideally", [Switch("x", "a", "b", CLOSED), GROUND], (V("a"), V("b"), I("x")),
     [[0, 0, 1], [0, 1, -1], [-1, 1, 0]], np.zeros((3, 3)), None),
    ("switch open", [Switch("x", "a", "b", OPEN, 0.25, 1e3), GROUND], (V("a"), V("b")), [[1e-3, -1e-3], [-1e-3, 1.001]],
     np.zeros((2, 2)), None),
    ("switch open ideally", [Switch("x", "a", "b", OPEN), GROUND], (V("a"), V("b")), [[0, 0], [0, 1]], np.zeros((2, 2)),
     None),
    ("windings", [el.Windings("T", PAIR, {"p": ("a", "b"), "s": ("b", "0")}), GROUND],
     (V("a"), V("b"), WindingCurrent("T", "p"), WindingCurrent("T", "s")),
     [[0, 0, 1, 0], [0, 1, -1, 1], [-1, 1, 0.5, 0.1], [0, -1, 0.1, 0.7]],
     [[0, 0, 0, 0], [0, 0, 0, 0], [0, 0, 4, 1], [0, 0, 1, 9]], None),
    ("ideal transformer", [el.IdealTransformer("x", "a", "0", "b", "0", 3.0), GROUND], (V("a"), V("b"), I("x")),
     [[0, 0, 1], [0, 1, -3], [-1, 3, 0]], np.zeros((3, 3)), None),
    ("voltage by voltage", [el.VoltageByVoltage("x", "a", "0", ("b", "0"), 5.0), GROUND], (V("a"), V("b"), I("x")),
     [[0, 0, 1], [0, 1, 0], [-1, 5, 0]], np.zeros((3, 3)), None),
    ("current by voltage", [el.CurrentByVoltage("x", "a", "b", ("b", "0"), 5.0), el.Resistor("r", "a", "0", 1.0), GROUND],
     (V("a"), V("b")), [[1, 5], [0, -4]], np.zeros((2, 2)), None),
    ("voltage by current", [el.VoltageByCurrent("x", "a", "0", "ground", 5.0), GROUND], (V("a"), V("b"), I("x"), I("ground")),
     [[0, 0, 1, 0], [0, 0, 0, 1], [-1, 0, 0, 5], [0, -1, 0, 1]], np.zeros((4, 4)), None),
    ("current by current of a capacitor",
     [el.CurrentByCurrent("x", "a", "b", "c", 5.0), el.Resistor("r", "a", "0", 1.0), el.Capacitor("c", "b", "0", 2.0), GROUND],
     (V("a"), V("b"), I("c")), [[1, 0, 5], [0, 1, 1 - 5], [0, 0, 1]], [[0, 0, 0], [0, 0, 0], [0, -2, 0]], None),
    ("current by current of a source",
     [el.CurrentByCurrent("x", "a", "0", "j", 5.0), el.Resistor("r", "a", "0", 1.0), el.CurrentSource("j", "0", "b"), GROUND],
     (V("a"), V("b"), I("j")), [[1, 0, 5], [0, 1, -1], [0, 0, 1]], np.zeros((3, 3)), [[0], [0], [1]]),
]  # fmt: skip


@pytest.mark.parametrize(
    ("elements", "unknowns", "G", "C", "B"), [case[1:] for case in CASES], ids=[c[0] for c in CASES]
)
def test_stamp(elements, unknowns, G, C, B):
    """One element, with a resistor to ground where it needs one, gives the matrices written by hand."""
    system = stamp(Network("0", elements))

    assert unknowns == system.unknowns
    np.testing.assert_array_equal(np.array(G, float), system.G)
    np.testing.assert_array_equal(np.array(C, float), system.C)
    np.testing.assert_array_equal(np.zeros((len(G), 0)) if B is None else np.array(B, float), system.B)


def test_order_of_unknowns():
    """Node voltages come first, then the currents of windings, inductors and voltage sources; inputs in element order."""
    coils = WindingSet(("w",), [[1.0]])
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0"),
            el.Inductor("L", "a", "b", 1.0),
            el.CurrentSource("J", "0", "b"),
            el.Windings("T", coils, {"w": ("b", "0")}),
        ],
    )
    system = stamp(net)

    assert (V("a"), V("b"), WindingCurrent("T", "w"), I("L"), I("V")) == system.unknowns
    assert ("V", "J") == system.inputs


def test_mutual_inductance_is_signed_and_stands_only_in_c():
    """M = k sqrt(L_i L_j), its sign kept, with no trace in G."""
    coils = WindingSet.from_coupling(("p", "s"), [4.0, 9.0], [[1, -0.5], [-0.5, 1]])
    system = stamp(Network("0", [el.Windings("T", coils, {"p": ("a", "0"), "s": ("b", "0")})]))

    assert -3.0 == system.C[2, 3] == system.C[3, 2]
    np.testing.assert_array_equal(np.zeros((2, 2)), system.G[2:, 2:])


def test_a_diode_has_no_linear_stamp():
    """An element whose law is not linear is refused by its place."""
    with pytest.raises(InvalidNetwork) as refused:
        stamp(Network("0", [Diode("D", "a", "0"), el.Resistor("r", "a", "0", 1.0)]))
    assert "elements[0]" == refused.value.violations[0].field


def test_every_stamp_carries_the_standing_statement():
    """No option removes the cautions."""
    system = stamp(Network("0", [el.Resistor("r", "a", "0", 1.0)]))
    assert ["ENGINEERING_ESTIMATE"] == [caution.code for caution in system.cautions]
    assert isinstance(system, iw.MnaSystem)
