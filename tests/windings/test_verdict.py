"""The verdict: margins, witness, culprits, and a finding for every fault that well-shaped data can have."""

from __future__ import annotations

import numpy as np
import pytest

from interwind.errors import InvalidRequest
from interwind.model.finding import Severity, Verdict
from interwind.model.windings import WindingSet
from interwind_service.windings.verdict import check

# Five-winding flyback of the demo scenario, measured values; expected figures derived (recomputed by a second method).
S1_SELF_H = (1104e-6, 22.74e-6, 10.19e-6, 10.26e-6, 5.816e-6)
S1_PAIRS = {
    (0, 1): 0.994, (0, 2): 0.990, (0, 3): 0.986, (0, 4): 0.983, (1, 2): 0.995,
    (1, 3): 0.991, (1, 4): 0.987, (2, 3): 0.995, (2, 4): 0.962, (3, 4): 0.993,
}  # fmt: skip
NAN = np.nan


def matrix(size: int, pairs: dict[tuple[int, int], float]) -> np.ndarray:
    K = np.eye(size)
    for (i, j), value in pairs.items():
        K[i, j] = K[j, i] = value
    return K


def coils(K: np.ndarray, self_h: object = 1e-4, **stated: object) -> WindingSet:
    n = len(K)
    return WindingSet.from_coupling([f"w{i + 1}" for i in range(n)], np.broadcast_to(self_h, n), K, **stated)


def found(report: object, code: str) -> list:
    return [finding for finding in report.findings if finding.code == code]


def test_measured_flyback_is_invalid_and_one_pair_is_to_blame():
    """The demo scenario: eigenvalues, witness, and pair 3-5 alone with its interval and maximum-determinant value."""
    report = check(coils(matrix(5, S1_PAIRS), S1_SELF_H, coupling_decimals=3))

    assert report.verdict is Verdict.INVALID
    np.testing.assert_allclose(report.eigenvalues, [-0.00990, 0.00493, 0.01555, 0.03898, 4.95045], rtol=0, atol=5.1e-6)
    v = report.witness_current_a * np.sqrt(S1_SELF_H)
    v /= np.linalg.norm(v) * np.sign(v[0])
    np.testing.assert_allclose(v, [0.187, 0.317, -0.580, 0.548, -0.477], rtol=0, atol=5.1e-4)
    (culprit,) = report.culprits
    assert culprit.pair == ("w3", "w5")
    np.testing.assert_allclose(
        [culprit.low, culprit.high, culprit.suggested], [0.98099, 0.99811, 0.98955], rtol=0, atol=5.1e-6
    )
    empty = np.isnan(report.feasible_low)
    assert np.argwhere(np.triu(~empty, 1)).tolist() == [[2, 4]]
    assert found(report, "CULPRIT_PAIR")[0].windings == ("w3", "w5")
    assert report.evidence.residual < 1e-15


def test_witness_stores_the_energy_that_is_said():
    """Three 100 µH windings, derived: (−0.772, 0.449, 0.449) A store −2.36 µJ; k23 had to be in [0.62, 1]."""
    report = check(coils(matrix(3, {(0, 1): 0.9, (0, 2): 0.9, (1, 2): 0.5})))

    np.testing.assert_allclose(report.eigenvalues, [-0.0471, 0.5, 2.547], rtol=0, atol=5.1e-4)
    i = report.witness_current_a * -np.sign(report.witness_current_a[0])
    np.testing.assert_allclose(i, [-0.772, 0.449, 0.449], rtol=0, atol=7e-4)
    np.testing.assert_allclose(report.witness_energy_j, -2.36e-6, rtol=0, atol=5.1e-9)
    np.testing.assert_allclose((report.feasible_low[1, 2], report.feasible_high[1, 2]), (0.62, 1.0), atol=1e-12)


