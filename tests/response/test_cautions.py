"""Cautions come when the content calls for them, with the value found and the threshold."""
# ruff: noqa: E501  (a case a line reads best)

from __future__ import annotations

import numpy as np
import pytest

from interwind.model import elements as el
from interwind.model.network import Network
from interwind.model.waveform import DoubleExponential
from interwind.model.windings import WindingSet
from interwind_service.network.topology import number
from interwind_service.response.frequency import frequency_response
from interwind_service.response.request.cautions import Stress, cautions_of

PLAIN = Network("0", [el.VoltageSource("V", "a", "0", phasor=1.0), el.Capacitor("C", "a", "0", 2e-3)])


def codes(cautions):
    """Their codes."""
    return [caution.code for caution in cautions]


def test_the_standing_statement_is_always_there():
    """Every response says that it is an estimate, and who decides."""
    cautions = frequency_response(PLAIN, [1.0]).cautions
    assert "ENGINEERING_ESTIMATE" == cautions[0].code
    assert "licensed practice" in cautions[0].message


# IEC 62368-1:2018 Table 4, from memory: ES1 60 V d.c., 42.4 V peak a.c.
@pytest.mark.parametrize(
    ("volt", "f", "said"), [(42.3, 50.0, False), (42.5, 50.0, True), (59.0, 0.0, False), (61.0, 0.0, True)]
)
def test_touchable_voltage(volt, f, said):
    """Direct and alternating limits."""
    network = Network("0", [el.VoltageSource("V", "a", "0", phasor=volt), el.Resistor("R", "a", "0", 1e3)])
    cautions = frequency_response(network, [f]).cautions
    assert said == ("TOUCHABLE_VOLTAGE" in codes(cautions))
    if said:
        assert volt == pytest.approx(cautions[1].measured)
        assert (42.4 if f else 60.0) == cautions[1].threshold


# Electrical safety manual of a national laboratory (LBNL), tables 2.2.13 and 2.3.5, looked up: 2 mF at 100 V = 10 J is
# hazardous, 1.9 mF at 100 V = 9.5 J is not, 25 mF at 90 V = 101.25 J is a thermal hazard.
@pytest.mark.parametrize(
    ("farad", "volt", "joule"), [(2e-3, 100.0, 10.0), (1.9e-3, 100.0, None), (25e-3, 90.0, 101.25)]
)
def test_stored_energy(farad, volt, joule):
    """Capacitors by voltage and energy."""
    network = Network("0", [el.VoltageSource("V", "a", "0"), el.Capacitor("C", "a", "0", farad)])
    cautions = cautions_of(number(network), Stress(capacitor_voltage_v={"C": volt}))
    found = [caution.measured for caution in cautions if caution.code == "STORED_ENERGY"]
    assert ([] if joule is None else [pytest.approx(joule)]) == found


def test_stored_field():
    """A coil of 1 H at 10 A holds 50 J."""
    network = Network("0", [el.CurrentSource("J", "0", "a", phasor=10.0), el.Windings("T", WindingSet(("w",), [[1.0]]), {"w": ("a", "0")})])  # fmt: skip
    found = {caution.code: caution.measured for caution in frequency_response(network, [1.0]).cautions}
    assert 50.0 == pytest.approx(found["STORED_ENERGY"])


# IEC 60335-1 clause 8.1.4 as quoted in a public forum thread (looked up): 45 µC.
@pytest.mark.parametrize(("charge", "said"), [(44e-6, False), (46e-6, True)])
def test_stored_charge(charge, said):
    """A charged capacitor stays charged."""
    network = Network("0", [el.VoltageSource("V", "a", "0"), el.Capacitor("C", "a", "0", charge / 400)])
    assert said == ("STORED_CHARGE" in codes(cautions_of(number(network), Stress(capacitor_voltage_v={"C": 400.0}))))


def current_transformer(burden_ohm):
    """1:1000, its primary current forced."""
    coils = WindingSet.from_coupling(("bar", "secondary"), [1e-6, 1.0], [[1, 0.999], [0.999, 1]], [0.0, 1.0])
    return Network("0", [el.CurrentSource("J", "0", "a", phasor=100.0), el.Resistor("burden", "b", "0", burden_ohm),
                         el.Windings("CT", coils, {"bar": ("a", "0"), "secondary": ("b", "0")})])  # fmt: skip


@pytest.mark.parametrize(("burden", "said"), [(1.0, False), (1e6, True)])
def test_open_current_transformer(burden, said):
    """Said when the secondary has no burden."""
    cautions = frequency_response(current_transformer(burden), [50.0]).cautions
    assert said == ("OPEN_CURRENT_TRANSFORMER_SECONDARY" in codes(cautions))
    if said:
        assert any("Never open" in caution.message for caution in cautions)


def test_impulse_and_barrier():
    """An impulse source, and two parts that only a field joins."""
    coils = WindingSet(("p", "s"), [[1.0, 0.5], [0.5, 1.0]])
    wave = DoubleExponential(amplitude=1e3, tail_s=68e-6, front_s=0.4e-6)
    network = Network("0", [el.VoltageSource("V", "a", "0", waveform=wave, phasor=1.0),
                            el.Windings("T", coils, {"p": ("a", "0"), "s": ("c", "d")})])  # fmt: skip
    cautions = frequency_response(network, np.array([50.0])).cautions
    assert {"IMPULSE_VOLTAGE", "ISOLATION_BARRIER", "ENGINEERING_ESTIMATE"} <= set(codes(cautions))
