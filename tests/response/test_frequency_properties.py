"""Properties that hold for every valid network, on 500 random ones."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest
from random_networks import random_network

from interwind.errors import InvalidNetwork
from interwind.model import elements as el
from interwind.model.network import Network, Port
from interwind.model.observables import ElementCurrent, ElementPower, NodeVoltage, WindingCurrent
from interwind.model.windings import WindingSet
from interwind_service.response.frequency import frequency_response
from interwind_service.response.ports import port_response

FREQUENCIES = np.array([50.0, 1e5, 4e8])
BATCHES = range(10)  # of fifty networks; the costlier properties take two of them, all of them under --long
SOME = [*range(2), *(pytest.param(k, marks=pytest.mark.long) for k in range(2, 10))]
PER_BATCH = 50


def networks(batch):
    """Fifty regular networks, half of either spread."""
    for seed in range(3000 + PER_BATCH * batch, 3000 + PER_BATCH * (batch + 1)):
        network = random_network(seed, "narrow" if seed % 2 else "wide")
        try:
            response = frequency_response(network, FREQUENCIES, asked(network))
        except InvalidNetwork:
            continue  # which ones are singular, and only those, is shown against 60 digits
        yield seed, network, response


def asked(network):
    """Every node voltage, current and power."""
    items = [NodeVoltage(node) for node in network.nodes]
    for element in network.elements:
        if isinstance(element, el.Windings):
            items += [WindingCurrent(element.name, label) for label in element.windings.labels]
        else:
            items.append(ElementCurrent(element.name))
    return items + [ElementPower(element.name) for element in network.elements]


def columns(items, *classes):
    """The places of some observables."""
    return [k for k, item in enumerate(items) if isinstance(item, classes)]


def distance(one, other, items):
    """Largest difference over the largest entry, voltages and currents apart, where both exist."""
    worst = 0.0
    for kind in ((NodeVoltage,), (ElementCurrent, WindingCurrent)):
        places = columns(items, *kind)
        gap = np.nanmax(np.abs(one - other)[:, places], axis=1)
        size = np.nanmax(np.abs(one)[:, places], axis=1)
        worst = max(worst, float(np.divide(gap, size, out=gap, where=size > 0).max()))
    return worst


@pytest.mark.parametrize("batch", BATCHES)
def test_reciprocity_passivity_and_power(batch):
    """Y = Yᵀ, Re Y ≥ 0, and the power absorbed by all elements together is zero (Tellegen 1952)."""
    for _seed, network, response in networks(batch):
        if "UNDETERMINED_CURRENT" not in {finding.code for finding in response.findings}:
            assert response.evidence.reciprocity_error < 1e-9
            assert response.evidence.passivity_margin > -1e-9
        items = list(response)
        size = np.nanmax(np.abs(response.samples[:, columns(items, NodeVoltage)]), axis=1)
        size *= np.nanmax(np.abs(response.samples[:, columns(items, ElementCurrent, WindingCurrent)]), axis=1)
        power = response.samples[:, columns(items, ElementPower)]
        if np.isfinite(power).all():
            assert np.all(np.abs(power.sum(axis=1)) <= 1e-11 * size)
        lossy = [k for k, e in enumerate(network.elements) if isinstance(e, el.Resistor | el.Windings)]
        assert not np.any(power[:, lossy].real < -1e-13 * size[:, None])


@pytest.mark.parametrize("batch", SOME)
def test_relabelling(batch):
    """The order of elements, the names of nodes and the order of windings change nothing."""
    for seed, network, response in networks(batch):
        rng = np.random.default_rng(seed)
        names = {n: f"m{k}" for n, k in zip(network.nodes, rng.permutation(len(network.nodes)), strict=True)}
        elements = [_renamed(network.elements[k], names, rng) for k in rng.permutation(len(network.elements))]
        zeros = [names[network.reference]]
        other = Network(zeros[0], elements, [Port(p.name, names[p.a], names[p.b]) for p in network.ports])
        currents = [item for item in response if isinstance(item, ElementCurrent | WindingCurrent)]
        own = frequency_response(network, FREQUENCIES, [NodeVoltage(a, b) for a, b in _pairs(network)] + currents)
        observe = [NodeVoltage(names[a], names[b]) for a, b in _pairs(network)] + currents
        assert distance(own.samples, frequency_response(other, FREQUENCIES, observe).samples, observe) < 1e-9


@pytest.mark.parametrize("batch", SOME)
def test_turning_a_winding_round_is_exchanging_its_terminals(batch):
    """Negating a row and a column of L and exchanging the two terminals changes only the sign of that current."""
    for seed, network, response in networks(batch):
        rng = np.random.default_rng(seed)
        place = next(k for k, e in enumerate(network.elements) if isinstance(e, el.Windings))
        old = network.elements[place]
        label = str(rng.choice(old.windings.labels))
        sign = np.where(np.array(old.windings.labels) == label, -1.0, 1.0)
        coils = WindingSet(
            old.windings.labels, old.windings.inductance_h * np.outer(sign, sign), old.windings.resistance_ohm
        )
        if old.windings.stated_as_coupling:
            coils = WindingSet.from_coupling(
                old.windings.labels, old.windings.self_inductance_h, old.windings.coupling * np.outer(sign, sign),
                old.windings.resistance_ohm,
            )  # fmt: skip
        terminals = dict(old.terminals) | {label: old.terminals[label][::-1]}
        elements = list(network.elements)
        elements[place] = el.Windings(old.name, coils, terminals)
        turned = frequency_response(dataclasses.replace(network, elements=elements), FREQUENCIES, list(response))
        flip = np.array([-1.0 if item == WindingCurrent(old.name, label) else 1.0 for item in response])
        assert distance(*_against_first(network, response, turned.samples * flip), list(response)) < 1e-9


@pytest.mark.parametrize("batch", SOME)
def test_scaling_laws(batch):
    """L, R times a and C over a scale impedances by a; L, C times b scale time by b (powers of two: to rounding)."""
    for _seed, network, response in networks(batch):
        network = dataclasses.replace(
            network, elements=[e for e in network.elements if not isinstance(e, el.CurrentSource)]
        )
        items = [x for x in response if isinstance(x, NodeVoltage | WindingCurrent) or getattr(x, "name", "J") != "J"]
        own = frequency_response(network, FREQUENCIES, items).samples
        factor = np.where([isinstance(item, NodeVoltage) for item in items], 1.0, 8.0)
        impedance = frequency_response(_scaled(network, 8.0, 8.0, 1 / 8.0), FREQUENCIES, items).samples * factor
        time = frequency_response(_scaled(network, 1.0, 4.0, 4.0), FREQUENCIES / 4.0, items).samples
        assert distance(own, impedance, items) < 1e-10
        assert distance(own, time, items) < 1e-10


@pytest.mark.parametrize("batch", SOME)
def test_ports(batch):
    """Z, Y and S belong together: Z Y = 1, S = (Z − r)(Z + r)⁻¹, |S| ≤ 1."""
    for _seed, network, _response in networks(batch):
        try:
            port = port_response(network, FREQUENCIES)
        except InvalidNetwork:
            continue
        Z, Y, S = (m[:, 0, 0] for m in (port.impedance_ohm, port.admittance_s, port.scattering))
        both = np.isfinite(Z) & np.isfinite(Y) & (np.abs(Z) > 1e-6) & (np.abs(Y) > 1e-9)
        assert np.all(np.abs(Z * Y - 1)[both] < 1e-7)
        assert np.all(np.abs(S) <= 1 + 1e-9)
        finite = np.isfinite(Z)
        assert np.all(np.abs(S - (Z - 50) / (Z + 50))[finite] < 1e-9)


def _against_first(network, response, turned):
    """Both sets of samples with node voltages counted from the first node of each part, for zeros may have moved."""
    items = list(response)
    one, other = response.samples.copy(), turned.copy()
    for node, first in _pairs(network):
        for samples, source in ((one, response.samples), (other, turned)):
            place = items.index(NodeVoltage(node))
            samples[:, place] = source[:, place] - source[:, items.index(NodeVoltage(first))]
    return one, other


def _pairs(network):
    """Each node against the first of its galvanic part, so that the choice of zeros does not matter."""
    from interwind_service.network.topology import number

    topology = number(network)
    first = {}
    for node, part in zip(topology.nodes, topology.parts.of_node.tolist(), strict=True):
        first.setdefault(part, node)
    return [(n, first[p]) for n, p in zip(topology.nodes, topology.parts.of_node.tolist(), strict=True)]


def _renamed(element, names, rng):
    if isinstance(element, el.Windings):
        order = rng.permutation(element.windings.size)
        old = element.windings
        labels = [old.labels[k] for k in order]
        resistance = old.resistance_matrix_ohm[np.ix_(order, order)]
        if old.stated_as_coupling:
            coils = WindingSet.from_coupling(
                labels, old.self_inductance_h[order], old.coupling[np.ix_(order, order)], resistance
            )
        else:
            coils = WindingSet(labels, old.inductance_h[np.ix_(order, order)], resistance)
        return el.Windings(element.name, coils, {x: tuple(names[n] for n in element.terminals[x]) for x in labels})
    change = {field: names[getattr(element, field)] for field in ("a", "b", "c", "d") if hasattr(element, field)}
    return dataclasses.replace(element, **change)


def _scaled(network, resistance, inductance, capacitance):
    elements = []
    for e in network.elements:
        if isinstance(e, el.Resistor):
            e = dataclasses.replace(e, resistance_ohm=e.resistance_ohm * resistance)
        elif isinstance(e, el.Inductor):
            e = dataclasses.replace(e, inductance_h=e.inductance_h * inductance)
        elif isinstance(e, el.Capacitor):
            e = dataclasses.replace(e, capacitance_f=e.capacitance_f * capacitance)
        elif isinstance(e, el.Windings):
            old = e.windings
            if old.stated_as_coupling:
                coils = WindingSet.from_coupling(
                    old.labels, old.self_inductance_h * inductance, old.coupling, old.resistance_ohm * resistance
                )
            else:
                coils = WindingSet(old.labels, old.inductance_h * inductance, old.resistance_ohm * resistance)
            e = el.Windings(e.name, coils, e.terminals)
        elements.append(e)
    return dataclasses.replace(network, elements=elements)