@pytest.mark.parametrize(
    ("least", "verdict"), [(0.0021, "VALID"), (0.0019, "UNDECIDED"), (-0.0019, "UNDECIDED"), (-0.0021, "INVALID")]
)
@pytest.mark.parametrize(
    "stated",
    [
        {"coupling_decimals": 3},
        {"coupling_uncertainty": 0.00025},
        {"coupling_uncertainty": np.full((5, 5), 0.00025)},
        {"inductance_uncertainty_h": 0.00025e-4 * (np.ones((5, 5)) - np.eye(5))},
    ],
)
def test_margin_is_what_the_stated_band_can_do(least, verdict, stated):
    """Five equal couplings, derived: entries within ± h move the smallest eigenvalue by at most 4 h (Weyl, Perron).

    Half a unit of the third decimal and two standard deviations of 0.00025 are the same band, h = 0.0005.
    """
    k = -(1 - least) / 4
    report = check(coils(matrix(5, {(i, j): k for i in range(5) for j in range(i)}), **stated))

    assert report.verdict is Verdict[verdict]
    assert bool(found(report, "WITHIN_UNCERTAINTY")) == (verdict == "UNDECIDED")


def test_margin_of_an_inductance_matrix_counts_the_diagonal():
    """Two windings, derived: L = [[1, k], [k, 1]] H with every entry ± h has its determinant's sign open up to 2 h."""
    L = np.array([[1.0, 0.9985], [0.9985, 1.0]])

    assert check(WindingSet(tuple("ab"), L, inductance_uncertainty_h=0.0005)).verdict is Verdict.UNDECIDED
    assert check(WindingSet(tuple("ab"), L, inductance_uncertainty_h=0.0003)).verdict is Verdict.VALID


def test_rounded_true_sets_are_never_called_invalid():
    """Couplings of real stacks printed to 3 decimals often lose definiteness; digits stated, none is INVALID."""
    rng = np.random.default_rng(2)
    bare = {verdict: 0 for verdict in Verdict}
    for _ in range(200):
        z = np.sort(rng.uniform(0.2, 3, 5))
        L = 150 + 0.5 * np.minimum.outer(z, z) + 0.03 * np.eye(5)
        d = np.sqrt(L.diagonal())
        K = np.round(L / np.outer(d, d), 3)
        bare[check(coils(K)).verdict] += 1
        assert check(coils(K, coupling_decimals=3)).verdict is not Verdict.INVALID
    assert bare[Verdict.INVALID] > 20


def test_relabelling_and_scaling_change_nothing_but_names():
    """Order of windings, turns and dots: same verdict, culprit and interval."""
    K = matrix(5, S1_PAIRS)
    order = [3, 0, 4, 2, 1]
    dots = np.array([1, -1, 1, 1, -1.0])
    turned = (K * np.outer(dots, dots))[np.ix_(order, order)]
    labels = [f"w{i + 1}" for i in order]
    report = check(WindingSet.from_coupling(labels, np.asarray(S1_SELF_H)[order], turned))
    (culprit,) = report.culprits

    assert set(culprit.pair) == {"w3", "w5"}
    assert abs(culprit.suggested) == pytest.approx(0.98955, abs=5.1e-6)


def test_input_is_not_changed():
    """The set that was checked is the same afterwards, bit by bit."""
    K = matrix(5, S1_PAIRS)
    K[0, 1] = NAN
    given = coils(K, S1_SELF_H)
    before = (given.coupling.tobytes(), given.inductance_h.tobytes())
    check(given)

    assert before == (given.coupling.tobytes(), given.inductance_h.tobytes())


def test_one_winding():
    """A single winding has no pairs; it is valid, and 1 A through it stores half its inductance."""
    report = check(WindingSet(("a",), [[4e-3]]))

    assert report.verdict is Verdict.VALID
    assert report.eigenvalues.tolist() == [1.0]
    assert report.witness_energy_j == pytest.approx(2e-3)


# --- faults of well-shaped data are findings, and the set is INVALID ---------------------------------------------


def test_non_positive_self_inductance():
    """Zero and negative self-inductances are named; that winding alone is the witness."""
    report = check(WindingSet(tuple("abc"), [[1e-3, 0, 0], [0, 0.0, 0], [0, 0, -2e-3]]))

    assert report.verdict is Verdict.INVALID
    assert [f.windings for f in found(report, "NON_POSITIVE_SELF_INDUCTANCE")] == [("b",), ("c",)]
    assert report.witness_current_a.tolist() == [0, 0, 1]
    assert report.witness_energy_j == pytest.approx(-1e-3)
    assert np.all(np.isnan(report.eigenvalues))
    assert check(coils(matrix(2, {(0, 1): 0.5}), (1e-3, -1e-3))).verdict is Verdict.INVALID


