"""The repair call: what it takes, what it leaves alone, what it says."""

from __future__ import annotations

import numpy as np
import pytest

from interwind.errors import InvalidRequest, InvalidWindings
from interwind.model.finding import Verdict
from interwind.model.report import RepairMethod
from interwind.model.windings import WindingSet
from interwind_service.windings.repair import repair
from interwind_service.windings.verdict import check

BROKEN = np.array([[1, 0.9, 0.9], [0.9, 1, 0.5], [0.9, 0.5, 1]])
LABELS = ("a", "b", "c")


def coupled(K: np.ndarray, **stated: object) -> WindingSet:
    return WindingSet.from_coupling(LABELS[: len(K)], np.full(len(K), 1e-4), K, **stated)


def codes(report) -> set[str]:
    return {finding.code for finding in report.findings}


@pytest.mark.parametrize("method", list(RepairMethod))
def test_a_set_that_can_exist_comes_back_bit_for_bit(method):
    """Repair of a valid set changes nothing and says so."""
    K = np.array([[1, 0.3, 0.2], [0.3, 1, 0.1], [0.2, 0.1, 1]])
    report = repair(coupled(K), method=method)

    np.testing.assert_array_equal(report.windings.coupling, K)
    assert report.changes == ()
    assert report.distance == 0.0
    assert codes(report) == {"NOTHING_TO_REPAIR"}


@pytest.mark.parametrize("method", list(RepairMethod))
@pytest.mark.parametrize("as_matrix", [False, True])
def test_inputs_stay_as_they_were(method, as_matrix):
    """The set given is left alone; the one that comes back keeps its labels, resistance and way of being stated."""
    coils = coupled(BROKEN)
    if as_matrix:
        coils = WindingSet(LABELS, coils.inductance_h, [0.1, 0.2, 0.3])
    before = coils.inductance_h.copy()
    report = repair(coils, method=method)

    np.testing.assert_array_equal(coils.inductance_h, before)
    assert report.windings.stated_as_coupling is not as_matrix
    np.testing.assert_array_equal(report.windings.resistance_ohm, coils.resistance_ohm)
    np.testing.assert_array_equal(report.windings.self_inductance_h, coils.self_inductance_h)
    assert check(report.windings).verdict is Verdict.VALID


def test_unknown_pair_is_filled_not_zeroed():
    """k12 = k23 = 0.999 and nothing for k13: 0.998001 by completion, where zero would be impossible (derived)."""
    K = np.array([[1, 0.999, np.nan], [0.999, 1, 0.999], [np.nan, 0.999, 1]])
    report = repair(coupled(K))

    assert report.windings.coupling[0, 2] == pytest.approx(0.998001, rel=1e-12)
    assert codes(report) >= {"PAIR_COMPLETED"}
    assert np.isnan(report.leakage_before_h[0, 2])
    assert report.leakage_after_h[0, 2] == pytest.approx(1e-4 * (1 - 0.998001**2), rel=1e-9)
    assert report.distance == 0.0
    zeroed = np.nan_to_num(K, nan=0.0)
    assert check(coupled(zeroed)).eigenvalues[0] == pytest.approx(-0.413, abs=5e-4)


def test_a_completion_without_evidence_is_a_guess():
    """Two windings that nothing links are completed as 0, with a warning."""
    K = np.array([[1, 0.5, np.nan], [0.5, 1, np.nan], [np.nan, np.nan, 1]])

    assert "COMPLETED_WITHOUT_EVIDENCE" in codes(repair(coupled(K)))


def test_unknown_pair_beside_a_contradiction():
    """The unknown pair and the distrusted one are both filled, and told apart."""
    K = np.eye(4)
    K[:3, :3] = BROKEN
    K[0, 3] = K[3, 0] = 0.2
    K[1, 3] = K[3, 1] = 0.2
    K[2, 3] = K[3, 2] = np.nan
    report = repair(WindingSet.from_coupling(("a", "b", "c", "d"), np.full(4, 1e-4), K))

    assert {"PAIR_DISTRUSTED", "PAIR_COMPLETED", "NEXT_READING"} <= codes(report)
    assert len(report.changes) == 2
    assert check(report.windings).verdict is Verdict.VALID


def test_trusted_pairs_are_not_distrusted():
    """With two of three pairs trusted, completion changes the third."""
    report = repair(coupled(BROKEN), trusted=[("b", "c"), ("a", "b")])

    assert [change.pair for change in report.changes] == [("a", "c")]
    low, high = 0.45 - np.sqrt(0.19 * 0.75), 0.45 + np.sqrt(0.19 * 0.75)
    assert report.changes[0].after == pytest.approx(0.5 * (low + high), rel=1e-12)


