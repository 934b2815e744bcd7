"""Many frequencies: the reduction agrees with the frequency tree, the way it is taken does not show in the answer."""

from __future__ import annotations

import numpy as np
import pytest
from random_networks import random_network

from interwind.errors import InvalidNetwork
from interwind.model import elements as el
from interwind.model.network import Network, Port
from interwind.model.observables import (
    ElementCurrent,
    ElementPower,
    FluxLinkage,
    NodeVoltage,
    StoredEnergy,
    WindingCurrent,
)
from interwind.model.windings import WindingSet
from interwind_service.response.frequency import frequency_response
from interwind_service.response.ports import port_response


def asked(network):
    """Every kind of observable."""
    items = [NodeVoltage(node) for node in network.nodes]
    for element in network.elements:
        if isinstance(element, el.Windings):
            labels = element.windings.labels
            items += [x(element.name, label) for label in labels for x in (WindingCurrent, FluxLinkage)]
        else:
            items.append(ElementCurrent(element.name))
        items += [ElementPower(element.name), StoredEnergy(element.name)]
    return items


def worst(many, few, items):
    """Largest difference over the largest of its kind, frequency by frequency."""
    found = 0.0
    for kind in (NodeVoltage, (ElementCurrent, WindingCurrent), FluxLinkage, ElementPower, StoredEnergy):
        places = [k for k, item in enumerate(items) if isinstance(item, kind)]
        size = np.abs(few[:, places]).max(axis=1)
        gap = np.abs(many - few)[:, places].max(axis=1)
        found = max(found, float(np.divide(gap, size, out=gap, where=size > 0).max()))
    return found


@pytest.mark.parametrize("seed", range(40))
def test_random_networks(seed):
    """Sixty points over five decades in one call, against the same points in calls too small for a reduction."""
    network = random_network(seed, "narrow" if seed % 2 else "wide")
    f = np.geomspace(1e2, 1e7, 60)
    items = asked(network)
    try:
        many = frequency_response(network, f, items)
    except InvalidNetwork:
        with pytest.raises(InvalidNetwork):
            frequency_response(network, f[:2], items)
        return
    few = np.concatenate([frequency_response(network, part, items).samples for part in (f[:30], f[30:])])
    assert "UNDETERMINED_CURRENT" not in {finding.code for finding in many.findings}  # else nothing is swept
    assert worst(many.samples, few, items) < 1e-9
    assert many.evidence.residual < 1e-11


def test_direct_current_beside_a_sweep():
    """0 Hz is solved by itself, in its place."""
    coils = WindingSet(("p", "s"), [[1e-3, 5e-4], [5e-4, 1e-3]], 0.1)
    network = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", phasor=1.0),
            el.Resistor("R", "a", "b", 1.0),
            el.Windings("T", coils, {"p": ("b", "0"), "s": ("c", "0")}),
            el.Resistor("L", "c", "0", 50.0),
        ],
        [Port("p", "c", "0")],
    )
    f = np.concatenate((np.geomspace(1e2, 1e5, 30), [0.0], np.geomspace(1e5, 1e7, 30)))
    answer = frequency_response(network, f)

    assert answer[NodeVoltage("b")][30] == pytest.approx(0.1 / 1.1)
    assert "reduction" in answer.evidence.method
    s = 2j * np.pi * f
    Z = 0.1 * np.eye(2) + s[:, None, None] * coils.inductance_h + np.array([[1.0, 0], [0, 50.0]])
    i = np.linalg.solve(Z, np.broadcast_to([[1.0], [0.0]], (61, 2, 1)))[:, :, 0]
    np.testing.assert_allclose(answer[WindingCurrent("T", "s")], i[:, 1], rtol=1e-9, atol=1e-15)
    np.testing.assert_allclose(answer[WindingCurrent("T", "p")], i[:, 0], rtol=1e-12)


def test_lossless_resonance_within_a_sweep():
    """A frequency that falls on a resonance without loss is one NaN row of many."""
    network = Network(
        "0",
        [
            el.VoltageSource("V", "a", "0", phasor=1.0),
            el.Inductor("L", "a", "b", 1.0),
            el.Capacitor("C", "b", "0", 1.0),
        ],
    )
    f = np.sort(np.append(np.geomspace(1e-3, 1e1, 60), 1 / (2 * np.pi)))
    answer = frequency_response(network, f)
    bad = np.flatnonzero(np.isnan(answer[NodeVoltage("b")]))
    assert [int(np.flatnonzero(f == 1 / (2 * np.pi))[0])] == bad.tolist()
    assert "SINGULAR_AT_FREQUENCY" in {finding.code for finding in answer.findings}


@pytest.mark.parametrize("seed", range(10))
def test_ports(seed):
    """Z, Y and S of a sweep against those of single points."""
    network = random_network(seed, "narrow")
    f = np.geomspace(1e2, 1e7, 60)
    try:
        many = port_response(network, f)
    except InvalidNetwork:
        return
    few = [port_response(network, part) for part in (f[:30], f[30:])]
    for name in ("impedance_ohm", "admittance_s", "scattering"):
        one, other = getattr(many, name), np.concatenate([getattr(part, name) for part in few])
        np.testing.assert_array_equal(np.isnan(one), np.isnan(other))
        np.testing.assert_allclose(one, other, rtol=1e-8, atol=1e-12)
