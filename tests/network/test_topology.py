"""Numbering: nodes, branches, galvanic parts, and refusals that name their field."""

from __future__ import annotations

import numpy as np
import pytest

from interwind.errors import InvalidRequest, InvalidWindings
from interwind.model import elements as el
from interwind.model.devices import Gate, SaturableInductor, Switch
from interwind.model.network import Network, Port
from interwind.model.windings import WindingSet
from interwind_service.network.kind import Kind
from interwind_service.network.topology import number

PAIR = WindingSet(("p", "s"), [[4.0, 1.0], [1.0, 9.0]])


def transformer(*more: el.Element, references: tuple[str, ...] = ()) -> Network:
    """A two-winding transformer with an isolated secondary."""
    coils = el.Windings("T", PAIR, {"p": ("a", "0"), "s": ("c", "d")})
    return Network("0", [coils, el.Resistor("R", "c", "d", 1.0), *more], references=references)


def test_coupling_is_no_conductor():
    """The secondary is a part of its own, with its zero at the finish of its first winding, and this is said."""
    topology = number(transformer())

    assert [0, 0, 1, 1] == topology.parts.of_node.tolist()
    assert ["0", "d"] == [topology.nodes[k] for k in topology.parts.reference]
    assert ["ISOLATED_PART"] == [finding.code for finding in topology.findings]
    assert "'d'" in topology.findings[0].message


def test_a_stated_zero_is_taken():
    """References names the zero of a part."""
    topology = number(transformer(references=("c",)))
    assert ["0", "c"] == [topology.nodes[k] for k in topology.parts.reference]


@pytest.mark.parametrize(("name", "words"), [("nowhere", "no element touches"), ("a", "its zero already")])
def test_a_wrong_zero_is_refused(name, words):
    """A zero must be a node, and of a part that has none."""
    with pytest.raises(InvalidRequest, match=words) as refused:
        number(transformer(references=(name,)))
    assert "references[0]" == refused.value.violations[0].field


def test_a_current_source_is_no_path():
    """A current source between two parts leaves them apart, and its current has no return."""
    topology = number(transformer(el.CurrentSource("J", "0", "c")))

    assert 2 == topology.parts.count
    assert [[-1], [1]] == topology.parts.forced.tolist()


def test_branches():
    """A winding is a branch from its start to its finish; an ideal transformer is two."""
    topology = number(transformer(el.IdealTransformer("X", "a", "0", "c", "d", 2.0)))

    assert [Kind.WINDING, Kind.WINDING, Kind.RESISTOR, Kind.TRANSFORMER, Kind.TRANSFORMER] == topology.kind.tolist()
    assert ("T", "T", "R", "X", "X") == topology.names
    assert 1 == topology.winding("T", "s")
    np.testing.assert_array_equal(PAIR.inductance_h, topology.groups[0].inductance_h)
    np.testing.assert_array_equal([2.0, 3.0], topology.groups[0].root)
    assert np.all(0.0 == topology.incidence().sum(axis=0))


R = el.Resistor("R", "a", "0", 1.0)
BAD = [
    (el.Resistor("x", "a", "0", -1.0), "elements[1].resistance_ohm"),
    (el.Resistor("x", "a", "0", np.nan), "elements[1].resistance_ohm"),
    (el.Resistor("x", "a", "0", np.inf), "elements[1].resistance_ohm"),
    (el.Resistor("x", "a", "0", 1e-40), "elements[1].resistance_ohm"),
    (el.Capacitor("x", "a", "0", 1e40), "elements[1].capacitance_f"),
    (el.Inductor("x", "a", "0", -1e-9), "elements[1].inductance_h"),
    (el.Capacitor("x", "a", "0", -1e-12), "elements[1].capacitance_f"),
    (el.VoltageSource("x", "a", "0", phasor=complex(np.nan, 0)), "elements[1].phasor"),
    (Switch("x", "a", "0", Gate(0.0, 0.0)), "elements[1].closed.period_s"),
    (Switch("x", "a", "0", Gate(1.0, 2.0)), "elements[1].closed.on_s"),
    (Switch("x", "a", "0", Gate(1.0, 0.5), -1.0), "elements[1].conducting_resistance_ohm"),
    (el.IdealTransformer("x", "a", "0", "a", "0", 0.0), "elements[1].turns_ratio"),
    (SaturableInductor("x", "a", "0", [1.0, 0.5], [1.0, 2.0]), "elements[1].current_a[1]"),
    (el.VoltageByVoltage("x", "b", "0", ("a", "zz"), 1.0), "elements[1].control[1]"),
    (el.CurrentByCurrent("x", "b", "0", "zz", 1.0), "elements[1].control"),
    (el.CurrentByCurrent("x", "b", "0", "x", 1.0), "elements[1].control"),
    (el.Windings("x", WindingSet(("p",), [[-1.0]]), {"p": ("a", "0")}), "elements[1].windings.inductance_h[0][0]"),
]  # fmt: skip


@pytest.mark.parametrize(("element", "field"), BAD, ids=[field + str(k) for k, (_, field) in enumerate(BAD)])
def test_values_outside_their_domain(element, field):
    """Each is refused by its path, with the value found in the message."""
    with pytest.raises(InvalidRequest) as refused:
        number(Network("0", [R, element]))
    assert field == refused.value.violations[0].field
    assert "found" in refused.value.message


def test_zero_values_are_meaningful():
    """R = 0, L = 0 and C = 0 are a short circuit, a short circuit and nothing."""
    net = Network(
        "0", [R, el.Resistor("s", "a", "b", 0.0), el.Inductor("t", "b", "0", 0.0), el.Capacitor("u", "b", "0", 0.0)]
    )
    assert 1 == number(net).parts.count


def test_an_unknown_pair_is_refused():
    """A coupling that is not known is never taken as zero."""
    coils = WindingSet.from_coupling(("p", "s"), [1.0, 1.0], [[1, np.nan], [np.nan, 1]])
    net = Network("0", [el.Windings("T", coils, {"p": ("a", "0"), "s": ("b", "0")})])
    with pytest.raises(InvalidWindings, match="not known") as refused:
        number(net)
    assert "elements[0].windings.inductance_h[0][1]" == refused.value.violations[0].field


def test_a_reference_that_nothing_touches():
    """A misspelt reference is refused."""
    with pytest.raises(InvalidRequest) as refused:
        number(Network("gnd", [R]))
    assert "reference" == refused.value.violations[0].field


def test_port_values():
    """A reference resistance must be above zero."""
    with pytest.raises(InvalidRequest) as refused:
        number(Network("0", [R], [Port("p", "a", "0", 0.0)]))
    assert "ports[0].reference_ohm" == refused.value.violations[0].field
