"""Sets that fool the eye, with their numbers: all derived here by closed form or by a second method."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.linalg import toeplitz
from scipy.special import ellipe, ellipk

from interwind.model.finding import Verdict
from interwind.model.windings import WindingSet
from interwind_service.windings.verdict import check

MU_0 = 4e-7 * np.pi


def coupled(K: np.ndarray, self_h: object = 1e-4) -> WindingSet:
    n = len(K)
    return WindingSet.from_coupling([f"w{i + 1}" for i in range(n)], np.broadcast_to(self_h, n), K)


def test_every_coupling_below_one_and_still_an_engine():
    """With 0.1 Ω a winding, three 100 µH coils with k = 0.9, 0.9, 0.5 grow at 21 226 /s: −R / (λ L)."""
    K = np.array([[1, 0.9, 0.9], [0.9, 1, 0.5], [0.9, 0.5, 1]])
    report = check(coupled(K))

    assert report.verdict is Verdict.INVALID
    assert -0.1 / report.eigenvalues_h[0] == pytest.approx(21226, abs=1)
    poles = np.linalg.eigvals(-np.linalg.solve(1e-4 * K, 0.1 * np.eye(3)))
    assert poles.real.max() == pytest.approx(21226, abs=1)


def test_one_misread_coupling_of_four():
    """Four windings, k24 = 0.973 for 0.993: λ = −0.0064, all pairs pass, two triples fail, one pair can be wrong."""
    K = np.eye(4)
    K[np.triu_indices(4, 1)] = [0.996, 0.993, 0.990, 0.996, 0.973, 0.996]
    K = np.triu(K) + np.triu(K, 1).T
    report = check(coupled(K))
    (culprit,) = report.culprits

    assert report.eigenvalues[0] == pytest.approx(-0.0064, abs=5e-5)
    assert set(report.impossible_subsets) == {("w1", "w2", "w4"), ("w2", "w3", "w4")}
    assert culprit.pair == ("w2", "w4")
    assert (culprit.low, culprit.high) == pytest.approx((0.9865, 0.9985), abs=5e-5)
    assert culprit.suggested == pytest.approx(0.9925, abs=5e-5)


def test_positive_definite_is_not_the_same_as_right():
    """40 and 5 turns in series are 610 µH aiding and 370 µH with one reversed; the eigenvalues are the same."""
    L = 1e-6 * np.array([[482.4615, 60.0], [60.0, 7.5385]])
    turned = L * np.outer([1, -1], [1, -1])

    assert (L.sum(), turned.sum()) == pytest.approx((610e-6, 370e-6))
    right, wrong = (check(WindingSet(("main", "tap"), matrix)) for matrix in (L, turned))
    assert right.verdict is wrong.verdict is Verdict.VALID
    np.testing.assert_allclose(right.eigenvalues, wrong.eigenvalues, rtol=1e-12)
    assert "REVERSAL_NOT_SHOWN" in {f.code for f in wrong.findings}


def test_a_single_flipped_pair_of_four_tight_windings():
    """The smallest eigenvalue falls to −1.223, and the pair is named."""
    K = np.eye(4)
    K[np.triu_indices(4, 1)] = [0.996, -0.993, 0.990, 0.996, 0.993, 0.996]
    K = np.triu(K) + np.triu(K, 1).T
    report = check(coupled(K))

    assert report.eigenvalues[0] == pytest.approx(-1.223, abs=5e-4)
    assert [f.windings for f in report.findings if f.code == "SIGN_FLIPPED"] == [("w1", "w3")]


def ring_pair_h(a: object, b: object, distance: object) -> np.ndarray:
    """Maxwell's mutual inductance of coaxial filaments of radii a, b (from memory: Maxwell 1873, article 701)."""
    m = 4 * a * b / ((a + b) ** 2 + distance**2)
    k = np.sqrt(m)
    return MU_0 * np.sqrt(a * b) * ((2 / k - k) * ellipk(m) - 2 / k * ellipe(m))


def disc_row_h(count: int = 60) -> np.ndarray:
    """First row of 60 discs of 10 turns, every turn a filament: radius 0.28 m, build 60 mm, pitch 17 mm."""
    radius = 0.28 - 0.03 + 0.006 * (np.arange(10) + 0.5)
    geometric_mean = 0.2235 * (5.4e-3 + 11e-3)
    own = np.where(np.eye(10) > 0, 0.0, ring_pair_h(radius[:, None], radius + 1e-12, 0.0))
    own += np.diag(MU_0 * radius * (np.log(8 * radius / geometric_mean) - 2))
    return np.array([own.sum()] + [ring_pair_h(radius[:, None], radius, 0.017 * n).sum() for n in range(1, count)])


