"""Area A, repair: nearest matrices and completions as published, each asked of the public client."""

from __future__ import annotations

import importlib.util
from pathlib import Path

import numpy as np
import pytest
from scipy.io import loadmat

from interwind.model.finding import Verdict
from interwind.model.report import RepairMethod
from interwind.model.windings import WindingSet
from interwind_service.windings.nearest import nearest_correlation

_spec = importlib.util.spec_from_file_location("matrices_a", Path(__file__).with_name("matrices_a.py"))
matrices = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(matrices)


def coupled(K: np.ndarray) -> WindingSet:
    return WindingSet.from_coupling([f"w{i + 1}" for i in range(len(K))], np.full(len(K), 1e-3), K)


def nearest(solver, K: np.ndarray, **asked: object):
    return solver.repair(coupled(K), method=RepairMethod.NEAREST, **asked)


# Distances and shrinking parameters recomputed for the collection of cases by two methods, a Newton dual and
# Dykstra-corrected projections; lower bounds √Σλ₋² after Higham, Linear Algebra Appl. 103 (1988), from memory.
CASES = [
    ("A-01", "HIGH02", 0.527790463582, 0.292893218813, 0.414213562373),
    ("A-07", "TEC03", 0.037416672638, 0.027008960648, 0.027758694125),
    ("A-09", "FING97", 0.049078080827, 0.036879402950, 0.038291573312),
    ("A-12", "BEYU11", 0.009591118464, 0.008615442781, 0.008690313681),
    ("A-15", "TYDA99R2", 0.774652150158, 0.362866232851, 0.623691701341),
    ("A-16", "TYDA99R3", 0.672260039221, 1.0 / 3.0, 0.559375412139),
]


@pytest.mark.parametrize(("case", "name", "distance", "shrink", "lower"), CASES, ids=[row[0] for row in CASES])
def test_nearest_lies_at_the_published_distance(solver, case, name, distance, shrink, lower):
    """The distance to 1e-9; between the distance to the semidefinite cone and that of shrinking to the identity."""
    K = getattr(matrices, name)
    report = nearest(solver, K)

    np.testing.assert_allclose(report.distance, distance, rtol=0, atol=1e-9)
    np.testing.assert_allclose(report.distance, np.linalg.norm(K - report.windings.coupling), rtol=1e-12)
    least = np.linalg.eigvalsh(K)
    np.testing.assert_allclose(np.sqrt(np.sum(least[least < 0] ** 2)), lower, rtol=0, atol=1e-10)
    np.testing.assert_allclose(-least[0] / (1.0 - least[0]), shrink, rtol=0, atol=1e-9)
    assert lower <= report.distance <= shrink * np.linalg.norm(K - np.eye(len(K)))
    assert solver.check(report.windings).verdict is Verdict.VALID


def test_a01_entries_follow_the_cubic(solver):
    """A-01, looked up (high02.m), values from memory (Higham 2002: 0.7607, 0.1573): 4a³ − a − 1 = 0, k13 = 2a² − 1."""
    K = nearest(solver, matrices.HIGH02).windings.coupling
    a = K[0, 1]

    np.testing.assert_allclose(4 * a**3 - a - 1, 0.0, atol=1e-12)
    np.testing.assert_allclose([a, K[1, 2], K[0, 2]], [0.760689853402, 0.760689853402, 0.157298106163], atol=1e-9)


def test_a02_target_without_unit_diagonal():
    """A-02, from memory (Higham 2002, 2.13), matrix looked up (G02AA example results): a test of the function."""
    A = 2.0 * np.eye(4) - np.eye(4, k=1) - np.eye(4, k=-1)
    X = nearest_correlation(A).matrix
    expected = np.eye(4)
    expected[np.triu_indices(4, 1)] = (
        -0.8084124981, 0.1915875019, 0.1067750490, -0.6562326948, 0.1915875019, -0.8084124981,
    )  # fmt: skip

    np.testing.assert_allclose(np.triu(X), np.triu(expected), rtol=0, atol=1e-9)
    np.testing.assert_allclose(np.linalg.norm(A - X), 2.133729108709, rtol=0, atol=1e-9)


