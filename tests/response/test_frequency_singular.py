"""What has no solution is named; what has one is not refused."""
# ruff: noqa: E501  (a case a line reads best)

from __future__ import annotations

import numpy as np
import pytest

from interwind.errors import InvalidNetwork, InvalidRequest, InvalidWindings
from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model.devices import Diode, Gate, GateTimes, Switch
from interwind.model.network import Network
from interwind.model.windings import WindingSet
from interwind_service.response.frequency import frequency_response

SUPPLY = el.VoltageSource("V", "a", "0", phasor=1.0)
RESONANCE = 1 / (2 * np.pi)  # of 1 H and 1 F
R = el.Resistor


def codes(answer):
    """The codes of the findings."""
    return [finding.code for finding in answer.findings]


def test_lossless_resonance_is_one_row():
    """At the resonance of a lossless circuit the row is NaN, the frequency and the elements are named, the rest stands."""
    network = Network("0", [SUPPLY, el.Inductor("L", "a", "b", 1.0), el.Capacitor("C", "b", "0", 1.0)])
    f = np.array([0.5, 1.0, 2.0]) * RESONANCE
    answer = frequency_response(network, f)
    v = answer[ob.NodeVoltage("b")]

    assert np.isnan(v[1])
    np.testing.assert_allclose(v[[0, 2]], 1 / (1 - np.array([0.25, 4.0])), rtol=1e-12)
    assert ["SINGULAR_AT_FREQUENCY"] == codes(answer)
    assert f[1] == answer.findings[0].measured
    assert "'b'" in answer.findings[0].message
    assert "'L'" in answer.findings[0].message


def test_singular_everywhere_is_refused():
    """When every frequency asked for is singular there is no response."""
    network = Network("0", [SUPPLY, el.Inductor("L", "a", "b", 1.0), el.Capacitor("C", "b", "0", 1.0)])
    with pytest.raises(InvalidNetwork, match="no solution at any frequency") as refused:
        frequency_response(network, [RESONANCE])
    assert "SINGULAR" == refused.value.reason


def test_direct_current_where_it_exists():
    """At 0 Hz inductors short and capacitors open."""
    network = Network("0", [SUPPLY, R("R", "a", "b", 3.0), el.Inductor("L", "b", "c", 1.0), R("S", "c", "0", 1.0),
                            el.Capacitor("C", "c", "0", 1e-6)])  # fmt: skip
    answer = frequency_response(network, [0.0], [ob.NodeVoltage("c"), ob.ElementCurrent("L"), ob.ElementCurrent("C")])
    np.testing.assert_allclose(answer.samples[0], [0.25, 0.25, 0.0], rtol=1e-14)


def test_direct_current_of_a_floating_part():
    """Nodes that hang on capacitors alone have no potential at 0 Hz: the row is NaN and they are named."""
    network = Network("0", [SUPPLY, el.Capacitor("C", "a", "b", 1.0), el.Capacitor("D", "b", "0", 1.0)])
    answer = frequency_response(network, [0.0, 1.0])

    assert np.isnan(answer.samples[0]).all()
    np.testing.assert_allclose(answer[ob.NodeVoltage("b")][1], 0.5, rtol=1e-14)
    assert "'b'" in answer.findings[0].message


def test_source_across_an_inductor_at_direct_current():
    """No direct current is finite there."""
    network = Network("0", [SUPPLY, el.Inductor("L", "a", "0", 1.0)])
    answer = frequency_response(network, [0.0, RESONANCE], [ob.ElementCurrent("L")])
    assert np.isnan(answer.samples[0, 0])
    np.testing.assert_allclose(answer.samples[1, 0], -1j, rtol=1e-14)


def test_contradictory_voltages():
    """A loop of ideal voltages that does not add up is refused, its elements named."""
    network = Network("0", [SUPPLY, el.VoltageSource("W", "a", "b", phasor=0.5), R("zero", "b", "0", 0.0)])
    with pytest.raises(InvalidNetwork, match="adds up to") as refused:
        frequency_response(network, [1.0])
    for name in ("'V'", "'W'", "'zero'"):
        assert name in refused.value.message