def test_two_correct_formulas_make_one_impossible_matrix():
    """Self by a thick-ring formula, mutual by mean-radius filaments: k12 = 0.982, 24 negative eigenvalues, −0.135."""
    thick_ring = MU_0 * 100 * 0.28 * (np.log(8 * 0.28 / (0.2235 * (0.060 + 0.012))) - 2)
    filaments = 100 * ring_pair_h(0.28, 0.28, 0.017 * np.arange(1, 60))
    report = check(WindingSet([f"d{i}" for i in range(60)], toeplitz(np.append(thick_ring, filaments))))

    assert report.verdict is Verdict.INVALID
    assert filaments[0] / thick_ring == pytest.approx(0.982, abs=5e-4)
    assert int(np.sum(report.eigenvalues < 0)) == 24
    assert report.eigenvalues[0] == pytest.approx(-0.135, abs=5e-4)
    assert report.culprits == ()


def test_one_formula_for_both_is_fine_and_small_mutuals_are_not_optional():
    """The same turns for self and mutual: k12 = 0.821, λ = +0.094; beyond five neighbours dropped, λ = −0.356."""
    row = disc_row_h()
    report = check(WindingSet([f"d{i}" for i in range(60)], toeplitz(row)))
    assert report.verdict is Verdict.VALID
    assert row[1] / row[0] == pytest.approx(0.821, abs=5e-4)
    assert report.eigenvalues[0] == pytest.approx(0.094, abs=5e-4)

    banded = check(WindingSet([f"d{i}" for i in range(60)], toeplitz(np.where(np.arange(60) <= 5, row, 0.0))))
    assert banded.verdict is Verdict.INVALID
    assert banded.eigenvalues[0] == pytest.approx(-0.356, abs=5e-4)


def bars_h(count: int = 50) -> np.ndarray:
    """Partial inductances of parallel bars, 200 mm long, pitch 5 mm, width and thickness 3 mm together.

    From memory: Grover 1946, parallel filaments and straight rectangular bars.
    """
    length, pitch, girth = 0.200, 0.005, 0.003
    d = pitch * np.abs(np.subtract.outer(np.arange(count), np.arange(count))) + np.eye(count)
    L = 2e-7 * length * (np.arcsinh(length / d) - np.sqrt(1 + (d / length) ** 2) + d / length)
    np.fill_diagonal(L, 2e-7 * length * (np.log(2 * length / girth) + 0.5 + 0.2235 * girth / length))
    return L


@pytest.mark.parametrize(
    ("kept", "smallest"),
    [("k 0.5", -0.205), ("k 0.3", -0.002), ("band 1", -0.26), ("band 2", -0.21), ("band 5", -0.05)],
)
def test_dropping_far_mutuals_breaks_partial_inductances(kept, smallest):
    """By threshold or by band: the full matrix is fine, the sparse one is not."""
    L = bars_h()
    assert check(WindingSet([f"b{i}" for i in range(50)], L)).verdict is Verdict.VALID
    what, limit = kept.split()
    far = np.abs(np.subtract.outer(np.arange(50), np.arange(50)))
    mask = L / L[0, 0] >= float(limit) if what == "k" else far <= float(limit)
    report = check(WindingSet([f"b{i}" for i in range(50)], np.where(mask, L, 0.0)))

    assert report.verdict is Verdict.INVALID
    assert report.eigenvalues[0] == pytest.approx(smallest, abs=0.0055)


@pytest.mark.parametrize(("band", "smallest"), [(1, 0.72), (2, 0.46), (5, 0.23)])
def test_banded_inverse_stays_positive(band, smallest):
    """The same bands kept of the inverse matrix leave it positive, in units of 1 / L11."""
    L = bars_h()
    inverse = np.linalg.inv(L) * L[0, 0]
    far = np.abs(np.subtract.outer(np.arange(50), np.arange(50)))

    assert np.linalg.eigvalsh(np.where(far <= band, inverse, 0))[0] == pytest.approx(smallest, abs=0.0055)
