"""Bad input to a time response: typed, by its path, before memory is taken."""

from __future__ import annotations

import tracemalloc

import numpy as np
import pytest

from interwind.errors import AccuracyNotReached, InvalidNetwork, InvalidRequest
from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model import waveform as wf
from interwind.model.network import Network
from interwind.model.response import SteadyStart
from interwind.model.windings import WindingSet
from interwind_service.response.time import time_response


def network(waveform: wf.Waveform | None = None) -> Network:
    return Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", waveform),
            el.Resistor("R", "a", "b", 1.0),
            el.Inductor("L", "b", "c", 1e-3),
            el.Capacitor("C", "c", "0", 1e-6),
        ],
    )


@pytest.mark.parametrize(
    ("stop_s", "step_s", "field"),
    [
        (1e-3, 0.0, "step_s"),
        (1e-3, -1e-6, "step_s"),
        (1e-3, np.nan, "step_s"),
        (0.0, 1e-6, "stop_s"),
        (np.inf, 1e-6, "stop_s"),
        (1.0, 1e-12, "step_s"),
        (1e-3, 3e-4, "stop_s"),
        (1e-3, 2e-3, "stop_s"),
    ],
)
def test_grids(stop_s, step_s, field):
    """Zero-length steps, 10¹² steps, a stop between samples: refused at once, the field named."""
    tracemalloc.start()
    with pytest.raises(InvalidRequest) as caught:
        time_response(network(), stop_s, step_s)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert caught.value.violations[0].field == field
    assert peak < 2**20


def test_a_stop_between_samples_names_both_neighbours():
    with pytest.raises(InvalidRequest, match=r"0\.0009.* or 0\.0012"):
        time_response(network(), 1e-3, 3e-4)


def test_a_stop_within_a_millionth_of_a_step_is_accepted():
    answer = time_response(network(), 1e-3 * (1 + 5e-10), 1e-6)
    assert len(answer.time_s) == 1001


def test_too_many_values_are_refused_before_memory():
    with pytest.raises(InvalidRequest) as caught:
        time_response(network(), 1.0, 1e-8)
    assert caught.value.violations[0].field == "observe"


@pytest.mark.parametrize(
    ("initial", "field"),
    [
        ({ob.ElementVoltage("R"): 1.0}, "initial"),
        ({ob.ElementCurrent("C"): 1.0}, "initial"),
        ({ob.ElementVoltage("nothing"): 1.0}, "initial"),
        ({ob.WindingCurrent("L", "w"): 1.0}, "initial"),
        ({ob.ElementVoltage("C"): np.nan}, "initial"),
    ],
)
def test_initial_values(initial, field):
    with pytest.raises(InvalidRequest) as caught:
        time_response(network(), 1e-3, 1e-6, initial=initial)
    assert caught.value.violations[0].field.startswith(field)


def test_a_start_that_contradicts_the_network_says_which_and_by_how_much():
    """Charge is kept, the voltages that jump are named with their size, and the lost energy is stated."""
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.Constant(10.0)),
            el.Capacitor("C", "a", "0", 1e-6),
            el.Resistor("R", "a", "0", 1.0),
        ],
    )
    answer = time_response(net, 1e-3, 1e-4, initial={ob.ElementVoltage("C"): 4.0})
    finding = next(f for f in answer.findings if f.code == "INCONSISTENT_START")
    assert "C from 4 to 10 V" in finding.message
    assert finding.measured == pytest.approx(0.5e-6 * 36.0)
    assert answer.evidence.energy_error < 1e-12


