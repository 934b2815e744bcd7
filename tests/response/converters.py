"""Converters of our own scenario, and random ones, for the tests of switched networks."""

from __future__ import annotations

import numpy as np

import interwind as iw

CELL_LIFT_PERIOD_S = 1 / 65e3


def cell_lift_windings() -> iw.WindingSet:
    """Five windings on one core: L_ij = N_i N_j (155 + 3 min(z_i, z_j) + 0.25 δ_ij) nH, then M45 x 0.9985."""
    turns, z = np.array([84, 12, 8, 8, 6]), np.array([0.4, 0.9, 1.3, 1.7, 2.1])
    L = np.outer(turns, turns) * (155 + 3 * np.minimum.outer(z, z) + 0.25 * np.eye(5)) * 1e-9
    L[3, 4] *= 0.9985
    L[4, 3] = L[3, 4]
    return iw.WindingSet(("W1", "W2", "W3", "W4", "W5"), L, (0.6, 0.025, 0.03, 0.03, 0.04))


def cell_lift_supply(windings: iw.WindingSet | None = None) -> iw.Network:
    """The auxiliary supply of a cell lift: 600 V bus, 65 kHz flyback at duty 0.103 with a clamp returned to the bus."""
    T = CELL_LIFT_PERIOD_S
    elements = [
        iw.VoltageSource("bus", "bus", "0v", waveform=iw.Constant(600.0)),
        iw.Windings(
            "T1",
            windings or cell_lift_windings(),
            {"W1": ("bus", "drain"), **{f"W{k}": ("0v", f"anode{k}") for k in (2, 3, 4, 5)}},
        ),
        iw.Switch(
            "Q", "drain", "0v", iw.Gate(T, 0.103 * T), conducting_resistance_ohm=0.5, blocking_resistance_ohm=5e6
        ),
        iw.Capacitor("output capacitance", "drain", "0v", 70e-12),
        iw.Diode("clamp diode", "drain", "clamp", 0.9, 2.0, 5e6),
        iw.Capacitor("clamp", "clamp", "bus", 2.2e-9),
        iw.Resistor("clamp resistor", "clamp", "bus", 100e3),
    ]
    rails = zip(
        (0.55, 0.6, 0.6, 0.7), (0.02, 0.1, 0.1, 0.3), (47e-6, 4.7e-6, 2.2e-6, 2.2e-6), (24, 150, 750, 800), strict=True
    )
    for k, (forward, slope, farad, ohm) in enumerate(rails, start=2):
        elements += [
            iw.Diode(f"D{k}", f"anode{k}", f"rail{k}", forward, slope, 1e6),
            iw.Capacitor(f"C{k}", f"rail{k}", "0v", farad),
            iw.Resistor(f"load{k}", f"rail{k}", "0v", ohm),
        ]
    return iw.Network("0v", elements)
