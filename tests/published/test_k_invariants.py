"""Area K, laws that every linear case obeys, on the published circuits, through the public client (derived)."""

from __future__ import annotations

import math

import numpy as np
import pytest

import interwind as iw

HZ = np.array([10.0, 800 / (2 * math.pi), 5e3])


def linear_transformer(impedance: float = 1.0, time: float = 1.0, turns: float = 1.0) -> iw.Network:
    """B-10: L, R times ``impedance``, C over it; L, C times ``time``; ``turns`` for those of the second winding."""
    a, b = impedance, impedance * time
    L = np.array([[0.5, 0.1], [0.1, 0.125]]) * np.outer([1, turns], [1, turns])
    coils = iw.WindingSet(("1", "2"), b * L, a * np.array([100.0, 40.0 * turns**2]))
    return iw.Network(
        "0",
        [
            iw.Windings("T", coils, {"1": ("a", "0"), "2": ("b", "0")}),
            iw.Resistor("RL", "b", "c", a * 360.0 * turns**2),
            iw.Inductor("LL", "c", "0", b * 0.25 * turns**2),
            iw.Capacitor("C", "a", "0", time * 1e-6 / impedance),
        ],
        [iw.Port("1", "a", "0"), iw.Port("2", "b", "0")],
    )


def test_k01_reciprocity_and_passivity(solver):
    """Y = Yᵀ and Re eig (Y + Yᴴ) ≥ 0, to 1e-9."""
    answer = solver.port_response(linear_transformer(), HZ)
    Y = answer.admittance_s
    assert np.abs(Y - Y.transpose(0, 2, 1)).max() <= 1e-9 * np.abs(Y).max()
    assert np.linalg.eigvalsh(Y + Y.conj().transpose(0, 2, 1)).min() >= 0.0
    assert answer.evidence.reciprocity_error <= 1e-9
    assert answer.evidence.passivity_margin >= -1e-9


@pytest.mark.parametrize("a", [0.5, 3.7, 1e3])
def test_k02_impedance_scaling(solver, a):
    """L, R times a and C over a: all impedances times a."""
    Z = solver.port_response(linear_transformer(), HZ).impedance_ohm
    np.testing.assert_allclose(
        solver.port_response(linear_transformer(impedance=a), HZ).impedance_ohm, a * Z, rtol=1e-10
    )


@pytest.mark.parametrize("b", [0.5, 3.7, 1e3])
def test_k02_time_scaling(solver, b):
    """L, C times b: frequencies over b."""
    Z = solver.port_response(linear_transformer(), HZ).impedance_ohm
    np.testing.assert_allclose(solver.port_response(linear_transformer(time=b), HZ / b).impedance_ohm, Z, rtol=1e-10)


def test_k02_turns_scaling(solver):
    """The second winding and its load rewound to 7 times the turns: Z12 times 7, Z22 times 49."""
    Z = solver.port_response(linear_transformer(), HZ).impedance_ohm
    other = solver.port_response(linear_transformer(turns=7.0), HZ).impedance_ohm
    np.testing.assert_allclose(other, Z * np.outer([1, 7], [1, 7]), rtol=1e-10)
