"""The nearest coupling matrix against its own optimality conditions, a second method, and the clock."""

from __future__ import annotations

import time

import numpy as np
import pytest
from scipy.io import loadmat

from interwind.errors import AccuracyNotReached
from interwind_service.windings.nearest import nearest_correlation


def random_target(n: int, seed: int) -> np.ndarray:
    rng = np.random.default_rng(seed)
    K = rng.uniform(-1, 1, (n, n))
    K = 0.5 * (K + K.T)
    np.fill_diagonal(K, 1.0)
    return K


def alternating_projections(K: np.ndarray, w: np.ndarray, floor: float, kept: np.ndarray) -> np.ndarray:
    """Higham's alternating projections with Dykstra's correction (2002), in the weighted norm: the second method."""
    scale = np.outer(w, w)
    fixed = kept | np.eye(len(K), dtype=bool)
    shift = floor * np.diag(w**2)
    goal = np.where(np.eye(len(K), dtype=bool), 1.0, K) * scale
    Y, correction = K * scale, np.zeros_like(K)
    for _ in range(20000):
        R = Y - correction
        values, V = np.linalg.eigh(R - shift)
        X = (V * np.maximum(values, 0.0)) @ V.T + shift
        correction = X - R
        new = np.where(fixed, goal, X)
        if np.linalg.norm(new - Y) < 1e-13:
            break
        Y = new
    return Y / scale


@pytest.mark.parametrize("floor", [0.0, 0.05])
@pytest.mark.parametrize("weighted", [False, True])
@pytest.mark.parametrize("trusting", [False, True])
def test_agrees_with_alternating_projections(floor, weighted, trusting):
    """Every option alone and together, n = 5, smallest eigenvalue −0.31, to 1e-8."""
    K = random_target(5, 9)
    w = np.array([0.5, 2.0, 1.0, 1.5, 0.8]) if weighted else np.ones(5)
    kept = np.zeros((5, 5), dtype=bool)
    if trusting:
        kept[0, 1] = kept[1, 0] = kept[3, 4] = kept[4, 3] = True
    found = nearest_correlation(K, trusted=kept, weights=w, floor=floor).matrix

    np.testing.assert_allclose(found, alternating_projections(K, w, floor, kept), rtol=0, atol=1e-8)
    np.testing.assert_array_equal(found[kept], K[kept])
    np.testing.assert_array_equal(found.diagonal(), np.ones(5))
    np.testing.assert_allclose(np.linalg.eigvalsh(found)[0], floor, rtol=0, atol=1e-12)


@pytest.mark.parametrize("n", [2, 10, 80])
def test_optimality_conditions(n):
    """X − K = Y − diag(y), Y ⪰ 0, X Y = 0: what makes X the nearest (Higham 2002, from memory)."""
    K = random_target(n, n)
    K[0, 1] = K[1, 0] = 1.2
    X = nearest_correlation(K).matrix
    Y = X - K - np.diag(((X - K) * X).sum(axis=1))

    np.testing.assert_allclose(X @ Y, 0.0, atol=1e-10 * n)
    assert np.linalg.eigvalsh(Y)[0] > -1e-10 * n
    assert np.linalg.eigvalsh(X)[0] > -1e-12 * n


def test_inputs_are_left_alone_and_a_valid_matrix_comes_back():
    """A matrix that can exist is its own nearest one."""
    A = np.random.default_rng(0).normal(size=(6, 12))
    K = np.corrcoef(A)
    kept = K.copy()

    np.testing.assert_allclose(nearest_correlation(K).matrix, K, rtol=0, atol=1e-13)
    np.testing.assert_array_equal(K, kept)


def test_trusted_entries_without_room_are_refused():
    """Trusted k12 = k23 = 0.9, k13 = −0.9 have no valid matrix around them: no number comes back."""
    K = np.array([[1, 0.9, -0.9], [0.9, 1, 0.9], [-0.9, 0.9, 1]])
    with pytest.raises(AccuracyNotReached, match="trust fewer pairs"):
        nearest_correlation(K, trusted=~np.eye(3, dtype=bool))


@pytest.mark.parametrize("blocks", [False, True])
def test_usgs_within_150_decompositions(data_folder, blocks):
    """The 94 × 94 matrix of usgs.mat takes less time than 150 symmetric eigendecompositions of its size."""
    K = np.asarray(loadmat(data_folder / "usgs.mat")["A"], dtype=float)
    sizes = (12, 5, 1, 14, 12, 1, 10, 4, 5, 9, 13, 8)
    block = np.repeat(np.arange(len(sizes)), sizes)
    kept = (block[:, None] == block[None, :]) & blocks

    def seconds(task) -> float:
        begin = time.perf_counter()
        task()
        return time.perf_counter() - begin

    one = min(seconds(lambda: np.linalg.eigh(K)) for _ in range(10))
    assert min(seconds(lambda: nearest_correlation(K, trusted=kept)) for _ in range(3)) < 150 * one
