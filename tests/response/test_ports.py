"""Port responses against closed forms."""
# ruff: noqa: E501  (a case a line reads best)

from __future__ import annotations

import numpy as np
import pytest

from interwind.errors import InvalidNetwork, InvalidRequest
from interwind.model import elements as el
from interwind.model.network import Network, Port
from interwind.model.windings import WindingSet
from interwind_service.response.ports import port_response

F = np.array([1.0, 1e3, 1e6])
S = 2j * np.pi * F


def test_two_coupled_windings():
    """Z = R + sL entry by entry; Y its inverse; S = (z − 1)(z + 1)⁻¹ with z scaled by each port's own resistance."""
    L = np.array([[1e-3, 3e-4], [3e-4, 2e-4]])
    coils = WindingSet(("p", "s"), L, [0.1, 0.2])
    network = Network("0", [el.Windings("T", coils, {"p": ("a", "0"), "s": ("b", "0")})],
                      [Port("one", "a", "0", 50.0), Port("two", "b", "0", 75.0)])  # fmt: skip
    answer = port_response(network, F)
    Z = np.diag([0.1, 0.2]) + S[:, None, None] * L
    scale = 1 / np.sqrt(np.outer([50.0, 75.0], [50.0, 75.0]))

    assert ("one", "two") == answer.ports
    np.testing.assert_allclose(answer.impedance_ohm, Z, rtol=1e-12)
    np.testing.assert_allclose(answer.admittance_s, np.linalg.inv(Z), rtol=1e-10)
    z = Z * scale
    np.testing.assert_allclose(
        answer.scattering, (z - np.eye(2)) @ np.linalg.inv(z + np.eye(2)), rtol=1e-10, atol=1e-15
    )
    assert answer.evidence.passivity_margin > 0.0


def test_series_element_has_no_impedance_matrix():
    """A resistor between two ports: no Z, Y = ±1/R, S = [[R, 2r], [2r, R]]/(R + 2r) with the reference floating between."""
    elements = [el.Resistor("R", "a", "b", 100.0), el.Capacitor("none", "a", "0", 0.0)]
    network = Network("0", elements, [Port("1", "a", "0"), Port("2", "b", "0")])
    answer = port_response(network, F)

    assert np.isnan(answer.impedance_ohm).all()
    np.testing.assert_allclose(answer.admittance_s[0], np.array([[1, -1], [-1, 1]]) / 100.0, rtol=1e-13)
    np.testing.assert_allclose(answer.scattering[0], np.array([[100, 100], [100, 100]]) / 200.0, rtol=1e-13)


def test_shunt_element_has_no_admittance_matrix():
    """Two ports on one node: Z = R everywhere, no Y, S = [[−r, 2R], [2R, −r]]/(2R + r)."""
    network = Network("0", [el.Resistor("R", "a", "0", 100.0)], [Port("1", "a", "0"), Port("2", "a", "0")])
    answer = port_response(network, F)

    np.testing.assert_allclose(answer.impedance_ohm, np.full((3, 2, 2), 100.0), rtol=1e-13)
    assert np.isnan(answer.admittance_s).all()
    np.testing.assert_allclose(answer.scattering[0], np.array([[-50, 200], [200, -50]]) / 250.0, rtol=1e-13)


def test_short_and_open():
    """S = −1 for a short circuit (no Y), +1 for an open end (no Z)."""
    network = Network("0", [el.Resistor("short", "a", "0", 0.0)], [Port("p", "a", "0")])
    answer = port_response(network, F)
    np.testing.assert_allclose(answer.scattering[:, 0, 0], -1.0)
    np.testing.assert_allclose(answer.impedance_ohm[:, 0, 0], 0.0)
    assert np.isnan(answer.admittance_s).all()

    network = Network(
        "0", [el.Resistor("R", "a", "0", 1.0), el.Capacitor("none", "b", "0", 0.0)], [Port("p", "b", "0")]
    )
    answer = port_response(network, F)
    np.testing.assert_allclose(answer.scattering[:, 0, 0], 1.0)
    np.testing.assert_allclose(answer.admittance_s[:, 0, 0], 0.0)
    assert np.isnan(answer.impedance_ohm).all()


def test_ideal_transformer():
    """1:n between two ports: neither Z nor Y, S11 = (n² − 1)/(n² + 1) seen from the high side."""
    network = Network(
        "0", [el.IdealTransformer("X", "a", "0", "b", "0", 3.0)], [Port("1", "a", "0"), Port("2", "b", "0")]
    )
    answer = port_response(network, [1.0])
    assert np.isnan(answer.impedance_ohm).all()
    assert np.isnan(answer.admittance_s).all()
    np.testing.assert_allclose(answer.scattering[0], np.array([[0.8, 0.6], [0.6, -0.8]]), rtol=1e-13)


def test_sources_are_set_to_zero():
    """A voltage source is a short, a current source open, whatever their phasors."""
    network = Network("0", [el.VoltageSource("V", "a", "0", phasor=5.0), el.Resistor("R", "a", "b", 10.0),
                            el.CurrentSource("J", "0", "b", phasor=3.0)], [Port("p", "b", "0")])  # fmt: skip
    np.testing.assert_allclose(port_response(network, F).impedance_ohm[:, 0, 0], 10.0, rtol=1e-13)


def test_port_across_an_isolation_barrier():
    """Z between two parts does not exist; terminated, no current flows and S = 1."""
    coils = WindingSet(("p", "s"), [[1.0, 0.5], [0.5, 1.0]])
    network = Network("0", [el.Windings("T", coils, {"p": ("a", "0"), "s": ("c", "d")}), el.Resistor("R", "a", "0", 1.0)],
                      [Port("p", "c", "0")])  # fmt: skip
    answer = port_response(network, F)
    assert np.isnan(answer.impedance_ohm).all()
    np.testing.assert_allclose(answer.scattering[:, 0, 0], 1.0)


def test_a_lossless_network_is_unitary():
    """SᴴS = 1 for windings and capacitors without loss."""
    coils = WindingSet.from_coupling(("p", "s"), [1e-3, 2e-3], [[1, 0.4], [0.4, 1]])
    network = Network("0", [el.Windings("T", coils, {"p": ("a", "0"), "s": ("b", "0")}), el.Capacitor("C", "a", "b", 1e-9)],
                      [Port("1", "a", "0"), Port("2", "b", "0", 600.0)])  # fmt: skip
    scattering = port_response(network, np.geomspace(1e3, 1e7, 50)).scattering
    np.testing.assert_allclose(scattering.conj().transpose(0, 2, 1) @ scattering, np.broadcast_to(np.eye(2), (50, 2, 2)),
                               atol=1e-12)  # fmt: skip


def test_direct_current_of_ports():
    """At 0 Hz a winding is its resistance."""
    network = Network(
        "0", [el.Windings("T", WindingSet(("w",), [[1.0]], 2.0), {"w": ("a", "0")})], [Port("p", "a", "0")]
    )
    np.testing.assert_allclose(port_response(network, [0.0]).impedance_ohm, 2.0)


def test_refusals():
    """A network without ports, and a port on no node."""
    with pytest.raises(InvalidNetwork, match="at least one") as refused:
        port_response(Network("0", [el.Resistor("R", "a", "0", 1.0)]), F)
    assert "ports" == refused.value.violations[0].field
    with pytest.raises(InvalidRequest) as refused:
        port_response(Network("0", [el.Resistor("R", "a", "0", 1.0)], [Port("p", "a", "zz")]), F)
    assert "ports[0].b" == refused.value.violations[0].field
