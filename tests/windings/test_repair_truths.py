"""Repairs with their numbers: what completion and the nearest set do to leakage, on two sets of our own."""

from __future__ import annotations

import numpy as np
import pytest

from interwind.model.finding import Verdict
from interwind.model.readings import MutualInductance, OpenInductance, ShortedInductance
from interwind.model.report import RepairMethod
from interwind.model.windings import WindingSet
from interwind_service.windings.characterize import characterize
from interwind_service.windings.identify import identify
from interwind_service.windings.repair import repair
from interwind_service.windings.verdict import check

LABELS = ("1", "2", "3", "4", "5")
OWN_H = np.array([1104, 22.74, 10.19, 10.26, 5.816]) * 1e-6


def symmetric(upper: list[float]) -> np.ndarray:
    n = int((1 + np.sqrt(1 + 8 * len(upper))) / 2)
    K = np.eye(n)
    K[np.triu_indices(n, 1)] = upper
    return np.triu(K) + np.triu(K, 1).T


def bench() -> WindingSet:
    """The set as the bench typed it: five flyback windings, one coupling misread."""
    K = symmetric([0.994, 0.990, 0.986, 0.983, 0.995, 0.991, 0.987, 0.995, 0.962, 0.993])
    return WindingSet.from_coupling(LABELS, OWN_H, K, coupling_decimals=3)


def truth() -> WindingSet:
    """L_ij = N_i N_j (155 + 3 min(z_i, z_j) + 0.25 δ_ij) nH, and M45 × 0.9985."""
    N, z = np.array([84, 12, 8, 8, 6.0]), np.array([0.4, 0.9, 1.3, 1.7, 2.1])
    L = np.outer(N, N) * (155 + 3 * np.minimum.outer(z, z) + 0.25 * np.eye(5)) * 1e-9
    L[3, 4] = L[4, 3] = 0.9985 * L[3, 4]
    return WindingSet(LABELS, L)


def codes(report) -> dict[str, tuple[str, ...]]:
    return {finding.code: finding.windings for finding in report.findings}


def test_completion_of_the_bench_set():
    """Pair 3-5 is distrusted and becomes 0.98955; nothing else moves by a bit; next comes its short-circuit test."""
    report = repair(bench())
    (change,) = report.changes

    assert (change.pair, change.before) == (("3", "5"), 0.962)
    assert change.after == pytest.approx(0.98955, abs=5e-6)
    assert change.change_in_uncertainties == pytest.approx(0.02755 / (0.0005 / np.sqrt(3)), rel=1e-3)
    untouched = np.ones((5, 5), dtype=bool)
    untouched[2, 4] = untouched[4, 2] = False
    np.testing.assert_array_equal(report.windings.inductance_h[untouched], bench().inductance_h[untouched])
    assert codes(report)["NEXT_READING"] == codes(report)["PAIR_DISTRUSTED"] == ("3", "5")
    assert check(report.windings).verdict is not Verdict.INVALID


def test_all_shorted_leakage_tells_the_repairs_apart():
    """Winding 1, all others shorted: 13.7 µH in truth, 13.0 after completion, 0.034 for the nearest (floor 1e-6)."""
    completed = repair(bench())
    nearest = repair(bench(), method=RepairMethod.NEAREST, floor=1e-6)
    true = characterize(truth())

    found = [true.all_shorted_leakage_h[0], completed.all_shorted_leakage_after_h[0]]
    np.testing.assert_allclose(found, [13.715e-6, 12.998e-6], rtol=0, atol=5e-10)
    assert nearest.all_shorted_leakage_after_h[0] == pytest.approx(0.034e-6, abs=5e-10)
    assert np.all(np.isnan(completed.all_shorted_leakage_before_h))
    assert "FLOOR_DECIDES_LEAKAGE" in codes(nearest)
    assert "FLOOR_DECIDES_LEAKAGE" not in codes(completed)
    # What the floor is worth in henries: no all-shorted leakage falls below f L_ii (derived from λ_min).
    assert np.all(nearest.all_shorted_leakage_after_h >= (1e-6 - 1e-12) * OWN_H)


