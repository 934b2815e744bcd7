"""Area A, verdicts: published matrices and closed forms, each judged through the public call."""

from __future__ import annotations

import importlib.util
from pathlib import Path

import numpy as np
import pytest

from interwind.model.finding import Verdict
from interwind.model.windings import WindingSet
from interwind_service.windings.spectrum import spectrum

_spec = importlib.util.spec_from_file_location("matrices_a", Path(__file__).with_name("matrices_a.py"))
matrices = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(matrices)

SELF_H = 1e-3


def coupled(K: np.ndarray, **stated: object) -> WindingSet:
    labels = [f"w{i + 1}" for i in range(len(K))]
    return WindingSet.from_coupling(labels, np.full(len(K), SELF_H), K, **stated)


def codes(report: object) -> set[str]:
    return {finding.code for finding in report.findings}


# Sources stand beside the matrices; the digits beyond the printed ones were recomputed by two methods (A-01 .. A-16).
INVALID = [
    ("A-01", "HIGH02", -0.414213562373, 1),
    ("A-03", "TRIDIAGONAL", -0.618033988750, 1),
    ("A-07", "TEC03", -0.027758694125, 1),
    ("A-09", "FING97", -0.038291573312, 1),
    ("A-12", "BEYU11", -0.008690313681, 1),
    ("A-15", "TYDA99R2", -0.569529118625, 2),
    ("A-16", "TYDA99R3", -0.5, 2),
]


@pytest.mark.parametrize(("case", "name", "smallest", "negative"), INVALID, ids=[row[0] for row in INVALID])
def test_published_matrix_is_invalid(solver, case, name, smallest, negative):
    """The smallest eigenvalue as published, the number of negative ones, and a witness that stores that energy."""
    K = getattr(matrices, name)
    coils = coupled(K)
    report = solver.check(coils)

    assert report.verdict is Verdict.INVALID
    np.testing.assert_allclose(report.eigenvalues[0], smallest, rtol=0, atol=1e-9)
    assert int(np.sum(report.eigenvalues < -1e-12)) == negative
    i = report.witness_current_a
    np.testing.assert_allclose(np.linalg.norm(i), 1.0, rtol=1e-14)
    np.testing.assert_allclose(0.5 * i @ coils.inductance_h @ i, report.witness_energy_j, rtol=1e-9)
    np.testing.assert_allclose(report.witness_energy_j, 0.5 * SELF_H * smallest, rtol=1e-7)


def test_a01_eigenvalues_in_closed_form(solver):
    """A-01, looked up: Georgescu & Higham, Completing the Matrix (2020): 1 − √2, 1, 1 + √2."""
    report = solver.check(coupled(matrices.HIGH02))

    np.testing.assert_allclose(report.eigenvalues, [1 - np.sqrt(2), 1, 1 + np.sqrt(2)], rtol=0, atol=1e-12)


def test_a07_only_one_pair_cures(solver):
    """A-07, recomputed by two methods: k12 in [−0.496709954233, 0.259867848970]; (1,3) and (3,4) cure nothing."""
    report = solver.check(coupled(matrices.TEC03))

    np.testing.assert_allclose(
        (report.feasible_low[0, 1], report.feasible_high[0, 1]), (-0.496709954233, 0.259867848970), rtol=0, atol=1e-9
    )
    assert np.isnan(report.feasible_low[0, 2])
    assert np.isnan(report.feasible_low[2, 3])
    assert ("w1", "w2") in [culprit.pair for culprit in report.culprits]


@pytest.mark.parametrize("name", ["TYDA99R2", "TYDA99R3"])
def test_two_negative_eigenvalues_have_no_single_cure(solver, name):
    """A-15, A-16 and Cauchy interlacing (derived): one entry cannot lift two negative eigenvalues."""
    report = solver.check(coupled(getattr(matrices, name)))

    assert report.culprits == ()
    assert "NO_SINGLE_CHANGE_CURES" in codes(report)
    assert np.all(np.isnan(report.feasible_low[np.triu_indices(8, 1)]))


def test_a21_inductance_matrix_with_diagonal_off_one(solver):
    """A-21, looked up (R values) and recomputed: K + 0.01 I has the smallest eigenvalue −0.052624792079."""
    L = matrices.KNOL + 0.01 * np.eye(6)
    report = solver.check(WindingSet([f"w{i}" for i in range(6)], L))

    assert report.verdict is Verdict.INVALID
    np.testing.assert_allclose(report.eigenvalues_h[0], -0.052624792079, rtol=0, atol=1e-9)
    np.testing.assert_allclose(report.eigenvalues[0], -0.052624792079 / 1.01, rtol=0, atol=1e-9)


def test_a22_forced_completion(solver):
    """A-22, looked up: Georgescu & Higham 2020, and closed form: k12 = k23 = 1 leaves k13 = 1 alone."""
    report = solver.check(coupled(np.array([[1, 1, np.nan], [1, 1, 1], [np.nan, 1, 1]])))

    assert report.verdict is Verdict.VALID
    assert (report.feasible_low[0, 2], report.feasible_high[0, 2]) == pytest.approx((1, 1), abs=1e-15)
    assert {"UNKNOWN_PAIR", "PERFECT_COUPLING"} <= codes(report)


