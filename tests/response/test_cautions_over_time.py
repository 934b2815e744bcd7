"""Responses over time carry the cautions their content calls for, observed or not."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw
from interwind_service import engine
from interwind_service.response.switched.observed_stress import source_peak

WAVEFORMS = [
    iw.Constant(-3.0),
    iw.Step(3.0),
    iw.Sine(amplitude=2.0, frequency_hz=1e3, offset=-1.5),
    iw.Trapezoid(low=-4.0, high=1.0, period_s=1e-3, rise_s=1e-4, high_s=4e-4, fall_s=1e-4),
    iw.DoubleExponential(amplitude=2.0, tail_s=1e-3, front_s=1e-4),
    iw.DampedSine(amplitude=2.0, frequency_hz=1e3, decay_s=1e-3),
    iw.StandardImpulse(iw.ImpulseShape.LIGHTNING_1_2_50, -5.0),
    iw.PiecewiseLinear(time_s=[0.0, 1e-3], value=[1.0, -6.0]),
]


def divider(waveform) -> iw.Network:
    """A source, a resistor and a capacitor to ground."""
    return iw.Network(
        "0v",
        [
            iw.VoltageSource("bus", "bus", "0v", waveform=waveform),
            iw.Resistor("R", "bus", "out", 1e3),
            iw.Capacitor("C", "out", "0v", 1e-3),
        ],
    )


def codes(answer) -> dict[str, float]:
    """Code and measured value of each caution."""
    return {caution.code: caution.measured for caution in answer.cautions}


@pytest.mark.parametrize("waveform", WAVEFORMS, ids=lambda waveform: type(waveform).__name__)
def test_no_waveform_exceeds_its_bound(waveform):
    """The bound a caution stands on holds at every sample."""
    run = engine.time_response(divider(waveform), 2e-3, 1e-6, [iw.NodeVoltage("bus")])
    assert np.abs(run[iw.NodeVoltage("bus")]).max() <= source_peak(waveform) * (1 + 1e-12)


def test_a_dangerous_source_is_told_unobserved():
    """600 V at a node nobody asked for is touchable all the same (limits: IEC 62368-1 Table 4, from memory)."""
    run = engine.time_response(divider(iw.Constant(600.0)), 1e-6, 1e-6, [iw.ElementCurrent("R")])
    assert 600.0 == codes(run)["TOUCHABLE_VOLTAGE"]


def test_a_charged_capacitor_is_told():
    """1 mF at 600 V holds ½ C v² = 180 J (derived), told from the voltages of its nodes."""
    steady = engine.time_response(divider(iw.Constant(600.0)), 1e-3, 1e-3, initial=iw.SteadyStart())
    assert codes(steady)["STORED_ENERGY"] == pytest.approx(180.0, rel=1e-9)


def test_a_harmless_network_gets_the_standing_statement_only():
    """5 V and nothing stored: an engineering estimate, no more."""
    run = engine.time_response(divider(iw.Constant(5.0)), 1e-6, 1e-6)
    assert ["ENGINEERING_ESTIMATE"] == list(codes(run))


def test_a_switched_network_tells_its_source_and_its_capacitor():
    """600 V behind a switch, nobody looking: told; 1 mF charged to it, its node observed: 180 J (derived)."""
    gate = iw.GateTimes([1.0], initially_closed=True)
    source, _, capacitor = divider(iw.Constant(600.0)).elements
    switch, resistor = iw.Switch("S", "bus", "mid", gate, 1e-3), iw.Resistor("R", "mid", "out", 1.0)
    net = iw.Network("0v", [source, switch, resistor, capacitor])
    unseen = engine.time_response(net, 1e-6, 1e-6, [iw.ElementCurrent("R")])
    charged = engine.time_response(net, 50e-3, 1e-3, [iw.NodeVoltage("out")])
    assert 600.0 == codes(unseen)["TOUCHABLE_VOLTAGE"]
    assert codes(charged)["STORED_ENERGY"] == pytest.approx(180.0, rel=1e-6)
