"""Area D, insertion loss and touch limits, through the public client."""

from __future__ import annotations

import math

import numpy as np
import pytest

import interwind as iw

CHOKE = iw.WindingSet.from_coupling(("line", "neutral"), [1e-3, 1e-3], [[1, 0.999], [0.999, 1]])


def insertion_loss_db(solver, elements, through, hertz) -> np.ndarray:
    """20 log |V2 without / V2 with| between 50 Ω and 50 Ω (CISPR 17): the load voltage without the filter is half."""
    net = iw.Network("0", [iw.VoltageSource("V", "s", "0", phasor=2.0), iw.Resistor("RS", "s", "in", 50.0), *elements,
                           iw.Resistor("RL", through, "0", 50.0)])  # fmt: skip
    return -20 * np.log10(np.abs(solver.frequency_response(net, hertz)[iw.NodeVoltage(through)]))


# D-15, derived: L = 1 mH, k = 0.999 at 150 kHz and 1 MHz; differential loop inductance 2L(1 − k), common L(1 + k)/2.
@pytest.mark.parametrize(
    ("terminals", "decibel"),
    [
        # the current goes out through one winding and back through the other: the loop closes over the second
        ({"line": ("in", "m"), "neutral": ("out", "m")}, [0.001542799, 0.068045175]),
        # both windings side by side
        ({"line": ("in", "out"), "neutral": ("in", "out")}, [19.529746215, 35.960354378]),
    ],
    ids=["differential", "common"],
)
def test_d15_common_mode_choke(solver, terminals, decibel):
    found = insertion_loss_db(solver, [iw.Windings("T", CHOKE, terminals)], "out", [150e3, 1e6])
    np.testing.assert_allclose(found, decibel, atol=1e-8)


def test_shunt_capacitor_in_fifty_ohm(solver):
    """20 log |1 + 25 jωC| (derived; textbook form)."""
    hertz = np.geomspace(1e4, 1e8, 21)
    found = insertion_loss_db(solver, [iw.Capacitor("C", "in", "0", 1e-6)], "in", hertz)
    np.testing.assert_allclose(found, 20 * np.log10(np.abs(1 + 25j * 2 * np.pi * hertz * 1e-6)), atol=1e-9)


# D-11, from memory (IEC 62368-1:2018 Table 4): 30 V rms is 42.43 V peak, above 42.4 V; 50 V rms is 70.71 V.
@pytest.mark.parametrize(("rms", "grade"), [(29.9, None), (30.0, "can hurt"), (50.0, "can kill")])
def test_d11_touch_limits(solver, rms, grade):
    net = iw.Network("0", [iw.VoltageSource("V", "a", "0", phasor=rms * math.sqrt(2)), iw.Resistor("R", "a", "0", 1e3)])
    cautions = {caution.code: caution for caution in solver.frequency_response(net, [50.0]).cautions}
    assert "ENGINEERING_ESTIMATE" in cautions
    if grade is None:
        assert "TOUCHABLE_VOLTAGE" not in cautions
    else:
        assert grade in cautions["TOUCHABLE_VOLTAGE"].message
        assert cautions["TOUCHABLE_VOLTAGE"].measured == pytest.approx(rms * math.sqrt(2))
