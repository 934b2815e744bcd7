"""The DC point of networks with smooth laws, against one equation each, solved by bracketing (scipy)."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import brentq

import interwind as iw
from interwind_service.response.switching import time_response_switching

DIODE = {"saturation_current_a": 1e-14, "thermal_voltage_v": 0.02585}


def settled(network: iw.Network, *observe: iw.Observable) -> np.ndarray:
    """Start at rest; nothing moves after it."""
    wave = time_response_switching(network, 1e-5, 2.5e-6, observe, iw.SteadyStart())
    assert np.allclose(wave.samples, wave.samples[0], rtol=1e-7, atol=1e-12)
    return wave.samples[0]


def source(volt: float, *elements: iw.Element) -> iw.Network:
    return iw.Network("g", [iw.VoltageSource("E", "a", "g", iw.Constant(volt)), *elements])


@pytest.mark.parametrize("volt", [10.0, -10.0, 1e-3, 3000.0])
def test_a_diode_behind_a_resistor_and_an_inductor(volt: float):
    """The one root of v + R I_s (e^(v/V_T) - 1) = E; the inductor has no voltage, the capacitor no current."""
    network = source(
        volt,
        iw.Resistor("R", "a", "b", 1e3),
        iw.Inductor("L", "b", "c", 1e-3),
        iw.Diode("D", "c", "g", **DIODE),
        iw.Capacitor("C", "c", "g", 1e-9),
    )
    v = brentq(lambda v: volt - v - 1e-11 * np.expm1(v / 0.02585), min(volt, 0.0) - 1e-9, 1.2, xtol=1e-15)
    at, current = settled(network, iw.NodeVoltage("c"), iw.ElementCurrent("L"))
    assert at == pytest.approx(v, rel=1e-9)
    assert current == pytest.approx((volt - v) / 1e3, rel=1e-8, abs=1e-11)


def test_a_bridge_of_four_diodes():
    """Two diodes in series carry the load: R i + 2 V_T ln(1 + i/I_s) = E."""
    arms = {"D1": ("a", "x"), "D2": ("g", "x"), "D3": ("y", "a"), "D4": ("y", "g")}
    network = source(
        300.0,
        iw.Capacitor("C", "x", "y", 1e-6),
        iw.Resistor("R", "x", "y", 50.0),
        *(iw.Diode(name, a, b, **DIODE) for name, (a, b) in arms.items()),
    )
    i = brentq(lambda i: 300.0 - 2 * 0.02585 * np.log1p(i / 1e-14) - 50.0 * i, 0.0, 6.0)
    assert settled(network, iw.NodeVoltage("x", "y"))[0] == pytest.approx(50.0 * i, rel=1e-9)


@pytest.mark.parametrize("volt", [500.0, 3e3, -1e5])
def test_an_arrester_far_above_its_reference(volt: float):
    """The one root of v + R I_ref |v/V_ref|^50 sign(v) = E."""
    network = source(
        volt, iw.Resistor("R", "a", "b", 10.0), iw.Arrester("Z", "b", "g", 1e3, 1.0, 50.0),
        iw.Capacitor("C", "b", "g", 1e-9),
    )  # fmt: skip
    v = np.sign(volt) * brentq(lambda u: abs(volt) - u - 10.0 * (u / 1e3) ** 50, 0.0, 2e3, xtol=1e-12)
    assert settled(network, iw.NodeVoltage("b"))[0] == pytest.approx(v, rel=1e-8)


def test_a_saturable_branch_takes_the_flux_of_its_current():
    """At DC its voltage is 0 and its current that of the loop; energy from the table by trapezoids."""
    network = source(
        10.0,
        iw.Resistor("R", "a", "b", 10.0),
        iw.SaturableInductor("S", "b", "c", [0.1, 2.0], [0.1, 0.15], 0.02),
        iw.Diode("D", "c", "g", **DIODE),
    )
    i = brentq(lambda i: 10.0 - 0.02585 * np.log1p(i / 1e-14) - 10.0 * i, 0.0, 1.0)
    current, energy = settled(network, iw.ElementCurrent("S"), iw.StoredEnergy("S"))
    assert current == pytest.approx(i, rel=1e-9)
    flux = np.interp(i, [0.1, 2.0], [0.1, 0.15])
    assert energy == pytest.approx(0.5 * 0.1 * 0.1 + 0.5 * (0.1 + i) * (flux - 0.1), rel=1e-8)


def test_a_flux_that_rest_does_not_fix_keeps_its_residual():
    """Two branches in parallel without resistance: their circulating current is that of the residual fluxes."""
    network = source(
        0.0,
        iw.Resistor("R", "a", "b", 10.0),
        iw.SaturableInductor("S", "b", "g", [0.1, 2.0], [0.1, 0.15], 0.02),
        iw.SaturableInductor("T", "b", "g", [0.1, 2.0], [0.1, 0.15], -0.02),
        iw.Diode("D", "b", "g", **DIODE),
    )
    assert settled(network, iw.ElementCurrent("S"), iw.ElementCurrent("T")) == pytest.approx([0.02, -0.02])


@pytest.mark.parametrize("law", [DIODE, {}], ids=["exponential", "ideal"])
def test_no_point_of_rest(law: dict):
    """A voltage across an inductor alone, a current into a capacitor alone: no state stands still."""
    inductor = source(
        10.0, iw.Inductor("L", "a", "g", 1e-3), iw.Resistor("R", "a", "b", 1.0), iw.Diode("D", "b", "g", **law)
    )
    charged = iw.Network(
        "g",
        [
            iw.CurrentSource("I", "g", "a", iw.Constant(1.0)),
            iw.Capacitor("C", "a", "g", 1e-6),
            iw.Resistor("R", "a", "b", 1.0),
            iw.Diode("D", "g", "b", **law),
        ],
    )
    for network in (inductor, charged) if law else (inductor,):
        with pytest.raises(iw.InvalidNetwork, match=r"no (point|state) of rest|of rest was found") as refused:
            time_response_switching(network, 1e-5, 1e-6, None, iw.SteadyStart())
        assert refused.value.reason == "NO_POINT_OF_REST"
