"""Digits audit and leakage geometry: what printed digits leave of a leakage, and which leakages can stand together."""

from __future__ import annotations

import numpy as np
import pytest

from interwind.model.windings import WindingSet
from interwind_service.windings.digits import decimals_needed, leakage_error
from interwind_service.windings.geometry import embedding_eigenvalues, square_root_excess, star_legs
from interwind_service.windings.verdict import check

# Derived: relative leakage error 2 k h / (1 − k²) for half a unit of the last decimal, printed to one or two digits.
ERRORS = [
    (0.995, 3, 10), (0.995, 4, 1), (0.999, 3, 50), (0.999, 4, 5), (0.9995, 3, 100), (0.9995, 4, 10),
    (0.9998, 3, 250), (0.9998, 4, 25), (0.99985, 4, 33), (0.9999, 4, 50),
]  # fmt: skip


@pytest.mark.parametrize(("k", "decimals", "percent"), ERRORS)
def test_leakage_error_of_printed_digits(k, decimals, percent):
    """The error as the formula gives it, and as the two ends of the printed band confirm it."""
    h = 0.5 * 10.0**-decimals
    error = float(leakage_error(np.array(k), np.array(h)))

    assert 100 * error == pytest.approx(percent, rel=0.02)
    ends = [1 - (k + h) ** 2, 1 - (k - h) ** 2]
    assert (ends[1] - ends[0]) / 2 / (1 - k * k) == pytest.approx(error, rel=1e-9)


def test_decimals_needed():
    """Derived: at k = 0.999, one per cent of leakage needs steps of 1e-5; the count is the least that will do."""
    assert decimals_needed(0.999, 0.01) == 5
    for k in (0.3, 0.9, 0.995, 0.9999):
        d = decimals_needed(k, 0.1)
        assert leakage_error(np.array(k), np.array(0.5 * 10.0**-d)) <= 0.1
        assert d == 0 or leakage_error(np.array(k), np.array(0.5 * 10.0 ** -(d - 1))) > 0.1


def test_audit_names_the_pairs_whose_leakage_is_lost():
    """Pairs known worse than a tenth are named with their error and the decimals they need, the worst first."""
    K = np.array([[1, 0.999, 0.9], [0.999, 1, 0.9], [0.9, 0.9, 1]])
    findings = [
        f
        for f in check(WindingSet.from_coupling(list("abc"), [1e-3] * 3, K, coupling_decimals=3)).findings
        if f.code == "LEAKAGE_DIGITS"
    ]

    assert [f.windings for f in findings] == [("a", "b")]
    assert "±50 %" in findings[0].message
    assert "at least 4 decimals" in findings[0].message
    assert findings[0].measured == pytest.approx(0.4998, abs=1e-4)
    silent = check(WindingSet.from_coupling(list("abc"), [1e-3] * 3, K))
    assert "LEAKAGE_DIGITS" not in {f.code for f in silent.findings}


def test_two_decimals_leave_a_valid_and_worthless_matrix():
    """Couplings above 0.995 all print as 1.00: possible, and no leakage is left; three decimals mostly break them."""
    rng = np.random.default_rng(5)
    failed = {2: 0, 3: 0, 4: 0}
    for _ in range(200):
        z = np.sort(rng.uniform(0.2, 3, 5))
        L = 150 + 0.1 * np.minimum.outer(z, z) + 0.02 * np.eye(5)
        d = np.sqrt(L.diagonal())
        K = L / np.outer(d, d)
        assert K.min() > 0.995
        for decimals in failed:
            printed = WindingSet.from_coupling(list("abcde"), L.diagonal(), np.round(K, decimals))
            report = check(printed)
            failed[decimals] += report.verdict.value == "INVALID"
            if decimals == 2:
                assert "PERFECT_COUPLING" in {f.code for f in report.findings}
    assert failed[2] == 0
    assert failed[3] > 0.5 * 200
    assert failed[4] == 0


def test_a_mutual_is_the_wrong_thing_to_measure():
    """Derived, k = 0.9937: +0.5 % in M moves the leakage by −79 %; 2 % in the leakage moves k by 1.3e-4."""
    k = 0.9937
    leakage = 1 - k**2

    assert (1 - (1.005 * k) ** 2) / leakage - 1 == pytest.approx(-0.79, abs=0.005)
    assert k - np.sqrt(1 - 1.02 * leakage) == pytest.approx(1.3e-4, abs=5e-6)


# Derived (Schoenberg 1935; Young & Householder 1938): pair leakages in per cent, legs of the star, smallest eigenvalue.
STARS = [
    ((10, 18, 6), (11, -1, 7), 2.1),
    ((4, 18, 4), (9, -5, 9), -0.33),
    ((4, 16, 4), (8, -4, 8), 0.0),
]


@pytest.mark.parametrize(("leakages", "legs", "smallest"), STARS)
def test_leakages_stand_together_when_their_roots_embed(leakages, legs, smallest):
    """A negative leg is harmless; leakages that are no squared distances are impossible."""
    a, b, c = leakages
    table = np.array([[0, a, b], [a, 0, c], [b, c, 0]], dtype=float)
    values = embedding_eigenvalues(table)

    assert star_legs(a, b, c) == legs
    assert values.shape == (2,)
    assert values[0] == pytest.approx(smallest, abs=0.05 if smallest > 0 else 0.005)
    assert np.sign(np.round(square_root_excess(table), 12)) == -np.sign(np.round(values[0], 12))


def test_embedding_of_real_windings():
    """Leakages from positions on a line and in space always embed; their eigenvalues are those of the positions."""
    x = np.random.default_rng(6).normal(size=(6, 3))
    leakage = ((x[:, None] - x[None]) ** 2).sum(axis=2)
    centred = x - x.mean(axis=0)
    expected = np.zeros(5)
    expected[2:] = np.linalg.eigvalsh(centred.T @ centred)

    np.testing.assert_allclose(embedding_eigenvalues(leakage), expected, atol=1e-12)
