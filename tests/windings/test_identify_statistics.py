"""Identification of random tight sets from noisy readings: chi-square and error bars keep what they promise."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from interwind.model.readings import OpenInductance, SeriesInductance, ShortedInductance, VoltageRatio
from interwind_service.windings.identify import identify
from interwind_service.windings.readings import predicted


def random_set(n: int, rng: np.random.Generator) -> np.ndarray:
    """L_ij = N_i N_j (150 + 3 min(z_i, z_j) + 0.3 δ_ij) nH, N uniform 5 to 59, z uniform 0.2 to 3, sorted."""
    N, z = rng.uniform(5, 59, n), np.sort(rng.uniform(0.2, 3, n))
    return np.outer(N, N) * (150 + 3 * np.minimum.outer(z, z) + 0.3 * np.eye(n)) * 1e-9


def noisy_readings(L: np.ndarray, labels: tuple[str, ...], rng: np.random.Generator) -> list:
    """Open, pair short, all short, aiding and opposing readings to 1 %, ratios to 0.2 %."""
    first, *others = labels
    readings = [OpenInductance(a, 1, 1) for a in labels]
    readings += [ShortedInductance(a, (b,), 1, 1) for k, a in enumerate(labels) for b in labels[k + 1 :]]
    readings += [ShortedInductance(first, tuple(others), 1, 1)]
    readings += [SeriesInductance(labels[:2], aiding, 1, 1) for aiding in (True, False)]
    readings += [VoltageRatio(first, other, 1, 1) for other in others]
    noisy = []
    for reading in readings:
        value, _ = predicted(reading, L, labels)
        size = abs(value) * (0.002 if isinstance(reading, VoltageRatio) else 0.01)
        value += size * rng.normal()
        if isinstance(reading, VoltageRatio):
            noisy.append(replace(reading, ratio=value, uncertainty=size))
        else:
            noisy.append(replace(reading, inductance_h=value, uncertainty_h=size))
    return noisy


def campaign(n: int, draws: int) -> tuple[float, float, int]:
    """Mean chi-square per freedom, share of leakages within two deviations, and draws with an outlier named."""
    rng = np.random.default_rng(100 + n)
    labels = tuple(f"w{k}" for k in range(n))
    off = ~np.eye(n, dtype=bool)
    ratio, within, alarms = [], [], 0
    for _ in range(draws):
        L = random_set(n, rng)
        found = identify(labels, noisy_readings(L, labels, rng))
        own = L.diagonal()
        true = own[:, None] - L * L / own[None, :]
        ratio.append(found.chi_square / found.degrees_of_freedom)
        within.append(np.mean(np.abs(found.leakage_h - true)[off] < 2.0 * found.leakage_uncertainty_h[off]))
        alarms += len(found.outliers) > 0
    return float(np.mean(ratio)), float(np.mean(within)), alarms


@pytest.mark.parametrize("n", [3, 4, 5])
def test_forty_draws(n):
    """Forty sets: chi-square per freedom is 1 within four deviations of its mean; bars hold at two sigma."""
    mean, within, alarms = campaign(n, 40)
    freedom = 2 * n + 2 - n  # readings beyond n (n + 1) / 2: one all-shorted, two series, n − 1 ratios
    assert abs(mean - 1.0) < 4.0 * np.sqrt(2.0 / (freedom * 40))
    assert 0.90 <= within <= 0.98
    assert alarms <= 3


@pytest.mark.long
@pytest.mark.parametrize("n", [3, 4, 5, 6, 7, 8])
def test_two_hundred_draws(n):
    """Two hundred sets of each size: chi-square per freedom 0.9 to 1.1 on average, bars hold in 90 to 98 %."""
    mean, within, alarms = campaign(n, 200)
    assert 0.9 <= mean <= 1.1
    assert 0.90 <= within <= 0.98
    assert alarms <= 8