def test_agreeing_voltages_leave_only_their_current_open():
    """Two equal sources in parallel: voltages are known, the way they share the current is not, and that is said."""
    other = el.VoltageSource("W", "a", "0", phasor=1.0)
    network = Network("0", [SUPPLY, other, R("R", "a", "0", 2.0)])
    observe = [ob.NodeVoltage("a"), ob.ElementCurrent("R"), ob.ElementCurrent("V"), ob.ElementCurrent("W")]
    answer = frequency_response(network, [1.0], observe)

    np.testing.assert_allclose(answer.samples[0, :2], [1.0, 0.5])
    assert np.isnan(answer.samples[0, 2:]).all()
    assert ["UNDETERMINED_CURRENT"] == codes(answer)


def test_contradictory_currents():
    """A node that only current sources reach, and that they do not balance, is refused."""
    network = Network("0", [SUPPLY, R("R", "a", "0", 1.0), el.CurrentSource("J", "0", "x", phasor=1.0),
                            el.CurrentSource("K", "x", "0", phasor=0.5)])  # fmt: skip
    with pytest.raises(InvalidNetwork, match="no current returns") as refused:
        frequency_response(network, [1.0])
    assert "'x'" in refused.value.message
    assert "J" in refused.value.message


def test_current_forced_into_an_isolated_part():
    """Refused only when there is no return; with a second source that takes it back it is solved."""
    coils = WindingSet(("p", "s"), [[1.0, 0.5], [0.5, 1.0]])
    elements = [SUPPLY, el.Windings("T", coils, {"p": ("a", "0"), "s": ("c", "d")}), R("R", "c", "d", 1.0)]
    forced = [*elements, el.CurrentSource("J", "0", "c", phasor=1.0)]
    with pytest.raises(InvalidNetwork, match="no current returns"):
        frequency_response(Network("0", forced), [1.0])
    returned = [*forced, el.CurrentSource("K", "d", "0", phasor=1.0)]
    answer = frequency_response(Network("0", returned), [1.0], [ob.ElementCurrent("R")])
    assert np.isfinite(answer.samples).all()


def test_open_switch_leaves_a_node_without_potential():
    """Its absolute voltage is NaN and said; differences within the cut-off part are known."""
    gate = GateTimes([], initially_closed=False)
    coils = WindingSet(("p", "s"), [[1.0, 0.5], [0.5, 1.0]])
    network = Network("0", [SUPPLY, Switch("S", "0", "d", gate), R("R", "c", "d", 1.0),
                            el.Windings("T", coils, {"p": ("a", "0"), "s": ("c", "d")})])  # fmt: skip
    observe = [ob.NodeVoltage("c"), ob.NodeVoltage("d"), ob.ElementVoltage("R"), ob.NodeVoltage("c", "d")]
    answer = frequency_response(network, [1.0], observe)

    assert np.isnan(answer.samples[0, :2]).all()
    assert abs(answer.samples[0, 2]) > 0.1
    assert answer.samples[0, 2] == answer.samples[0, 3]
    assert "UNDEFINED_POTENTIAL" in codes(answer)


@pytest.mark.parametrize(
    ("gate", "expected"), [(Gate(1.0, 0.5), 1.0), (Gate(1.0, 0.5, 0.25), 0.0), (Gate(1.0, 0.5, -0.25), 1.0)]
)
def test_a_switch_stands_as_at_zero(gate, expected):
    """Just after t = 0, a delay being a phase."""
    network = Network("0", [SUPPLY, Switch("S", "a", "b", gate), R("R", "b", "0", 1.0)])
    np.testing.assert_allclose(frequency_response(network, [1.0])[ob.NodeVoltage("b")], expected)


def test_perfect_transformer_between_two_sources():
    """Perfect coupling fixes the ratio of two voltages; sources that give another are refused by name."""
    coils = WindingSet(("p", "s"), [[1.0, 2.0], [2.0, 4.0]])
    other = el.VoltageSource("W", "b", "0", phasor=1.0)
    network = Network("0", [SUPPLY, other, el.Windings("T", coils, {"p": ("a", "0"), "s": ("b", "0")})])
    with pytest.raises(InvalidNetwork) as refused:
        frequency_response(network, [1.0])
    assert "'T'" in refused.value.message


