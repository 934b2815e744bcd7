"""The smallest impossible subsets, against a search of every principal submatrix."""

from __future__ import annotations

from itertools import combinations

import numpy as np
import pytest

from interwind.model.finding import Verdict
from interwind.model.windings import WindingSet
from interwind_service.windings.spectrum import spectrum
from interwind_service.windings.subsets import impossible_subsets
from interwind_service.windings.verdict import check


def every_failing(K: np.ndarray, size: int) -> set[tuple[int, ...]]:
    subsets = combinations(range(len(K)), size)
    return {s for s in subsets if np.linalg.eigvalsh(K[np.ix_(s, s)])[0] < -1e-13}


@pytest.mark.parametrize("seed", range(12))
def test_smallest_subsets_are_all_found(seed):
    """Random indefinite matrices of several kinds: the first size with a failing minor, and all of that size."""
    rng = np.random.default_rng(seed)
    n = int(rng.integers(3, 8))
    spread = rng.choice([0.3, 0.6, 0.9])
    K = np.eye(n) + (lambda U: U + U.T)(np.triu(rng.uniform(-spread, spread, (n, n)), 1))
    if seed % 3 == 0:
        K = np.eye(n) - (1 + 1e-3) / (n - 1) * (np.ones((n, n)) - np.eye(n))
    found = impossible_subsets(K, spectrum(K))
    expected = next((failing for size in range(2, n + 1) if (failing := every_failing(K, size))), set())

    assert set(found.subsets) == expected
    assert list(found.smallest) == sorted(found.smallest)


def test_flyback_fails_in_two_triples():
    """The demo scenario, derived: triples 2-3-5 and 3-4-5, both through pair 3-5."""
    K = np.eye(5)
    upper = [0.994, 0.990, 0.986, 0.983, 0.995, 0.991, 0.987, 0.995, 0.962, 0.993]
    K[np.triu_indices(5, 1)] = upper
    K = np.triu(K) + np.triu(K, 1).T
    coils = WindingSet.from_coupling(list("12345"), [1104e-6, 22.74e-6, 10.19e-6, 10.26e-6, 5.816e-6], K)
    report = check(coils)

    assert set(report.impossible_subsets) == {("2", "3", "5"), ("3", "4", "5")}
    texts = [f.message for f in report.findings if f.code == "IMPOSSIBLE_SUBSET"]
    assert all("leakage of 3-5" in text for text in texts)


def test_a_hidden_triple_in_a_large_set_is_thinned_out():
    """260 windings are too many to try all triples; the witness leads to the three that contradict."""
    n = 260
    K = np.eye(n) + 0.001 * (np.ones((n, n)) - np.eye(n))
    for (i, j), k in {(17, 101): 0.9, (17, 233): 0.9, (101, 233): 0.5}.items():
        K[i, j] = K[j, i] = k
    found = impossible_subsets(K, spectrum(K))

    assert found.subsets == ((17, 101, 233),)
    assert found.searched == 2


def test_a_subset_beyond_its_own_band_decides():
    """Ten windings, 3 decimals: the band of the whole is 0.0045, of a triple 0.001; the triple alone is impossible."""
    K = np.eye(10)
    K[:3, :3] = [[1, 0.95, 0.95], [0.95, 1, 0.8], [0.95, 0.8, 1]]
    coils = WindingSet.from_coupling([f"w{i}" for i in range(10)], np.full(10, 1e-3), K, coupling_decimals=3)
    report = check(coils)

    assert -report.margin < report.eigenvalues[0] < -0.001
    assert report.verdict is Verdict.INVALID
    assert report.impossible_subsets == (("w0", "w1", "w2"),)


def test_valid_sets_have_none():
    """Nothing is named in a set that can exist, perfect coupling included."""
    for K in (np.ones((4, 4)), 0.9 + 0.1 * np.eye(5)):
        report = check(WindingSet.from_coupling([f"w{i}" for i in range(len(K))], np.full(len(K), 1e-3), K))
        assert report.impossible_subsets == ()
        np.testing.assert_array_equal(report.blame, 0.0)