def test_a03_twelve_printed_digits(solver):
    """A-03, looked up: support.nag.com nagdoc_27.2 examples/baseresults/g02aa_passive_dcoe.r.html."""
    report = nearest(solver, matrices.TRIDIAGONAL)
    K = report.windings.coupling

    found = [K[0, 1], K[2, 3], K[0, 2], K[1, 3], K[0, 3], K[1, 2], report.distance]
    expected = [
        -0.8084124981489, -0.8084124981489, 0.1915875018502, 0.1915875018502, 0.1067750490255, -0.6562326948064,
        0.743505150858,
    ]  # fmt: skip
    np.testing.assert_allclose(found, expected, rtol=0, atol=1e-11)
    np.testing.assert_allclose(np.linalg.eigvalsh(K), [0, 0.204427368, 1.450542354, 2.345030278], rtol=0, atol=1e-9)


def test_a06_printed_answer_is_feasible(solver):
    """A-06, looked up: nagdoc_28.5 g02ajfe.r.html: element weights, non-unique; objective and floor as identities."""
    G = matrices.TRIDIAGONAL
    X = np.eye(4)
    X[np.triu_indices(4, 1)] = (-0.96, 0.95999, -0.00034656, -0.95999, 0.00029968, -0.0041294)
    X = np.triu(X) + np.triu(X, 1).T
    H = np.zeros((4, 4))
    H[0, 1] = 1.0
    H[1, 2] = H[1, 3] = 0.15
    report = solver.check(coupled(X))

    np.testing.assert_allclose(report.eigenvalues, [0.04, 0.04, 1.0, 2.92], rtol=0, atol=5e-5)
    np.testing.assert_allclose(np.linalg.norm((H + H.T) * (G - X)), 0.0572, rtol=0, atol=5e-5)


def test_a07_clipping_is_not_nearest(solver):
    """A-07, looked up (tec03.m), recomputed by two methods: the entries, and 0.0393 for clipping and rescaling."""
    K = matrices.TEC03
    report = nearest(solver, K)
    expected = (-0.5363183448, -0.1548562005, -0.1070634013, 0.8886026056, 0.8834223545, 0.9058841105)
    values, V = np.linalg.eigh(K)
    clipped = V @ np.diag(np.maximum(values, 0.0)) @ V.T
    clipped /= np.sqrt(np.outer(clipped.diagonal(), clipped.diagonal()))

    np.testing.assert_allclose(report.windings.coupling[np.triu_indices(4, 1)], expected, rtol=0, atol=1e-9)
    np.testing.assert_allclose(np.linalg.norm(clipped - K), 0.039272626472, rtol=0, atol=1e-9)
    assert report.distance < np.linalg.norm(clipped - K)


SPECTRA = [
    ("A-09", "FING97", [0, 0.100668005, 0.1449570114, 0.6570398183, 1.1770376743, 1.3487757467, 3.5715217442]),
    ("A-15", "TYDA99R2", [0, 0, 0.1382869621, 0.406133322, 0.7893667084, 1.1235025437, 1.447784488, 4.094925976]),
    (
        "A-16",
        "TYDA99R3",
        [0, 0, 0.4004380763, 0.4325041649, 0.4325041649, 1.0037263729, 2.0501906309, 3.6806365901],
    ),
]


@pytest.mark.parametrize(("case", "name", "spectrum"), SPECTRA, ids=[row[0] for row in SPECTRA])
def test_nearest_has_the_published_spectrum(solver, case, name, spectrum):
    """Sources beside the matrices; eigenvalues of the nearest matrix recomputed by two methods."""
    report = nearest(solver, getattr(matrices, name))

    np.testing.assert_allclose(np.linalg.eigvalsh(report.windings.coupling), spectrum, rtol=0, atol=1e-9)


def test_a12_one_zero_eigenvalue(solver):
    """A-12, looked up (beyu11.m), recomputed: the nearest matrix has one zero eigenvalue, the next is 0.0588004708."""
    values = np.linalg.eigvalsh(nearest(solver, matrices.BEYU11).windings.coupling)

    np.testing.assert_allclose(values[:2], [0.0, 0.0588004708], rtol=0, atol=1e-9)


def test_a11_shrinking_with_a_fixed_block(solver):
    """A-11, method from memory (Higham, Strabić & Šego 2016), recomputed: at α* the set is singular, below invalid."""
    K = matrices.FING97
    target = np.eye(7)
    target[:3, :3] = K[:3, :3]
    alpha = 0.0362751532678
    shrunk = alpha * target + (1.0 - alpha) * K

    np.testing.assert_allclose(np.linalg.norm(shrunk - K), 0.110959284141, rtol=0, atol=1e-10)
    np.testing.assert_allclose(solver.check(coupled(shrunk)).eigenvalues[0], 0.0, atol=1e-10)
    less = (alpha - 1e-8) * target + (1.0 - alpha + 1e-8) * K
    assert solver.check(coupled(less)).verdict is Verdict.INVALID
    trusted = [(f"w{i}", f"w{j}") for i in (1, 2, 3) for j in range(i + 1, 4)]
    report = nearest(solver, K, trusted=trusted)
    np.testing.assert_array_equal(report.windings.coupling[:3, :3], K[:3, :3])
    assert 0.049078080827 <= report.distance <= 0.110959284141