@pytest.mark.parametrize(
    ("stated", "severity"),
    [({}, "ERROR"), ({"coupling_uncertainty": 0.0005}, "ERROR"), ({"coupling_uncertainty": 0.0008}, "WARNING"),
     ({"coupling_uncertainty": 0.003}, None), ({"coupling_decimals": 2}, None), ({"coupling_decimals": 3}, "ERROR")],
)  # fmt: skip
def test_asymmetric_pair_is_named_in_units_of_the_stated_noise(stated, severity):
    """A planted difference of 0.5 % at windings 4 and 7 is named; noise that explains it silences it."""
    K = 0.9 ** np.abs(np.subtract.outer(np.arange(8), np.arange(8)))
    K[3, 6] *= 1.005
    report = check(coils(K, **stated))
    findings = found(report, "ASYMMETRIC")

    assert [f.severity.value for f in findings] == ([severity] if severity else [])
    for finding in findings:
        assert finding.windings == ("w4", "w7")
    assert (report.verdict is Verdict.INVALID) == (severity == "ERROR")


def test_asymmetry_of_rounding_is_silent():
    """A matrix formed as a triple product differs from its transpose by roundings only."""
    A = np.random.default_rng(5).normal(size=(6, 6))
    L = 1e-6 * (A @ np.diag([1, 2, 3, 4, 5, 6]) @ A.T)
    L[1, 0] *= 1 + 1e-14

    assert not found(check(WindingSet(tuple("abcdef"), L)), "ASYMMETRIC")


def test_coupling_beyond_one():
    """|k| above 1 by more than its band is impossible for the pair alone, however large the set."""
    for stated, verdict in [({}, "INVALID"), ({"coupling_decimals": 1}, "UNDECIDED")]:
        report = check(coils(matrix(3, {(0, 1): -1.02}), **stated))
        assert report.verdict is Verdict[verdict]
        assert bool(found(report, "COUPLING_ABOVE_ONE")) == (verdict == "INVALID")
    report = check(coils(matrix(3, {(0, 1): -1.02})))
    assert report.culprits[0].pair == ("w1", "w2")
    assert (report.culprits[0].low, report.culprits[0].high) == pytest.approx((-1, 1))


RESISTANCES = {
    "negative": ([0.1, -0.2], "NEGATIVE_RESISTANCE"),
    "negative for all": (-0.1, "NEGATIVE_RESISTANCE"),
    "asymmetric": ([[0.1, 0.02], [0.01, 0.1]], "RESISTANCE_ASYMMETRIC"),
    "mutual too large": ([[0.1, 0.12], [0.12, 0.1]], "RESISTANCE_NOT_POSITIVE_SEMIDEFINITE"),
    "mutual without own": ([[0.0, 0.01], [0.01, 0.1]], "RESISTANCE_NOT_POSITIVE_SEMIDEFINITE"),
    "zero": (0.0, None),
    "semidefinite": ([[0.1, 0.1], [0.1, 0.1]], None),
    "one winding without": ([[0.0, 0.0], [0.0, 1e-3]], None),
}


@pytest.mark.parametrize("name", RESISTANCES)
def test_resistance_can_only_lose_power(name):
    """The resistance matrix is symmetric and positive semidefinite, zeros included."""
    resistance, code = RESISTANCES[name]
    report = check(coils(matrix(2, {(0, 1): 0.5}), resistance_ohm=resistance))

    assert [f.code for f in report.findings if f.severity is Severity.ERROR] == ([code] if code else [])
    assert report.verdict is (Verdict.INVALID if code else Verdict.VALID)


# --- what is not data is refused ----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("made", "field"),
    [
        (lambda: WindingSet(tuple("ab"), [[NAN, 0], [0, 1]]), "inductance_h[0][0]"),
        (lambda: WindingSet(tuple("ab"), [[1, np.inf], [np.inf, 1]]), "inductance_h[0][1]"),
        (lambda: coils(np.eye(2), (1e-3, NAN)), "self_inductance_h[1]"),
        (lambda: coils(matrix(2, {(0, 1): np.inf})), "coupling[0][1]"),
        (lambda: coils(np.eye(2), resistance_ohm=[0.1, NAN]), "resistance_ohm[1]"),
        (lambda: coils(np.eye(2), coupling_uncertainty=-0.1), "coupling_uncertainty"),
        (lambda: coils(np.eye(2), inductance_uncertainty_h=[[0, 0], [NAN, 0]]), "inductance_uncertainty_h[1][0]"),
    ],
)  # fmt: skip
def test_not_a_number_is_refused_by_name(made, field):
    """NaN means an unknown pair and nothing else; infinities mean nothing."""
    with pytest.raises(InvalidRequest) as error:
        check(made())

    assert error.value.violations[0].field == field


