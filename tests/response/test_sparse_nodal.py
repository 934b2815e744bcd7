"""Sparse factors of the nodal equations agree with the frequency tree, on a mesh of resistors and coupled pairs."""

from __future__ import annotations

import numpy as np

import interwind as iw
from interwind_service.network.topology import number
from interwind_service.response.frequency import drives_of, frequency_response
from interwind_service.response.observe import evaluate
from interwind_service.response.sparse_nodal import NodalPhasors, is_sparse, nodal_spectrum


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


def test_against_the_frequency_tree():
    """Every kind of observable, with sources of both kinds, an ideal switch and a controlled source."""
    network = mesh(8)
    topology = number(network)
    frequency_hz = np.geomspace(1e4, 1e9, 11)[::-1]
    asked = [
        iw.NodeVoltage("7 7"), iw.NodeVoltage("3 3", "4 4"), iw.WindingCurrent("T 0 0", "p"), iw.ElementCurrent("v"),
        iw.ElementCurrent("c 3 3"), iw.ElementCurrent("i"), iw.ElementCurrent("closed"), iw.ElementPower("T 2 2"),
        iw.ElementPower("r 1 1"), iw.FluxLinkage("T 2 2", "s"), iw.StoredEnergy("c 3 3"), iw.ElementCurrent("e"),
    ]  # fmt: skip
    drives, u = drives_of(topology)

    (band,) = nodal_spectrum(topology, frequency_hz, drives)
    phasors = NodalPhasors(band, u, {int(k): v for k, v in zip(topology.input_branch, u, strict=False)})

    samples = np.empty((11, len(asked)), dtype=complex)
    for column, item in enumerate(asked):
        samples[band.index, column] = evaluate(phasors, item)
    tree = frequency_response(network, frequency_hz, asked).samples
    assert np.abs(samples - tree).max() <= 1e-12 * np.abs(tree).max()
    assert (np.abs(samples - tree) / np.abs(tree)).max() <= 1e-9
    assert band.residual.max() < 1e-14


def test_only_large_networks_of_small_groups_are_sparse():
    """A dense set of many windings is not, nor is a small network."""
    assert not is_sparse(number(mesh(8)))
    assert is_sparse(number(mesh(40)))
