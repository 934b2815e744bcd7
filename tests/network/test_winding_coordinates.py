"""Coordinates of tightly coupled groups keep the digits of every leakage."""

from __future__ import annotations

import mpmath as mp
import numpy as np
import pytest

from interwind.model import elements as el
from interwind.model.windings import WindingSet
from interwind_service.network.groups import group_of
from interwind_service.network.winding_coordinates import winding_coordinates


def group(coils: WindingSet):
    """The group of one element."""
    pairs = {label: (label, "0") for label in coils.labels}
    return group_of(el.Windings("T", coils, pairs), np.arange(coils.size), 0)


@pytest.mark.parametrize("leak", [0.5, 1e-3, 1e-6, 1e-9, 1e-12])
def test_leakage_to_full_precision(leak):
    """L11 (1 − k²) of the matrix as stated, in 50 digits, is met to 1e-13 however small it is."""
    L = np.array([[1.0e-3, 0.0], [0.0, 7.0e-5]])
    L[0, 1] = L[1, 0] = (1 - leak) * np.sqrt(L[0, 0] * L[1, 1])
    own = winding_coordinates(group(WindingSet(("p", "s"), L)))
    with mp.workdps(50):
        exact = mp.mpf(L[0, 0]) * mp.mpf(L[1, 1]) - mp.mpf(L[0, 1]) ** 2
    with mp.workdps(50):  # det S = det L (det N)²
        N = [[mp.mpf(x) for x in row] for row in own.N]
        S = [[mp.mpf(x) for x in row] for row in own.S]
        det_n = N[0][0] * N[1][1] - N[0][1] * N[1][0]
        found = (S[0][0] * S[1][1] - S[0][1] * S[1][0]) / det_n**2
        assert abs(found / exact - 1) < 1e-13


@pytest.mark.parametrize("turns", [(1, 2, -0.5), (3, 5, 7, 11, -13, 0.25), (1, 1)])
def test_perfect_coupling_is_an_exact_zero(turns):
    """L = Lm n nᵀ has rank 1: one pivot stands, the others are 0.0, not rounding."""
    coils = WindingSet([f"w{k}" for k in range(len(turns))], 1e-3 * np.outer(turns, turns))
    own = winding_coordinates(group(coils))

    assert 1 == own.rank
    assert 1 == np.count_nonzero(own.S)


@pytest.mark.parametrize("seed", range(30))
def test_congruence(seed):
    """Nᵀ L N = S to rounding, for loose, tight and perfect groups."""
    rng = np.random.default_rng(seed)
    n = int(rng.integers(1, 9))
    factor = rng.normal(size=(n, int(rng.integers(1, n + 1)))) * 10.0 ** rng.uniform(-3, 0, n)[:, None]
    L = factor @ factor.T + 10.0 ** rng.uniform(-14, 0) * np.diag((factor**2).sum(1))
    own = winding_coordinates(group(WindingSet([f"w{k}" for k in range(n)], 0.5 * (L + L.T))))

    scale = np.abs(own.N.T) @ np.abs(L) @ np.abs(own.N)
    assert np.all(np.abs(own.N.T @ L @ own.N - own.S) <= 1e-14 * n * scale)
