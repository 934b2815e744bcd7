"""The feasible interval of every pair against bisection on the smallest eigenvalue."""

from __future__ import annotations

import numpy as np
import pytest

from interwind_service.windings.intervals import feasible_intervals
from interwind_service.windings.spectrum import spectrum


def smallest(K: np.ndarray, i: int, j: int, value: float) -> float:
    changed = K.copy()
    changed[i, j] = changed[j, i] = value
    return float(np.linalg.eigvalsh(changed)[0])


def by_bisection(K: np.ndarray, i: int, j: int, slack: float) -> tuple[float, float]:
    """The interval where λ_min, a concave function of one entry, is above −slack: golden section, then bisection."""
    ratio = (np.sqrt(5) - 1) / 2
    a, b = -1.0, 1.0
    for _ in range(120):
        c, d = b - ratio * (b - a), a + ratio * (b - a)
        if smallest(K, i, j, c) < smallest(K, i, j, d):
            a = c
        else:
            b = d
    best = max((a, b, -1.0, 1.0), key=lambda t: smallest(K, i, j, t))
    if smallest(K, i, j, best) < -slack:
        return np.nan, np.nan

    def end(limit: float) -> float:
        if smallest(K, i, j, limit) >= -slack:
            return limit
        inside, outside = best, limit
        for _ in range(70):
            middle = 0.5 * (inside + outside)
            inside, outside = (middle, outside) if smallest(K, i, j, middle) >= -slack else (inside, middle)
        return inside

    return end(-1.0), end(1.0)


def stack(seed: int, size: int) -> np.ndarray:
    """A tight stack of windings: L_ij = 150 + 3 min(z_i, z_j) + 0.3 δ_ij."""
    z = np.sort(np.random.default_rng(seed).uniform(0.2, 3, size))
    L = 150 + 3 * np.minimum.outer(z, z) + 0.3 * np.eye(size)
    d = np.sqrt(L.diagonal())
    return L / np.outer(d, d)


def with_pair(K: np.ndarray, i: int, j: int, value: float) -> np.ndarray:
    K = K.copy()
    K[i, j] = K[j, i] = value
    return K


def loose(seed: int, size: int) -> np.ndarray:
    A = np.random.default_rng(seed).normal(size=(size, size + 1))
    K = A @ A.T
    d = np.sqrt(K.diagonal())
    return K / np.outer(d, d)


def indefinite(seed: int, size: int) -> np.ndarray:
    upper = np.triu(np.random.default_rng(seed).uniform(-1, 1, (size, size)), 1)
    return upper + upper.T + np.eye(size)


REGULAR = (
    {f"stack {s} of {n}": stack(s, n) for s, n in [(1, 4), (2, 6), (3, 8)]}
    | {f"stack {s} misread": with_pair(stack(s, n), 0, n - 1, 0.93) for s, n in [(1, 4), (2, 6), (3, 8)]}
    | {f"loose {s} of {n}": loose(s, n) for s, n in [(4, 2), (5, 3), (6, 5), (7, 9)]}
    | {f"indefinite {s} of {n}": indefinite(s, n) for s, n in [(8, 3), (9, 3), (10, 4), (11, 4), (12, 5), (13, 6)]}
    | {"beyond one": with_pair(loose(14, 4), 1, 2, 1.3), "two alone beyond one": np.array([[1, -1.2], [-1.2, 1]])}
)


@pytest.mark.parametrize("name", REGULAR)
def test_interval_equals_bisection(name: str) -> None:
    """Definite, singly and multiply indefinite matrices: the ends agree with bisection, NaN where it finds nothing."""
    K = REGULAR[name]
    low, high = feasible_intervals(spectrum(K))
    for i in range(len(K)):
        for j in range(i + 1, len(K)):
            expected = by_bisection(K, i, j, slack=1e-14)
            np.testing.assert_allclose((low[i, j], high[i, j]), expected, atol=2e-7, err_msg=f"pair {i}, {j}")
            assert (low[j, i], high[j, i]) == (low[i, j], high[i, j]) or np.isnan(low[j, i])
    np.testing.assert_array_equal(low.diagonal(), 1.0)


