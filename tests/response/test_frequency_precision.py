"""Frequency responses against arithmetic of 60 digits, on random networks over twelve decades of element values."""
# ruff: noqa: E501  (a case a line reads best)

from __future__ import annotations

import numpy as np
import pytest
from high_precision import Reference
from random_networks import random_network

from interwind.errors import InvalidNetwork
from interwind.model import elements as el
from interwind.model.observables import ElementCurrent, NodeVoltage, WindingCurrent
from interwind_service.network.topology import number
from interwind_service.response.frequency import frequency_response

AGREEMENT = 1e-10  # norm-wise, at each frequency


def discrepancy(network, frequency_hz):
    """Largest error of voltages over the largest voltage, and of currents likewise; None when singular."""
    topology = number(network)
    zeros = tuple(topology.nodes[k] for k in topology.parts.reference)
    reference = Reference(network, frequency_hz, zeros)
    plain = [e.name for e in network.elements if not isinstance(e, el.Windings)]
    coils = [(e.name, label) for e in network.elements if isinstance(e, el.Windings) for label in e.windings.labels]
    observe = [NodeVoltage(n) for n in network.nodes]
    observe += [ElementCurrent(n) for n in plain] + [WindingCurrent(*w) for w in coils]
    if reference.singular:
        return reference, None, observe
    answer = frequency_response(network, [frequency_hz], observe).samples[0]
    v = np.array([reference.voltage(n) for n in network.nodes])
    i = np.array([reference.current(n) for n in plain] + [reference.current(w) for w in coils])
    error_v = np.abs(answer[: len(v)] - v).max() / np.abs(v).max()
    error_i = np.abs(answer[len(v) :] - i).max() / np.abs(i).max()
    return reference, max(error_v, error_i), observe


def check(seed, spread, *, active=False):
    """A regular network agrees; a singular one is refused by name, or what nothing determines is NaN and said."""
    network = random_network(seed, spread, active=active)
    frequency_hz = float(10 ** np.random.default_rng(seed).uniform(-1, 9))
    reference, error, observe = discrepancy(network, frequency_hz)
    if not reference.singular:
        assert error < AGREEMENT
        return
    try:
        answer = frequency_response(network, [frequency_hz], observe)
    except InvalidNetwork as refused:
        named = [element.name for element in network.elements if repr(element.name) in refused.message]
    else:
        named = []
    if not named:
        assert np.isnan(answer.samples).any()
        assert {"UNDETERMINED_CURRENT"} <= {finding.code for finding in answer.findings}


# Seeds 46 (narrow), 175, 263 and 281 (wide) are singular: a loop of ideal voltages, a source across an ideal transformer
# that is its own load, two short circuits in parallel.
@pytest.mark.parametrize("seed", range(60))
def test_narrow_ranges(seed):
    """Values over four decades."""
    check(seed, "narrow")


@pytest.mark.parametrize("seed", [*range(60), 175, 263, 281])
def test_wide_ranges(seed):
    """PF to mF, nH to H, mΩ to MΩ, 0.1 Hz to 1 GHz."""
    check(seed, "wide")


@pytest.mark.parametrize("seed", range(30))
def test_controlled_sources(seed):
    """The same with controlled sources of each kind."""
    check(seed, "wide", active=True)


@pytest.mark.long
@pytest.mark.parametrize("first", range(0, 2000, 100))
def test_many(first):
    """Two thousand networks of each range."""
    for seed in range(first, first + 100):
        check(seed, "narrow")
        check(seed, "wide")


@pytest.mark.parametrize("seed", range(5000, 5015))
def test_stiff(seed):
    """1 mHz to 10 GHz in one call, a reduction and all: 1e-9 at its ends and in its middle."""
    network = random_network(seed, "wide")
    topology = number(network)
    f = np.geomspace(1e-3, 1e10, 60)
    zeros = tuple(topology.nodes[k] for k in topology.parts.reference)
    observe = [NodeVoltage(n) for n in network.nodes]
    try:
        answer = frequency_response(network, f, observe)
    except InvalidNetwork:
        assert Reference(network, float(f[7]), zeros).singular
        return
    for place in (0, 29, 59):
        reference = Reference(network, float(f[place]), zeros)
        v = np.array([reference.voltage(n) for n in network.nodes])
        assert np.abs(answer.samples[place] - v).max() <= 1e-9 * np.abs(v).max()


@pytest.mark.parametrize("leak", [1e-4, 1e-7, 1e-10, 1e-13])
@pytest.mark.parametrize("frequency_hz", [1.0, 1e3, 1e6])
def test_tight_coupling_keeps_its_leakage(leak, frequency_hz):
    """A shorted pair shows its leakage to 1e-10, be it a part in 1e13 of the winding."""
    from interwind.model.network import Network
    from interwind.model.windings import WindingSet

    L = np.array([[1.0e-3, 0.0], [0.0, 7.0e-5]])
    L[0, 1] = L[1, 0] = np.sqrt(1 - leak) * np.sqrt(L[0, 0] * L[1, 1])
    coils = WindingSet(("p", "s"), L)
    network = Network(
        "0",
        [
            el.Windings("T", coils, {"p": ("a", "0"), "s": ("b", "0")}),
            el.Resistor("short", "b", "0", 1e-9),
            el.VoltageSource("V", "a", "0", phasor=1.0),
        ],
    )
    _, error, _ = discrepancy(network, frequency_hz)
    assert error < AGREEMENT
