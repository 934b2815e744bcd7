"""A square mesh of resistors and coupled pairs: many nodes, little coupling."""

from __future__ import annotations

import numpy as np

import interwind as iw


def mesh(side: int) -> iw.Network:
    """A square mesh: resistors along one direction, coupled pairs along the other, capacitors to ground."""
    rng = np.random.default_rng(side)
    pair = iw.WindingSet(("p", "s"), [[10e-9, 4e-9], [4e-9, 10e-9]], 0.1)
    elements = [iw.VoltageSource("v", "0 0", "g", phasor=1.0), iw.CurrentSource("i", "1 1", "g", phasor=1e-3j)]
    for i in range(side):
        for j in range(side):
            here = f"{i} {j}"
            elements.append(iw.Capacitor(f"c {here}", here, "g", rng.uniform(1e-12, 1e-11)))
            if j + 1 < side:
                elements.append(iw.Resistor(f"r {here}", here, f"{i} {j + 1}", rng.uniform(1, 10)))
            if i + 1 < side and j + 1 < side and (i + j) % 2 == 0:
                ends = {"p": (here, f"{i + 1} {j}"), "s": (f"{i} {j + 1}", f"{i + 1} {j + 1}")}
                elements.append(iw.Windings(f"T {here}", pair, ends))
    elements.append(iw.Switch("closed", f"{side - 1} 0", "g", iw.GateTimes([1.0], initially_closed=True)))
    elements.append(iw.VoltageByVoltage("e", "out", "g", ("1 1", "g"), 2.0))
    elements.append(iw.Resistor("load", "out", "g", 50.0))
    return iw.Network("g", elements, [iw.Port("p", "2 2", "g")])