def ones(n: int) -> np.ndarray:
    return np.ones((n, n))


SIGNS = np.array([1.0, -1.0, 1.0, -1.0])
THREE = np.array([[1, 0.9, 0.9], [0.9, 1, 0.5], [0.9, 0.5, 1]])
SINGULAR = {
    "all ones of 2": (ones(2), {(0, 1): (-1, 1)}),
    "all ones of 3": (ones(3), {(0, 1): (1, 1), (0, 2): (1, 1)}),
    "signed ones of 4": (np.outer(SIGNS, SIGNS), {(0, 1): (-1, -1), (0, 2): (1, 1)}),
    "two perfect pairs": (np.kron(np.eye(2), ones(2)), {(0, 1): (-1, 1), (0, 2): (0, 0), (2, 3): (-1, 1)}),
    "perfect pair and a third": (
        np.array([[1, 1, 0.3], [1, 1, 0.3], [0.3, 0.3, 1]]),
        # k12 within 0.09 ± 0.91 (law of three windings), k13 pinned to k23
        {(0, 1): (-0.82, 1), (0, 2): (0.3, 0.3), (1, 2): (0.3, 0.3)},
    ),
    "perfect pair contradicted": (
        np.array([[1, 1, 0.3], [1, 1, 0.4], [0.3, 0.4, 1]]),
        # k12 within 0.12 ± sqrt(0.91 0.84); the others must agree with each other
        {(0, 1): (0.12 - np.sqrt(0.91 * 0.84), 0.12 + np.sqrt(0.91 * 0.84)), (0, 2): (0.4, 0.4), (1, 2): (0.3, 0.3)},
    ),
    "missing taken as zero": (
        np.array([[1, 1, 0], [1, 1, 1], [0, 1, 1]]),
        {(0, 1): (0, 0), (1, 2): (0, 0), (0, 2): (1, 1)},
    ),
    "singular and indefinite": (
        np.block([[ones(2), np.zeros((2, 3))], [np.zeros((3, 2)), THREE]]),
        {(0, 1): (np.nan, np.nan), (0, 2): (np.nan, np.nan), (3, 4): (0.62, 1.0)},
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", SINGULAR)
def test_interval_of_a_singular_matrix(name: str) -> None:
    """Perfectly coupled windings have intervals known in closed form (derived from the law of three windings)."""
    K, expected = SINGULAR[name]
    low, high = feasible_intervals(spectrum(np.asarray(K, dtype=float)))
    for pair, ends in expected.items():
        np.testing.assert_allclose((low[pair], high[pair]), ends, atol=1e-12, err_msg=str(pair))


@pytest.mark.parametrize("smallest_eigenvalue", [1e-4, 1e-8, 1e-11, 1e-13])
def test_interval_keeps_its_digits_next_to_singularity(smallest_eigenvalue: float) -> None:
    """One eigenvalue goes to zero: the ends go to those of the singular matrix and lose no digits on the way."""
    K = np.array([[1, 1 - smallest_eigenvalue, 0.3], [1 - smallest_eigenvalue, 1, 0.3], [0.3, 0.3, 1]])
    low, high = feasible_intervals(spectrum(K))
    np.testing.assert_allclose((low[0, 1], high[0, 1]), (-0.82, 1.0), rtol=0, atol=1e-12)
    # law of three windings: k13 = k12 k23 ± sqrt((1 − k12²)(1 − k23²))
    k = K[0, 1]
    half = np.sqrt((1 - k) * (1 + k) * 0.91)
    np.testing.assert_allclose(high[0, 2] - low[0, 2], 2 * half, rtol=0.02 if smallest_eigenvalue < 1e-12 else 1e-4)
    np.testing.assert_allclose(0.5 * (low[0, 2] + high[0, 2]), 0.3 * k, rtol=0, atol=1e-12)