@pytest.mark.parametrize("blocks", [True, False], ids=["trusted blocks", "none trusted"])
def test_a18_usgs_with_trusted_blocks(solver, data_folder, blocks):
    """A-18, looked up: usgs13.m of the same collection; distance with the blocks fixed 0.0636980253 to 1e-8.

    Without them no distance is printed; the optimality conditions hold instead.
    """
    K = np.asarray(loadmat(data_folder / "usgs.mat")["A"], dtype=float)
    K = 0.5 * (K + K.T)
    np.fill_diagonal(K, 1.0)
    sizes = (12, 5, 1, 14, 12, 1, 10, 4, 5, 9, 13, 8)
    block = np.repeat(np.arange(len(sizes)), sizes)
    inside = block[:, None] == block[None, :]
    trusted = [(f"w{i + 1}", f"w{j + 1}") for i, j in np.argwhere(np.triu(inside, 1))] if blocks else []
    report = nearest(solver, K, trusted=trusted)
    X = report.windings.coupling

    if blocks:
        np.testing.assert_allclose(report.distance, 0.0636980253, rtol=0, atol=1e-8)
        np.testing.assert_array_equal(X[inside], K[inside])
        target = np.where(inside, K, 0.0)
        np.testing.assert_allclose(np.linalg.eigvalsh(target)[0], 0.2581301472, rtol=0, atol=1e-8)
        shrunk = 0.0823663968 * target + (1.0 - 0.0823663968) * K
        np.testing.assert_allclose(np.linalg.eigvalsh(shrunk)[0], 0.0, atol=1e-9)
    else:
        # X is the nearest exactly when X − K = Y − diag(y) with Y ⪰ 0 and X Y = 0; X Y = 0 gives y = diag((X − K) X).
        y = -((X - K) * X).sum(axis=1)
        Y = X - K + np.diag(y)
        np.testing.assert_allclose(X @ Y, 0.0, atol=1e-9)
        assert np.linalg.eigvalsh(Y)[0] > -1e-9
        assert np.linalg.eigvalsh(X)[0] > -1e-9


def test_a21_inductance_matrix_with_diagonal_off_one(solver):
    """A-21, looked up (R values, 0.06239 without Dykstra), recomputed: K + 0.01 I, diagonal 1.01: 0.062347108247 H."""
    L = matrices.KNOL + 0.01 * np.eye(6)
    coils = WindingSet([f"w{i}" for i in range(6)], L)
    report = solver.repair(coils, method=RepairMethod.NEAREST)

    np.testing.assert_allclose(np.linalg.norm(report.windings.inductance_h - L), 0.062347108247, rtol=0, atol=1e-9)
    np.testing.assert_array_equal(report.windings.inductance_h.diagonal(), np.full(6, 1.01))


def test_a22_forced_completion(solver):
    """A-22, looked up: Georgescu & Higham 2020: k12 = k23 = 1 leave k13 = 1 alone, exactly."""
    K = np.array([[1, 1, np.nan], [1, 1, 1], [np.nan, 1, 1]])

    assert solver.repair(coupled(K)).windings.coupling[0, 2] == 1.0


def test_a27_completion_of_a_chain(solver):
    """A-27, from memory (Grone et al. 1984; Dempster 1972): 0.8 · 0.6 = 0.48, determinant 0.2304, inverse zero."""
    K = np.array([[1, 0.8, np.nan], [0.8, 1, 0.6], [np.nan, 0.6, 1]])
    report = solver.repair(coupled(K))
    completed = report.windings.coupling

    np.testing.assert_allclose(completed[0, 2], 0.48, rtol=0, atol=1e-12)
    np.testing.assert_allclose(np.linalg.det(completed), 0.2304, rtol=0, atol=1e-12)
    np.testing.assert_allclose(np.linalg.inv(completed)[0, 2], 0.0, atol=1e-12)
    assert [(change.pair, np.isnan(change.before)) for change in report.changes] == [(("w1", "w3"), True)]