A23 = [
    (0.9, 0.9, 0.62, 1.0),
    (0.5, 0.5, -0.5, 1.0),
    (0.8, 0.6, 0.0, 0.96),
    (0.99, 0.95, 0.896451731, 0.984548269),
    (0.3, 0.4, -0.754299720, 0.994299720),
]


@pytest.mark.parametrize(("k13", "k23", "low", "high"), A23)
def test_a23_three_winding_interval(solver, k13, k23, low, high):
    """A-23, derived: k13 k23 ± √((1 − k13²)(1 − k23²)) (Stanley & Wang 1969; Olkin 1981, from memory)."""
    for k12 in (np.nan, low, 0.5 * (low + high), -0.99):
        K = np.array([[1, k12, k13], [k12, 1, k23], [k13, k23, 1]])
        report = solver.check(coupled(K))

        assert (report.feasible_low[0, 1], report.feasible_high[0, 1]) == pytest.approx((low, high), abs=1e-9)


def test_a24_determinant_condition(solver):
    """A-24, derived: the determinant is −0.06, so the set is invalid; k23 must be at least 0.62."""
    report = solver.check(coupled(np.array([[1, 0.9, 0.9], [0.9, 1, 0.5], [0.9, 0.5, 1]])))

    assert report.verdict is Verdict.INVALID
    np.testing.assert_allclose(np.prod(report.eigenvalues), -0.06, rtol=0, atol=1e-12)
    np.testing.assert_allclose(report.feasible_low[1, 2], 0.62, rtol=0, atol=1e-12)


@pytest.mark.parametrize("size", [2, 3, 4, 5, 6, 10])
def test_a25_equal_couplings(solver, size):
    """A-25, derived: eigenvalues 1 + (N − 1) k once, 1 − k else; valid exactly for −1/(N − 1) ≤ k ≤ 1."""

    def equal(k: float) -> np.ndarray:
        return np.full((size, size), k) + (1 - k) * np.eye(size)

    edge = -1 / (size - 1)
    for k, verdict in [
        (edge, Verdict.VALID),
        (1.0, Verdict.VALID),
        (0.5 * edge, Verdict.VALID),
        (edge - 1e-9, Verdict.INVALID),
        (1 + 1e-9, Verdict.INVALID),
    ]:
        report = solver.check(coupled(equal(k)))

        assert report.verdict is verdict, k
        expected = np.sort([1 + (size - 1) * k] + [1 - k] * (size - 1))
        np.testing.assert_allclose(report.eigenvalues, expected, rtol=0, atol=1e-14 * size)
        assert ("PERFECT_COUPLING" in codes(report)) == (k in (edge, 1.0))


def test_a27_interval_of_the_unknown_pair_of_a_chain(solver):
    """A-27, from memory (Grone et al. 1984; Dempster 1972): the centre k12 k23 = 0.48 has the greatest determinant."""
    K = np.array([[1, 0.8, np.nan], [0.8, 1, 0.6], [np.nan, 0.6, 1]])
    report = solver.check(coupled(K))
    low, high = report.feasible_low[0, 2], report.feasible_high[0, 2]

    np.testing.assert_allclose(0.5 * (low + high), 0.48, rtol=0, atol=1e-12)
    np.testing.assert_allclose((0.5 * (high - low)) ** 2, 0.2304, rtol=0, atol=1e-12)


HILBERT = {
    4: 9.67023040225869e-5,
    5: 3.28792877217186e-6,
    6: 1.08279948456555e-7,
    8: 1.11153896637244e-10,
    10: 1.09315381937967e-13,
    12: 1.04794639796223e-16,
}


@pytest.mark.parametrize("size", HILBERT)
def test_a28_hilbert_inductances_are_never_called_invalid(solver, size):
    """A-28, from memory (Higham, Accuracy and Stability, section 28.1), recomputed with 60 digits; L in mH."""
    index = np.arange(1, size + 1)
    L = 1e-3 / (index[:, None] + index - 1)
    report = solver.check(WindingSet([f"w{i}" for i in index], L))

    assert report.verdict is Verdict.VALID
    if size <= 6:
        np.testing.assert_allclose(report.eigenvalues_h[0], 1e-3 * HILBERT[size], rtol=1e-6)
    said = {"PERFECT_COUPLING", "NEARLY_PERFECT_COUPLING"} & codes(report)
    assert len(said) == (size >= 10)