def test_two_wrong_pairs_are_not_guessed():
    """Two negative eigenvalues: no single pair cures, and completion says how to go on."""
    K = np.eye(4)
    K[0, 1] = K[1, 0] = 1.2
    K[2, 3] = K[3, 2] = 1.3
    coils = WindingSet.from_coupling(("a", "b", "c", "d"), np.full(4, 1e-4), K)
    with pytest.raises(InvalidWindings, match="set every pair you distrust to NaN") as caught:
        repair(coils)
    assert caught.value.reason == "NO_SINGLE_CULPRIT"

    K[0, 1] = K[1, 0] = K[2, 3] = K[3, 2] = np.nan
    assert repair(WindingSet.from_coupling(("a", "b", "c", "d"), np.full(4, 1e-4), K)).changes


def test_nearest_keeps_trusted_pairs_and_its_floor():
    """Trusted entries stay bit for bit, the smallest eigenvalue is the floor, the rest moves by weight."""
    report = repair(coupled(BROKEN), [("a", "b")], [1.0, 1.0, 10.0], 0.01, RepairMethod.NEAREST)
    K = report.windings.coupling

    assert K[0, 1] == 0.9
    assert np.linalg.eigvalsh(K)[0] == pytest.approx(0.01, abs=1e-12)
    assert report.distance == pytest.approx(np.linalg.norm(K - BROKEN), rel=1e-12)
    assert np.all(report.all_shorted_leakage_after_h >= 0.01 * 1e-4 * (1 - 1e-9))


def test_changes_are_in_units_of_their_uncertainty():
    """Each change over its own stated deviation, and a warning for the worst beyond two."""
    u = np.array([[0, 0.01, 0.02], [0.01, 0, 0.04], [0.02, 0.04, 0]])
    report = repair(coupled(BROKEN, coupling_uncertainty=u), method=RepairMethod.NEAREST)

    for change in report.changes:
        i, j = (LABELS.index(label) for label in change.pair)
        assert change.change_in_uncertainties == pytest.approx((change.after - change.before) / u[i, j], rel=1e-12)
    (finding,) = (f for f in report.findings if f.code == "CHANGE_BEYOND_UNCERTAINTY")
    assert finding.measured == max(abs(change.change_in_uncertainties) for change in report.changes)
    assert all(np.isnan(c.change_in_uncertainties) for c in repair(coupled(BROKEN)).changes)


def test_contradicting_trust_is_refused():
    """Three trusted pairs that cannot exist together."""
    trusted = [("a", "b"), ("a", "c"), ("b", "c")]
    with pytest.raises(InvalidWindings, match="trust fewer pairs") as caught:
        repair(coupled(BROKEN), trusted, method=RepairMethod.NEAREST)
    assert caught.value.reason == "TRUSTED_PAIRS_CONTRADICT"


def test_asymmetric_entries_are_made_equal_and_told():
    """The mean of the two entries, with the change in the table."""
    L = 1e-4 * np.array([[1, 0.5], [0.52, 1]])
    report = repair(WindingSet(("a", "b"), L))

    np.testing.assert_allclose(report.windings.inductance_h[[0, 1], [1, 0]], 0.51e-4, rtol=1e-12)
    assert [change.pair for change in report.changes] == [("a", "b")]
    assert "ASYMMETRIC" in codes(report)


NEAREST, COMPLETION = RepairMethod.NEAREST, RepairMethod.COMPLETION
BAD = [
    ({"trusted": [("a", "z")]}, "trusted[0]"),
    ({"trusted": ["ab"]}, "trusted[0]"),
    ({"trusted": [("a", "b"), ("c", "c")]}, "trusted[1]"),
    ({"weights": [1, 2], "method": NEAREST}, "weights"),
    ({"weights": [1, 0, 1], "method": NEAREST}, "weights[1]"),
    ({"floor": 1.0, "method": NEAREST}, "floor"),
    ({"floor": -0.1, "method": NEAREST}, "floor"),
    ({"floor": 0.1, "method": COMPLETION}, "floor"),
    ({"weights": [1, 1, 1], "method": COMPLETION}, "weights"),
]


@pytest.mark.parametrize(("arguments", "field"), BAD)
def test_arguments_out_of_their_domain(arguments, field):
    """A typed error that names the argument."""
    with pytest.raises(InvalidRequest) as caught:
        repair(coupled(BROKEN), **arguments)
    assert caught.value.violations[0].field == field


def test_sets_that_cannot_be_mended_so():
    """A non-positive self-inductance, and an unknown pair before the nearest set."""
    with pytest.raises(InvalidWindings, match="above zero"):
        repair(WindingSet(("a", "b"), [[1e-3, 0], [0, -1e-3]]))
    K = np.array([[1, np.nan], [np.nan, 1]])
    with pytest.raises(InvalidRequest, match="COMPLETION first"):
        repair(coupled(K), method=RepairMethod.NEAREST)
