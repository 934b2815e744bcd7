"""Sparse factors of the nodal equations agree with the frequency tree, on a mesh of resistors and coupled pairs."""

from __future__ import annotations

import numpy as np
from meshes import mesh

import interwind as iw
from interwind_service.network.topology import number
from interwind_service.response.frequency import drives_of, frequency_response
from interwind_service.response.sinusoidal.observe import evaluate
from interwind_service.response.sinusoidal.sparse_nodal import NodalPhasors, is_sparse, nodal_spectrum


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
