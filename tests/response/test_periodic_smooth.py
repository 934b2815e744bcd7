"""The periodic state of networks with smooth laws, and their start at the DC point."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

import interwind as iw
from interwind_service.response.periodic import periodic_response

LAW = {"saturation_current_a": 1e-9, "thermal_voltage_v": 0.04}


def test_without_any_state_it_is_algebra_at_every_instant():
    """Diode and resistor: v + R I_s (e^(v/V_T) - 1) = e(t), one root; means by quadrature (scipy)."""
    network = iw.Network(
        "g",
        [
            iw.VoltageSource("E", "a", "g", iw.Sine(1.0, 50.0)),
            iw.Diode("D", "a", "b", **LAW),
            iw.Resistor("R", "b", "g", 1.0),
        ],
    )
    answer = periodic_response(network, 0.02, 1e-3, [iw.ElementCurrent("D")])

    def current(t: float) -> float:
        e = np.sin(100.0 * np.pi * t)
        return e - brentq(lambda v: v + 1e-9 * np.expm1(v / 0.04) - e, -1.001, 1.0, xtol=1e-15)

    mean = quad(current, 0.0, 0.01, limit=200, epsabs=1e-12)[0] + quad(current, 0.01, 0.02, epsabs=1e-14)[0]
    square = quad(lambda t: current(t) ** 2, 0.0, 0.01, limit=200, epsabs=1e-12)[0]
    assert answer.means[0] == pytest.approx(mean / 0.02, rel=1e-6)
    assert answer.rmses[0] == pytest.approx(np.sqrt(square / 0.02), rel=1e-6)
    assert answer.peaks[0] == pytest.approx(current(0.005), rel=1e-7)
    assert np.allclose(answer.samples[:, 0], [current(t) for t in answer.time_s], atol=1e-9)
    assert answer.multipliers.size == 0
