"""Where ideal elements force a jump: flux and charge are kept, the loss is booked, and nothing rings."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw
from interwind_service.response.switching import time_response_switching


def test_opened_inductor_decays_without_alternation():
    """1 mH at 1 A opened into 1 MΩ: v = −1e6 e^(−t/1 ns), never a change of sign (closed form)."""
    net = iw.Network(
        "g",
        [
            iw.Inductor("coil", "a", "g", 1e-3),
            iw.Resistor("across", "a", "g", 1e6),
            iw.Switch("contact", "a", "g", iw.GateTimes([1e-6], initially_closed=True)),
        ],
    )
    v, i = iw.NodeVoltage("a"), iw.ElementCurrent("coil")
    wave = time_response_switching(net, 1.005e-6, 1e-9, [v, i], {i: 1.0})
    t = wave.time_s - 1e-6
    after = t > -1e-10
    assert np.allclose(wave[v][after], -1e6 * np.exp(-t[after] / 1e-9), rtol=1e-6)
    assert np.all(wave[v] <= 1e-3)
    # At microsecond steps, where the trapezoidal rule gave −1995, +1987, −1979 V for ever, it is simply over.
    coarse = time_response_switching(net, 6e-6, 1e-6, [v, i], {i: 1.0})
    assert np.all(np.abs(coarse[v][2:]) < 1e-9)
    assert coarse.ledger.dissipated_by_element_j["across"] == pytest.approx(0.5e-3, rel=1e-6)


def test_primary_forced_to_zero_sits_at_its_true_voltage():
    """Current 1 A cut in winding 1 while winding 2 closes on 10 ohm: v1 = −k² R e^(−t R/L2), −10 V at k -> 1."""
    k, L, R = 0.999, 1e-3, 10.0
    coils = iw.WindingSet(("one", "two"), [[L, k * L], [k * L, L]])
    net = iw.Network(
        "g",
        [
            iw.Windings("T", coils, {"one": ("a", "g"), "two": ("b", "g")}),
            iw.CurrentSource("drive", "g", "a", iw.PiecewiseLinear([0.0, 1e-6, 1e-6], [1.0, 1.0, 0.0])),
            iw.Resistor("load", "b", "g", R),
        ],
    )
    one, two = iw.WindingVoltage("T", "one"), iw.WindingCurrent("T", "two")
    wave = time_response_switching(net, 5e-6, 1e-6, [one, two], {iw.WindingCurrent("T", "one"): 1.0})
    after = wave.time_s[1:] - 1e-6
    assert wave[one][1:] == pytest.approx(-(k**2) * R * np.exp(-after * R / L), rel=1e-6)
    assert np.all(wave[one][1:] < 0.0)


@pytest.mark.parametrize(("k", "share"), [(0.9, 0.19), (0.99, 0.0199), (0.999, 0.001999)])
def test_commutation_loses_one_minus_k_squared(k, share):
    """i2 jumps to M i1 / L2 and the energy loses 1 − k² of itself (flux conservation, closed form)."""
    L1, L2, i1 = 1e-3, 4e-3, 2.0
    M = k * np.sqrt(L1 * L2)
    coils = iw.WindingSet(("one", "two"), [[L1, M], [M, L2]])
    net = iw.Network(
        "g",
        [
            iw.Windings("T", coils, {"one": ("a", "g"), "two": ("b", "g")}),
            iw.Switch("cut", "a", "g", iw.GateTimes([1e-3], initially_closed=True)),
            iw.Diode("path", "g", "b"),
            iw.Switch("other", "b", "g", iw.GateTimes([1e-3])),
        ],
    )
    currents = [iw.WindingCurrent("T", "one"), iw.WindingCurrent("T", "two")]
    wave = time_response_switching(net, 2e-3, 1e-3, currents, {currents[0]: i1})
    assert wave[currents[1]][1] == pytest.approx(M * i1 / L2, rel=1e-8)
    assert wave[currents[0]][1] == pytest.approx(0.0, abs=1e-8)
    energy = 0.5 * L1 * i1**2
    assert wave.ledger.lost_in_jumps_j / energy == pytest.approx(share, rel=1e-6)
    assert wave.evidence.energy_error < 1e-12


def test_constant_flux_law():
    """E-16 (derived): a shorted lossless secondary keeps its flux at 0, i2 = −M i1/L2, energy ½(1−k²) L1 i1²."""
    coils = iw.WindingSet(("one", "two"), [[1e-3, 1.8e-3], [1.8e-3, 4e-3]])
    net = iw.Network(
        "g",
        [
            iw.Windings("T", coils, {"one": ("a", "g"), "two": ("b", "g")}),
            iw.CurrentSource("drive", "g", "a", iw.Step(2.0, 1e-6)),
            iw.Switch("short", "b", "g", iw.GateTimes([], initially_closed=True)),
        ],
    )
    two, energy = iw.WindingCurrent("T", "two"), iw.StoredEnergy("T")
    wave = time_response_switching(net, 2e-6, 1e-6, [two, energy])
    assert wave[two][1] == pytest.approx(-0.9, rel=1e-12)
    assert wave[energy][1] == pytest.approx(0.38e-3, rel=1e-12)


def test_two_capacitors():
    """E-17 (derived): 1 µF at 10 V onto 2 µF: 10/3 V, 100/3 µJ lost, the charge kept."""
    net = iw.Network(
        "g",
        [
            iw.Capacitor("one", "a", "g", 1e-6),
            iw.Capacitor("two", "b", "g", 2e-6),
            iw.Switch("S", "a", "b", iw.GateTimes([1e-3])),
        ],
    )
    wave = time_response_switching(net, 2e-3, 1e-3, None, {iw.ElementVoltage("one"): 10.0})
    for node in ("a", "b"):
        assert wave[iw.NodeVoltage(node)][1:] == pytest.approx([10 / 3, 10 / 3], rel=1e-12)
    assert wave.ledger.lost_in_jumps_j == pytest.approx(100e-6 / 3, rel=1e-12)
    assert [(e.element, e.state) for e in wave.events] == [("S", "closed")]