# --- unknown pairs ------------------------------------------------------------------------------------------------


def test_missing_is_not_zero():
    """k12 = k23 = 0.999, derived: k13 unknown is fine and lies in 0.996 to 1; taken as zero, λ = −0.413."""
    pairs = {(0, 1): 0.999, (1, 2): 0.999}
    report = check(coils(matrix(3, {**pairs, (0, 2): NAN})))

    assert report.verdict is Verdict.VALID
    assert found(report, "UNKNOWN_PAIR")[0].windings == ("w1", "w3")
    np.testing.assert_allclose((report.feasible_low[0, 2], report.feasible_high[0, 2]), (0.996002, 1.0), atol=1e-9)
    np.testing.assert_allclose((report.feasible_low[0, 1], report.feasible_high[0, 1]), (-1.0, 1.0), atol=1e-9)
    assert check(coils(matrix(3, pairs))).eigenvalues[0] == pytest.approx(-0.413, abs=5.1e-4)


def test_unknown_pairs_cannot_save_an_impossible_triple():
    """The known triple is indefinite: no completion is valid, and the culprits are its own pairs."""
    K = matrix(5, {(0, 1): 0.9, (0, 2): 0.9, (1, 2): 0.5})
    K[3:, :3] = K[:3, 3:] = NAN
    report = check(coils(K))

    assert report.verdict is Verdict.INVALID
    assert found(report, "NO_VALID_COMPLETION")
    np.testing.assert_allclose(report.eigenvalues[0], check(coils(K[:3, :3])).eigenvalues[0], atol=1e-12)
    assert {frozenset(c.pair) for c in report.culprits} == {
        frozenset(p) for p in (("w1", "w2"), ("w1", "w3"), ("w2", "w3"))
    }


def ring(couplings: list[float]) -> np.ndarray:
    n = len(couplings)
    K = np.where(np.eye(n) > 0, 1.0, NAN)
    for i, k in enumerate(couplings):
        K[i, (i + 1) % n] = K[(i + 1) % n, i] = k
    return K


@pytest.mark.parametrize("size", [4, 5, 6])
@pytest.mark.parametrize("excess", [-0.02, -1e-4, 1e-4, 0.02])
def test_ring_of_known_pairs(size, excess):
    """A ring is completable exactly when its largest angle arccos k does not exceed the sum of the others.

    Barrett, Johnson & Tarazaga 1993 (from memory); the condition is elementary: unit vectors round a closed path.
    """
    angles = np.linspace(0.2, 0.3, size - 1)
    report = check(coils(ring([*np.cos(angles), np.cos(angles.sum() + excess)])))

    assert report.verdict is (Verdict.INVALID if excess > 0 else Verdict.VALID)


def test_intervals_of_a_ring_cover_every_completion():
    """Derived: opposite corners of a ring of four are within the angles that the two paths between them allow."""
    a, b, c, d = 0.5, 0.7, 0.4, 0.9
    report = check(coils(ring([np.cos(a), np.cos(b), np.cos(c), np.cos(d)])))

    assert report.verdict is Verdict.VALID
    low, high = np.cos(min(a + b, c + d)), np.cos(max(abs(a - b), abs(c - d)))
    np.testing.assert_allclose((report.feasible_low[0, 2], report.feasible_high[0, 2]), (low, high), atol=1e-8)
    # a known pair, the others held and both diagonals free: its angle is at most the sum of the other three
    np.testing.assert_allclose(
        (report.feasible_low[0, 1], report.feasible_high[0, 1]), (np.cos(b + c + d), 1), atol=1e-8
    )


def test_half_stated_pair_is_used_and_said():
    """A pair given above the diagonal only is used, with a warning."""
    K = matrix(3, {(0, 1): 0.5, (1, 2): 0.5, (0, 2): 0.5})
    K[2, 0] = NAN
    report = check(coils(K))

    assert report.verdict is Verdict.VALID
    assert found(report, "HALF_STATED_PAIR")[0].windings == ("w1", "w3")
    assert not found(report, "UNKNOWN_PAIR")
