"""Bad input is refused typed, naming what is at fault, before anything is computed."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw
from interwind_service.response.periodic import periodic_response
from interwind_service.response.switching import time_response_switching


def chopper(*extra: iw.Resistor, on_s: float = 4e-6, period_s: float = 1e-5) -> iw.Network:
    return iw.Network(
        "g",
        [
            iw.VoltageSource("E", "in", "g", iw.Constant(10.0)),
            iw.Switch("S", "in", "x", iw.Gate(period_s, on_s)),
            iw.Diode("D", "g", "x"),
            iw.Inductor("L", "x", "o", 1e-4),
            iw.Resistor("R", "o", "g", 5.0),
            *extra,
        ],
    )


@pytest.mark.parametrize(
    ("stop_s", "step_s", "field"),
    [(1e-4, 0.0, "step_s"), (1e-4, -1e-6, "step_s"), (0.0, 1e-6, "stop_s"), (float("nan"), 1e-6, "stop_s"),
     (1.0, 1e-12, "step_s"), (1e-4, 3e-6, "stop_s")],
)  # fmt: skip
def test_grids(stop_s, step_s, field):
    """Lengths that are not positive, 1e12 steps, and a step that does not divide the stop."""
    with pytest.raises(iw.InvalidRequest) as refused:
        time_response_switching(chopper(), stop_s, step_s)
    assert refused.value.violations[0].field == field


def test_step_that_does_not_divide_names_the_two_nearest():
    with pytest.raises(iw.InvalidRequest, match=r"9\.9.*e-05 s or .*0\.0001"):
        time_response_switching(chopper(), 1e-4, 3e-6)


def test_period_of_more_changes_than_a_call_could_run_through():
    """190 000 cycles of the gate in one period: refused at once, the shortest one is asked for."""
    with pytest.raises(iw.InvalidRequest, match="shortest time in which all of them repeat") as refused:
        periodic_response(chopper(), 1.9, 0.19)
    assert refused.value.violations[0].field == "period_s"


@pytest.mark.parametrize("period_s", [1.5e-5, 0.99e-5, 1e-5 * (1 + 1e-6)])
def test_period_that_is_none_of_the_drives(period_s):
    with pytest.raises(iw.InvalidRequest, match="'S'") as refused:
        periodic_response(chopper(), period_s, period_s / 10)
    assert refused.value.violations[0].field == "period_s"


def test_whole_multiples_of_the_drives_are_periods():
    one, three = (periodic_response(chopper(), k * 1e-5, 1e-6, [iw.ElementCurrent("L")]) for k in (1, 3))
    assert three.mean(iw.ElementCurrent("L")) == pytest.approx(one.mean(iw.ElementCurrent("L")), rel=1e-9)


@pytest.mark.parametrize(
    "waveform", [iw.Ramp(slope_per_s=1.0), iw.DoubleExponential(1.0, 1e-5, 1e-6), iw.Step(1.0, 1e-6)]
)
def test_drives_that_never_repeat(waveform):
    network = iw.Network(
        "g", [iw.VoltageSource("E", "a", "g", waveform), iw.Diode("D", "a", "b"), iw.Resistor("R", "b", "g", 1.0)]
    )
    with pytest.raises(iw.InvalidRequest, match="does not repeat") as refused:
        periodic_response(network, 1e-5, 1e-6)
    assert refused.value.violations[0].field == "elements[0].waveform"


def test_source_shorted_by_closed_switches():
    """Both switches of a leg closed at once: named, with the source."""
    network = iw.Network(
        "g",
        [
            iw.VoltageSource("E", "in", "g", iw.Constant(10.0)),
            iw.Switch("upper", "in", "x", iw.Gate(1e-5, 6e-6)),
            iw.Switch("lower", "x", "g", iw.Gate(1e-5, 6e-6, 5e-6)),
            iw.Switch("innocent", "x", "y", iw.Gate(1e-5, 9e-6)),
            iw.Resistor("R", "y", "g", 5.0),
        ],
    )
    with pytest.raises(iw.InvalidNetwork, match="shorted") as refused:
        time_response_switching(network, 1e-5, 1e-6)
    assert refused.value.reason == "SOURCE_SHORTED"
    assert all(name in refused.value.message for name in ("'E'", "'upper'", "'lower'"))
    assert "innocent" not in refused.value.message


def test_current_without_a_path():
    network = iw.Network(
        "g",
        [
            iw.CurrentSource("I", "g", "a", iw.Constant(1.0)),
            iw.Switch("S", "a", "g", iw.GateTimes([5e-6], initially_closed=True)),
            iw.Diode("D", "g", "a"),
        ],
    )
    with pytest.raises(iw.InvalidNetwork, match="'I' has no path") as refused:
        time_response_switching(network, 1e-5, 1e-6)
    assert refused.value.reason == "CURRENT_WITHOUT_PATH"
    assert "'S'" in refused.value.message


def test_loop_of_voltage_sources():
    network = iw.Network(
        "g",
        [
            iw.VoltageSource("one", "a", "g", iw.Constant(1.0)),
            iw.VoltageSource("two", "a", "g", iw.Constant(2.0)),
            iw.Diode("D", "a", "b"),
            iw.Resistor("R", "b", "g", 1.0),
        ],
    )
    with pytest.raises(iw.InvalidNetwork, match="'two'"):
        time_response_switching(network, 1e-5, 1e-6)


@pytest.mark.parametrize(
    ("item", "value"),
    [(iw.ElementCurrent("S"), 1.0), (iw.ElementVoltage("L"), 1.0), (iw.ElementCurrent("L"), float("inf"))],
)
def test_initial_values_that_are_no_states(item, value):
    with pytest.raises(iw.InvalidRequest) as refused:
        time_response_switching(chopper(), 1e-5, 1e-6, None, {item: value})
    assert refused.value.violations[0].field.startswith("initial")


def test_impossible_windings():
    coils = iw.WindingSet.from_coupling(
        ("a", "b", "c"), [1e-3] * 3, [[1, 0.9, 0.9], [0.9, 1, 0.5], [0.9, 0.5, 1]], [0.1] * 3
    )
    network = iw.Network(
        "g",
        [
            iw.VoltageSource("E", "in", "g", iw.Constant(1.0)),
            iw.Windings("T", coils, {"a": ("in", "x"), "b": ("y", "g"), "c": ("z", "g")}),
            iw.Switch("S", "x", "g", iw.Gate(1e-5, 5e-6)),
            iw.Resistor("Ry", "y", "g", 1.0),
            iw.Resistor("Rz", "z", "g", 1.0),
        ],
    )
    with pytest.raises(iw.InvalidWindings):
        time_response_switching(network, 1e-5, 1e-6)


def test_open_node_is_not_given_a_voltage():
    """A node that ideal open switches leave without a path is NaN for that stretch, and said."""
    network = iw.Network(
        "g",
        [
            iw.VoltageSource("E", "in", "g", iw.Constant(10.0)),
            iw.Switch("S1", "in", "a", iw.GateTimes([5e-6], initially_closed=True)),
            iw.Switch("S2", "a", "b", iw.GateTimes([], initially_closed=False)),
            iw.Resistor("R", "b", "g", 5.0),
        ],
    )
    a = iw.NodeVoltage("a")
    wave = time_response_switching(network, 1e-5, 1e-6, [a, iw.NodeVoltage("b")])
    assert wave[a][:5] == pytest.approx(10.0)
    assert np.isnan(wave[a][5:]).all()
    assert not np.isnan(wave[iw.NodeVoltage("b")]).any()
    assert [finding.code for finding in wave.findings] == ["UNDEFINED_POTENTIAL"]


def test_inputs_are_left_alone():
    network = chopper()
    before = network.to_json()
    time_response_switching(network, 1e-5, 1e-6)
    periodic_response(network, 1e-5, 1e-6)
    assert network.to_json() == before


def test_a_ledger_that_does_not_close_is_refused():
    """A tolerance below rounding is missed, and the numbers are kept back with their evidence."""
    with pytest.raises(iw.AccuracyNotReached) as refused:
        time_response_switching(chopper(), 1e-4, 1e-6, None, None, 1e-18)
    assert refused.value.evidence.energy_error > 1e-18
