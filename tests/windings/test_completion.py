"""Completion of largest determinant: zeros in the inverse, against a second method, chordal patterns and loose ones."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import minimize

from interwind.errors import InvalidRequest
from interwind_service.windings.completion import largest_determinant


def with_holes(n: int, holes: int, seed: int) -> tuple[np.ndarray, tuple[np.ndarray, np.ndarray]]:
    rng = np.random.default_rng(seed)
    A = rng.normal(size=(n, 2 * n))
    K = np.corrcoef(A)
    i, j = np.triu_indices(n, 1)
    chosen = rng.choice(len(i), holes, replace=False)
    K[i[chosen], j[chosen]] = K[j[chosen], i[chosen]] = np.nan
    return K, (i[chosen], j[chosen])


@pytest.mark.parametrize(("n", "holes"), [(3, 1), (5, 4), (8, 12), (20, 100)])
@pytest.mark.parametrize("seed", [0, 1])
def test_inverse_is_zero_where_nothing_was_known(n, holes, seed):
    """The condition of Grone, Johnson, Sá & Wolkowicz 1984 (from memory), known entries untouched to the last bit."""
    K, unknown = with_holes(n, holes, seed)
    completed = largest_determinant(K)

    np.testing.assert_allclose(np.linalg.inv(completed)[unknown], 0.0, atol=1e-11)
    known = ~np.isnan(K)
    np.testing.assert_array_equal(completed[known], K[known])
    assert np.linalg.eigvalsh(completed)[0] > 0


def test_four_cycle_against_a_general_optimiser():
    """A cycle is the smallest pattern that is not chordal; Nelder and Mead find the same two values."""
    K = np.array([[1, 0.7, np.nan, 0.3], [0.7, 1, 0.6, np.nan], [np.nan, 0.6, 1, 0.5], [0.3, np.nan, 0.5, 1]])

    def cost(x: np.ndarray) -> float:
        filled = K.copy()
        filled[0, 2] = filled[2, 0] = x[0]
        filled[1, 3] = filled[3, 1] = x[1]
        sign, value = np.linalg.slogdet(filled)
        return -value if sign > 0 and np.linalg.eigvalsh(filled)[0] > 0 else 1e9

    best = minimize(cost, [0.4, 0.3], method="Nelder-Mead", options={"xatol": 1e-12, "fatol": 1e-15}).x
    completed = largest_determinant(K)

    np.testing.assert_allclose([completed[0, 2], completed[1, 3]], best, rtol=0, atol=1e-7)


def test_impossible_and_border_cycles():
    """Angles of a 4-cycle: 0.9, 0.9, 0.9, −0.9 cannot be completed; four of 45° with one sign turned just can."""
    impossible = np.array(
        [[1, 0.9, np.nan, -0.9], [0.9, 1, 0.9, np.nan], [np.nan, 0.9, 1, 0.9], [-0.9, np.nan, 0.9, 1]]
    )
    assert largest_determinant(impossible) is None

    a = np.cos(np.pi / 4)
    border = np.array([[1, a, np.nan, -a], [a, 1, a, np.nan], [np.nan, a, 1, a], [-a, np.nan, a, 1]])
    np.testing.assert_allclose(np.linalg.eigvalsh(largest_determinant(border))[0], 0.0, atol=1e-9)


def test_impossible_clique_has_no_completion():
    """Three known pairs that contradict stay contradictory whatever the fourth winding does."""
    K = np.full((4, 4), np.nan)
    K[:3, :3] = [[1, 0.9, 0.9], [0.9, 1, 0.5], [0.9, 0.5, 1]]
    K[3, 3] = 1.0
    K[2, 3] = K[3, 2] = 0.1

    assert largest_determinant(K) is None


def test_too_many_unknown_pairs_are_refused():
    """A loose pattern beyond one Newton step says so instead of taking minutes."""
    K, _ = with_holes(80, 2500, 0)
    with pytest.raises(InvalidRequest, match="measure more pairs"):
        largest_determinant(K)