def test_bench_set_is_rebuilt_from_its_ten_short_circuit_readings():
    """Five open and ten short readings, one side each, give K to 1e-6 and k35 = 0.99099."""
    true = truth()
    printed_h = {
        "12": 13.975190883e-6, "13": 22.193370028e-6, "14": 30.288545557e-6, "15": 38.263458496e-6,
        "23": 0.24289764373e-6, "24": 0.41129354537e-6, "25": 0.57718774373e-6, "34": 0.10796083567e-6,
        "35": 0.18281795110e-6, "45": 0.13840753772e-6,
    }  # fmt: skip
    readings = [OpenInductance(label, h, 1e-3 * h) for label, h in zip(LABELS, true.self_inductance_h, strict=True)]
    readings += [ShortedInductance(pair[0], (pair[1],), h, 0.01 * h) for pair, h in printed_h.items()]
    found = identify(LABELS, readings)

    np.testing.assert_allclose(found.windings.coupling, true.coupling, rtol=0, atol=1e-6)
    assert found.windings.coupling[2, 4] == pytest.approx(0.99099, abs=1e-5)
    assert check(found.windings).eigenvalues[0] == pytest.approx(0.00388, abs=5e-6)
    assert (found.degrees_of_freedom, len(found.outliers)) == (0, 0)


def test_bench_table_as_readings_names_the_pair_and_the_next_reading():
    """The same table as open and mutual readings: no windings show it, 3-5 is to blame and to be shorted next."""
    coils = bench()
    root = np.sqrt(np.outer(OWN_H, OWN_H))
    readings = [OpenInductance(label, h, 1e-3 * h) for label, h in zip(LABELS, OWN_H, strict=True)]
    readings += [
        MutualInductance((LABELS[i], LABELS[j]), coils.inductance_h[i, j], 5e-4 * root[i, j])
        for i in range(5)
        for j in range(i + 1, 5)
    ]
    found = identify(LABELS, readings)

    assert found.outliers[0].windings == ("3", "5")
    assert codes(found)["READINGS_IMPOSSIBLE"] == ("3", "5")
    assert isinstance(found.next_reading, ShortedInductance)
    assert (found.next_reading.winding, found.next_reading.shorted) == ("3", ("5",))
    # The value to expect is the completion's: L33 (1 − 0.98955²).
    assert found.next_reading.inductance_h == pytest.approx(OWN_H[2] * (1 - 0.98955**2), rel=1e-3)


def test_distrusted_pair_is_what_to_read_next():
    """With 3-5 known only loosely, its short-circuit test is the most telling next reading (c-optimal)."""
    true = truth()
    root = np.sqrt(np.outer(true.self_inductance_h, true.self_inductance_h))
    readings = [OpenInductance(label, h, 1e-3 * h) for label, h in zip(LABELS, true.self_inductance_h, strict=True)]
    readings += [
        MutualInductance(
            (LABELS[i], LABELS[j]), true.inductance_h[i, j], (5e-3 if (i, j) == (2, 4) else 5e-4) * root[i, j]
        )
        for i in range(5)
        for j in range(i + 1, 5)
    ]
    found = identify(LABELS, readings)

    assert isinstance(found.next_reading, ShortedInductance)
    assert {found.next_reading.winding, *found.next_reading.shorted} == {"3", "5"}


def test_one_misread_coupling_of_four():
    """Four windings, k24 = 0.973 for 0.993: completion stays near the truth, the nearest set loses the leakage.

    Leakages 1-2, 1-3, 1-4, the ratio of the leakages 2-4 (372 to 113 nH), and winding 1 with all others shorted
    (derived by a second method). The first self-inductance comes back from those leakages, hence one unit of the last
    digit.
    """
    K = symmetric([0.996, 0.993, 0.990, 0.996, 0.973, 0.996])
    own = 490e-6 / 65 * np.array([64.0, 1.0, 1.0, 1.0])
    coils = WindingSet.from_coupling(("1", "2", "3", "4"), own, K)
    completed, nearest = repair(coils), repair(coils, method=RepairMethod.NEAREST, floor=1e-6)

    for report, from_first_h in ((completed, [3.85e-6, 6.73e-6, 9.60e-6]), (nearest, [5.41e-6, 4.85e-6, 10.94e-6])):
        np.testing.assert_allclose(report.leakage_after_h[0, 1:], from_first_h, rtol=0, atol=1e-8)
    ratio = nearest.leakage_after_h[1, 3] / completed.leakage_after_h[1, 3]
    assert ratio == pytest.approx(372 / 113, rel=0.5 / 113)
    assert completed.changes[0].pair == ("2", "4")
    assert completed.all_shorted_leakage_after_h[0] == pytest.approx(3.77e-6, abs=1e-8)
    assert nearest.all_shorted_leakage_after_h[0] == pytest.approx(0.0041e-6, abs=5e-11)
    assert nearest.distance < completed.distance