@pytest.mark.parametrize(
    ("waveform", "field"),
    [
        (wf.Sine(np.nan, 50.0), "elements[0].waveform.amplitude"),
        (wf.Trapezoid(low=0, high=1, period_s=1e-6, rise_s=0, high_s=2e-6, fall_s=0), "elements[0].waveform.period_s"),
        (wf.Trapezoid(low=0, high=1, period_s=1e-12, rise_s=0, high_s=0, fall_s=0), "elements[0].waveform"),
        (wf.DoubleExponential(1.0, 0.0, 1e-6), "elements[0].waveform.tail_s"),
        (wf.PiecewiseLinear([0.0, np.inf], [0.0, 1.0]), "elements[0].waveform.time_s[1]"),
        (wf.SampledRecord(0.0, [1.0, 2.0]), "elements[0].waveform.interval_s"),
        (wf.StandardImpulse(wf.ImpulseShape.CURRENT_8_20, 1.0, chopped_at_s=-1.0), "elements[0].waveform.chopped_at_s"),
        (wf.DampedSine(1.0, 1e3, -1.0), "elements[0].waveform.decay_s"),
    ],
    ids=lambda value: type(value).__name__,
)
def test_waveforms(waveform, field):
    with pytest.raises(InvalidRequest) as caught:
        time_response(network(waveform), 1e-3, 1e-6)
    assert caught.value.violations[0].field == field


def test_observables():
    with pytest.raises(InvalidRequest) as caught:
        time_response(network(), 1e-3, 1e-6, [ob.NodeVoltage("nowhere")])
    assert caught.value.violations[0].field == "observe[0].node"


def test_tolerance():
    with pytest.raises(InvalidRequest) as caught:
        time_response(network(), 1e-3, 1e-6, tolerance=0.0)
    assert caught.value.violations[0].field == "tolerance"
    with pytest.raises(AccuracyNotReached) as missed:
        time_response(network(wf.Step(1.0)), 1e-3, 1e-6, tolerance=1e-30)
    assert missed.value.evidence.energy_error > 1e-30


def test_steady_start():
    """The DC point of the sources at 0: nothing moves while they stand still."""
    answer = time_response(network(wf.Constant(5.0)), 1e-3, 1e-5, [ob.NodeVoltage("c")], SteadyStart())
    assert np.abs(answer.samples - 5.0).max() < 1e-12
    lossless = Network("0", [el.VoltageSource("V", "a", "0", wf.Constant(1.0)), el.Inductor("L", "a", "0", 1.0)])
    with pytest.raises(InvalidNetwork, match="point of rest"):
        time_response(lossless, 1e-3, 1e-4, initial=SteadyStart())


def test_current_into_an_island_is_refused():
    """Current driven through a part of the network that has no way back."""
    coils = WindingSet(("p", "s"), [[1e-3, 5e-4], [5e-4, 1e-3]], 1.0)
    net = Network(
        "0",
        [
            el.Windings("T", coils, {"p": ("a", "0"), "s": ("c", "d")}),
            el.Resistor("R", "a", "0", 1.0),
            el.CurrentSource("J", "0", "c", wf.Step(1.0)),
        ],
    )
    with pytest.raises(InvalidNetwork, match="no return"):
        time_response(net, 1e-3, 1e-4)


def test_one_quantity_stated_twice_with_two_values():
    """The current of a single winding has two names; two values contradict, and the difference is told."""
    coil = WindingSet(("w",), [[1e-3]])
    net = Network("0", [el.Windings("T", coil, {"w": ("a", "0")}), el.Resistor("R", "a", "0", 1.0)])
    both = {ob.ElementCurrent("T"): 1.0, ob.WindingCurrent("T", "w"): 1.5}
    with pytest.raises(InvalidRequest, match=r"0\.5 apart"):
        time_response(net, 1e-3, 1e-4, initial=both)


def test_cautions_come_with_the_numbers():
    """A surge on a winding is touchable; a large capacitor keeps its energy."""
    net = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", wf.StandardImpulse(wf.ImpulseShape.SWITCHING_250_2500, 1000.0)),
            el.Resistor("R", "a", "b", 1.0),
            el.Capacitor("C", "b", "0", 50e-6),
        ],
    )
    answer = time_response(net, 1e-3, 1e-5, [ob.ElementCurrent("R")])
    codes = {caution.code for caution in answer.cautions}
    assert {"TOUCHABLE_VOLTAGE", "STORED_ENERGY"} <= codes
    touched = next(caution for caution in answer.cautions if caution.code == "TOUCHABLE_VOLTAGE")
    assert touched.measured == pytest.approx(1000.0, rel=1e-3)
