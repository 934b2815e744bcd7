"""Two resonant loops coupled by their windings, and what they do in closed form."""

from __future__ import annotations

import numpy as np

import interwind as iw

FREQUENCY_HZ = np.geomspace(50e3, 250e3, 100)
TX = {"inductance_h": 24e-6, "resistance_ohm": 0.12, "capacitance_f": 150e-9, "source_ohm": 0.5}
RX = {"inductance_h": 16e-6, "resistance_ohm": 0.09, "capacitance_f": 220e-9}
COUPLING, LOAD_OHM, SOURCE_V = 0.25, 12.0, 10.0
OBSERVE = (iw.NodeVoltage("out"), iw.WindingCurrent("T1", "tx"))


def network(coupling: float = COUPLING, load_ohm: float = LOAD_OHM) -> iw.Network:
    """A source with its resistance, a series capacitor, the windings, a series capacitor, a load."""
    coils = iw.WindingSet.from_coupling(
        ("tx", "rx"),
        [TX["inductance_h"], RX["inductance_h"]],
        [[1.0, coupling], [coupling, 1.0]],
        [TX["resistance_ohm"], RX["resistance_ohm"]],
    )
    return iw.Network(
        "zero",
        [
            iw.VoltageSource("source", "in", "zero", phasor=SOURCE_V),
            iw.Resistor("inner", "in", "a", TX["source_ohm"]),
            iw.Capacitor("c1", "a", "p", TX["capacitance_f"]),
            iw.Windings("T1", coils, {"tx": ("p", "zero"), "rx": ("q", "zero")}),
            iw.Capacitor("c2", "q", "out", RX["capacitance_f"]),
            iw.Resistor("load", "out", "zero", LOAD_OHM if load_ohm is None else load_ohm),
        ],
    )


def closed_form(coupling, load_ohm, frequency_hz=FREQUENCY_HZ):
    """Load voltage and first current of coupled loops (Steinmetz 1897, chapter on the alternating-current transformer).

    Z1 i1 + jωM i2 = V, jωM i1 + Z2 i2 = 0, both currents into the starts; the load voltage is −R i2. Derived; from
    memory as to the source. Shapes (V, F).
    """
    omega = 2j * np.pi * np.asarray(frequency_hz)[None, :]
    k, load = (np.asarray(x, dtype=float).reshape(-1, 1) for x in (coupling, load_ohm))
    mutual = omega * k * np.sqrt(TX["inductance_h"] * RX["inductance_h"])
    z1 = TX["source_ohm"] + TX["resistance_ohm"] + omega * TX["inductance_h"] + 1 / (omega * TX["capacitance_f"])
    z2 = load + RX["resistance_ohm"] + omega * RX["inductance_h"] + 1 / (omega * RX["capacitance_f"])
    first = SOURCE_V * z2 / (z1 * z2 - mutual**2)
    second = -mutual * first / z2
    return -load * second, first