def test_invalid_windings_are_refused():
    """A set that cannot exist is not solved; the refusal carries the culprit and the field."""
    coils = WindingSet.from_coupling(("p", "s", "t"), [1.0] * 3, [[1, 0.9, 0.9], [0.9, 1, 0.5], [0.9, 0.5, 1]])
    network = Network("0", [SUPPLY, el.Windings("T", coils, {"p": ("a", "0"), "s": ("b", "0"), "t": ("c", "0")})])
    with pytest.raises(InvalidWindings, match="eigenvalue") as refused:
        frequency_response(network, [1.0])
    assert refused.value.violations[0].field.startswith("elements[1].windings.")


def test_a_diode_is_refused():
    """It has no frequency response."""
    with pytest.raises(InvalidNetwork, match="no frequency response") as refused:
        frequency_response(Network("0", [SUPPLY, Diode("D", "a", "b"), R("R", "b", "0", 1.0)]), [1.0])
    assert "elements[1]" == refused.value.violations[0].field


NET = Network("0", [SUPPLY, R("R", "a", "0", 1.0),
                    el.Windings("T", WindingSet(("p", "s"), np.eye(2)), {"p": ("a", "0"), "s": ("b", "0")})])  # fmt: skip
ASKED = [
    ([ob.NodeVoltage("zz")], "observe[0].node"),
    ([ob.NodeVoltage("a"), ob.NodeVoltage("a", "zz")], "observe[1].to"),
    ([ob.ElementCurrent("zz")], "observe[0].name"),
    ([ob.ElementVoltage("T")], "observe[0].name"),
    ([ob.WindingCurrent("T", "zz")], "observe[0].label"),
    ([ob.WindingCurrent("R", "p")], "observe[0].label"),
    (["a"], "observe[0]"),
]


@pytest.mark.parametrize(("observe", "field"), ASKED)
def test_observables_are_checked(observe, field):
    """An unknown node, element or label is refused by its path."""
    with pytest.raises(InvalidRequest) as refused:
        frequency_response(NET, [1.0], observe)
    assert field == refused.value.violations[0].field


@pytest.mark.parametrize(("f", "field"), [([], "frequency_hz"), ([[1.0]], "frequency_hz"), ([1.0, -1.0], "frequency_hz[1]"),
                                          ([np.inf], "frequency_hz[0]"), ([1e30], "frequency_hz[0]"), ([np.nan], "frequency_hz[0]")])  # fmt: skip
def test_frequencies_are_checked(f, field):
    """A vector of finite frequencies from 0 on."""
    with pytest.raises(InvalidRequest) as refused:
        frequency_response(NET, f)
    assert field == refused.value.violations[0].field


def test_order_of_frequencies_is_kept():
    """Frequencies may come in any order, also twice."""
    f = np.array([1e6, 1.0, 1e3, 1.0])
    network = Network("0", [SUPPLY, R("R", "a", "b", 1e3), el.Capacitor("C", "b", "0", 1e-6)])
    v = frequency_response(network, f)[ob.NodeVoltage("b")]
    np.testing.assert_allclose(v, 1 / (1 + 2j * np.pi * f * 1e-3), rtol=1e-13)


def test_voltages_between_parts_are_undefined():
    """A voltage across an isolation barrier is refused, not invented."""
    coils = WindingSet(("p", "s"), [[1.0, 0.5], [0.5, 1.0]])
    network = Network("0", [SUPPLY, el.Windings("T", coils, {"p": ("a", "0"), "s": ("c", "d")}), R("R", "c", "d", 1.0)])
    with pytest.raises(InvalidNetwork, match="no conducting path") as refused:
        frequency_response(network, [1.0], [ob.NodeVoltage("a", "c")])
    assert "observe[0].to" == refused.value.violations[0].field


def test_inputs_are_left_alone():
    """A solve changes nothing it was given."""
    f = np.array([3.0, 1.0, 2.0])
    before = f.copy()
    frequency_response(NET, f)
    np.testing.assert_array_equal(before, f)
