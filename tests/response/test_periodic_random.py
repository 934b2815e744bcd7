"""Random converters: no element makes energy, and steady state is found directly or its absence is explained."""

from __future__ import annotations

import pytest
from random_converters import random_converter

import interwind as iw
from interwind_service.response.periodic import periodic_response
from interwind_service.response.switching import time_response_switching


def power_gap(response: iw.PeriodicResponse) -> float:
    """|Σ of the mean powers absorbed by all elements| over the input."""
    absorbed = response.mean_power_w.values()
    return abs(sum(absorbed)) / max(-power for power in absorbed)


def steady_or_explained(seed: int) -> bool:
    """Whether seed's converter has a periodic state; when not, its transient must run and the reason must be given."""
    _, network, period_s = random_converter(seed)
    try:
        response = periodic_response(network, period_s, period_s / 10, [])
    except iw.AccuracyNotReached as found:
        refused = found
    else:
        refused = None
    if refused is not None:
        assert refused.reason == "NOT_PERIODIC"
        assert "period" in refused.message
        run = time_response_switching(network, 50 * period_s, period_s, [])
        assert run.evidence.energy_error < 1e-6
        return False
    assert power_gap(response) < 1e-6
    assert response.evidence.energy_error < 1e-6
    resistive = sum(power for name, power in response.mean_power_w.items() if power > 0.0)
    assert resistive <= max(-power for power in response.mean_power_w.values()) * (1.0 + 1e-6)
    return True


@pytest.mark.parametrize("seed", range(30))
def test_mean_powers_sum_to_zero(seed):
    assert steady_or_explained(seed)


@pytest.mark.long
@pytest.mark.timeout(1800)
def test_three_hundred_converters():
    """At least 290 of 300 have a periodic state; in all of them the powers sum to zero within 1e-6 of the input."""
    assert sum(steady_or_explained(seed) for seed in range(1000, 1300)) >= 290