def test_a29_rosser_eigenvalues():
    """A-29, from memory (Rosser, Lanczos, Hestenes & Karush 1951): the function that decomposes, 1e-10 of 1020."""
    R = np.array(
        [
            [611, 196, -192, 407, -8, -52, -49, 29],
            [196, 899, 113, -192, -71, -43, -8, -44],
            [-192, 113, 899, 196, 61, 49, 8, 52],
            [407, -192, 196, 611, 8, 44, 59, -23],
            [-8, -71, 61, 8, 411, -599, 208, 208],
            [-52, -43, 49, 44, -599, 411, 208, 208],
            [-49, -8, 8, 59, 208, 208, 99, -911],
            [29, -44, 52, -23, 208, 208, -911, 99],
        ],
        dtype=float,
    )
    root = 10 * np.sqrt(10405)
    expected = [-root, 0, 510 - 100 * np.sqrt(26), 1000, 1000, 510 + 100 * np.sqrt(26), 1020, root]
    np.testing.assert_allclose(spectrum(R).values, expected, rtol=0, atol=1e-10 * 1020)


def test_a30_geometric_coupling(solver):
    """A-30, from memory (Kac, Murdock & Szegő 1953): k_ij = 0.9^|i − j|, N = 8."""
    index = np.arange(8)
    report = solver.check(coupled(0.9 ** np.abs(index[:, None] - index)))

    assert report.verdict is Verdict.VALID
    assert report.culprits == ()
    np.testing.assert_allclose(report.eigenvalues[[0, -1]], [0.05467991, 6.20299902], rtol=0, atol=1e-8)
    np.testing.assert_allclose(np.prod(report.eigenvalues), 8.938717390e-06, rtol=1e-8)


def test_a31_min_matrix(solver):
    """A-31, from memory (closed form): L_ij = min(i, j) has the eigenvalues 1 / (4 sin²((2k − 1) π / (2 (2n + 1))))."""
    index = np.arange(1, 7)
    report = solver.check(WindingSet([f"w{i}" for i in index], np.minimum.outer(index, index)))

    expected = [0.265187834241, 0.318864384295, 0.446214754778, 0.774719222321, 1.988156536965, 17.206857267401]
    np.testing.assert_allclose(report.eigenvalues_h, expected, rtol=0, atol=1e-11)


def test_a32_wilkinson_near_double_eigenvalue():
    """A-32, from memory (Wilkinson 1965, p. 308): the function that decomposes W21+."""
    W = np.diag(np.abs(np.arange(-10.0, 11))) + np.eye(21, k=1) + np.eye(21, k=-1)
    values = spectrum(W).values

    np.testing.assert_allclose(values[-2:], 10.746194182903, rtol=0, atol=1e-9)
    np.testing.assert_allclose(values[0], -1.125441522120, rtol=0, atol=1e-9)


A36 = {
    "HIGH02": 0.414213562373,
    "TEC03": 0.027758694125,
    "FING97": 0.038291573312,
    "TYDA99R2": 0.623691701341,
    "TYDA99R3": 0.559375412139,
    "BEYU11": 0.008690313681,
}


@pytest.mark.parametrize("name", A36)
def test_a36_distance_to_the_semidefinite_cone(solver, name):
    """A-36, from memory (Higham 1988): √Σλ₋² from the eigenvalues of the report."""
    values = solver.check(coupled(getattr(matrices, name))).eigenvalues

    np.testing.assert_allclose(np.linalg.norm(np.minimum(values, 0)), A36[name], rtol=0, atol=1e-10)


def test_a37_shrink_to_identity(solver):
    """A-37, derived: α = −λ/(1 − λ) from the eigenvalue of the report is 1 − 1/√2 for A-01."""
    least = solver.check(coupled(matrices.HIGH02)).eigenvalues[0]

    np.testing.assert_allclose(-least / (1 - least), 0.292893218813, rtol=0, atol=1e-11)


def test_a38_perfect_coupling_is_singular_not_invalid(solver):
    """A-38, derived: L = 1 mH · n nᵀ has the eigenvalues 0, 0, 5.25 mH and is accepted, and said to be the limit."""
    n = np.array([1, 2, -0.5])
    report = solver.check(WindingSet(("a", "b", "c"), 1e-3 * np.outer(n, n)))

    assert report.verdict is Verdict.VALID
    np.testing.assert_allclose(report.eigenvalues_h, [0, 0, 5.25e-3], rtol=0, atol=1e-15)
    assert "PERFECT_COUPLING" in codes(report)
    assert report.culprits == ()


@pytest.mark.parametrize("name", ["HIGH02", "TEC03", "FING97", "BEYU11", "TYDA99R2"])
def test_a39_similarity_keeps_the_verdict(solver, name):
    """A-39, derived (Sylvester): turns, order and dots change neither the verdict nor the eigenvalues of K."""
    K = getattr(matrices, name)
    size = len(K)
    rng = np.random.default_rng(39)
    order, dots = rng.permutation(size), rng.choice([-1.0, 1.0], size)
    turns = rng.uniform(1, 60, size)
    base = solver.check(coupled(K))
    turned = (K * np.outer(dots, dots))[np.ix_(order, order)]
    moved = solver.check(WindingSet([f"w{i}" for i in range(size)], turned * np.outer(turns, turns) * 1e-7))

    assert moved.verdict is base.verdict
    np.testing.assert_allclose(moved.eigenvalues, base.eigenvalues, rtol=0, atol=1e-12)
    np.testing.assert_array_equal(np.isnan(moved.feasible_low), np.isnan(base.feasible_low)[np.ix_(order, order)])
