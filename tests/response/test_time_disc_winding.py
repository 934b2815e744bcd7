"""The sixty-disc winding under the 1.2/50 impulse: two independent methods agree to four digits (own scenario)."""

from __future__ import annotations

import json
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
import scipy.linalg as sl

from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model import waveform as wf
from interwind.model.network import Network
from interwind.model.windings import WindingSet
from interwind_service.response.time import time_response

DATA = json.loads((Path(__file__).parents[2] / "deploy" / "demo" / "disc_winding.json").read_text())
GOLDEN = {name: float(text) for name, text in DATA["golden"].items() if isinstance(text, str) and text[-1].isdigit()}
COUNT = len(DATA["disc_inductance_h"])
NODES = ["line", *(f"n{k}" for k in range(1, COUNT)), "ground"]


@pytest.fixture(scope="module")
def surge():
    labels = [f"d{k + 1}" for k in range(COUNT)]
    coils = WindingSet(labels, sl.toeplitz(DATA["disc_inductance_h"]), DATA["disc_resistance_ohm"])
    impulse = DATA["impulse"]
    wave = wf.DoubleExponential(impulse["amplitude"], 1 / impulse["tail_per_s"], 1 / impulse["front_per_s"])
    elements: list[el.Element] = [
        el.VoltageSource("impulse", "line", "ground", wave),
        el.Windings("winding", coils, dict(zip(labels, pairwise(NODES), strict=True))),
    ]
    for k, (a, b) in enumerate(pairwise(NODES)):
        elements.append(el.Capacitor(f"Cs{k}", a, b, DATA["disc_capacitance_f"]))
        elements.append(el.Resistor(f"Rp{k}", a, b, DATA["disc_parallel_ohm"]))
    elements += [
        el.Capacitor(f"Cg{k}", node, "ground", DATA["ground_capacitance_f"]) for k, node in enumerate(NODES[1:-1])
    ]
    return time_response(Network("ground", elements), 200e-6, 20e-9)


def test_voltages_to_ground(surge):
    """0.9964 at node 37 at 7.98 µs; the table of four nodes at six instants, to one unit of the fourth digit."""
    volts = np.stack([surge[ob.NodeVoltage(node)] for node in NODES], axis=1)
    when, where = np.unravel_index(volts[:, 1:-1].argmax(), (len(volts), COUNT - 1))
    assert volts[when, where + 1] == pytest.approx(GOLDEN["highest_v"], abs=1e-4)
    assert (where + 1, surge.time_s[when] * 1e6) == (GOLDEN["highest_node"], pytest.approx(GOLDEN["highest_us"]))
    for instant_us, values in DATA["golden"]["node_v"].items():
        row = volts[round(float(instant_us) * 1e-6 / 20e-9)]
        assert [row[int(k)] for k in DATA["golden"]["nodes"]] == pytest.approx([float(v) for v in values], abs=1.01e-4)


def test_voltages_across_discs(surge):
    """0.0816 in disc 3 at 0.72 µs, 0.0577 in disc 30; 0.1318 of the first instant stands across disc 1."""
    volts = np.stack([surge[ob.NodeVoltage(node)] for node in NODES], axis=1)
    across = np.abs(np.diff(volts, axis=1))
    when, where = np.unravel_index(across.argmax(), across.shape)
    assert across.max() == pytest.approx(GOLDEN["worst_disc_v"], abs=1e-4)
    assert (where + 1, surge.time_s[when] * 1e6) == (GOLDEN["worst_disc"], pytest.approx(GOLDEN["worst_disc_us"]))
    assert across[:, 29].max() == pytest.approx(GOLDEN["disc_30_v"], abs=1e-4)
    current = surge[ob.WindingCurrent("winding", "d1")]
    assert np.abs(current).max() * 1e3 == pytest.approx(GOLDEN["disc_1_peak_ma"], abs=1e-2)


def test_energy_closes(surge):
    assert surge.evidence.energy_error < 1e-9
    assert surge.evidence.residual < 1e-9
