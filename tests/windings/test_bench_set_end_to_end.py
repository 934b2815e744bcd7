"""One converter transformer from the bench table to a set that can be trusted, by way of the client and its server."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw
from interwind.model.connection import InParallel, InSeries
from interwind.model.readings import OpenInductance, ReadingContext, ShortedInductance

LABELS = ("1", "2", "3", "4", "5")
OWN_H = np.array([1104, 22.74, 10.19, 10.26, 5.816]) * 1e-6
TRUE_OWN_H = np.array([1103.9112, 22.7448, 10.1856, 10.2624, 5.8158]) * 1e-6
# Short-circuit tests, first winding driven, second shorted, µH.
SHORT_UH = {
    "12": 13.975190883, "13": 22.193370028, "14": 30.288545557, "15": 38.263458496, "23": 0.24289764373,
    "24": 0.41129354537, "25": 0.57718774373, "34": 0.10796083567, "35": 0.18281795110, "45": 0.13840753772,
}  # fmt: skip


@pytest.fixture(scope="module")
def solver():
    """A client of a real server."""
    with iw.connect() as client:
        yield client


@pytest.fixture(scope="module")
def bench() -> iw.WindingSet:
    K = np.eye(5)
    K[np.triu_indices(5, 1)] = [0.994, 0.990, 0.986, 0.983, 0.995, 0.991, 0.987, 0.995, 0.962, 0.993]
    return iw.WindingSet.from_coupling(LABELS, OWN_H, np.triu(K) + np.triu(K, 1).T, coupling_decimals=3)


def test_from_table_to_trust(solver, bench):
    """Judge, blame, mend, read again, characterize: the numbers of each step (derived by second methods)."""
    verdict = solver.check(bench)
    assert verdict.verdict is iw.Verdict.INVALID
    np.testing.assert_allclose(verdict.eigenvalues, [-0.00990, 0.00493, 0.01555, 0.03898, 4.95045], rtol=0, atol=5e-6)
    assert [culprit.pair for culprit in verdict.culprits] == [("3", "5")]
    assert (verdict.culprits[0].low, verdict.culprits[0].high) == pytest.approx((0.98099, 0.99811), abs=5e-6)

    completed = solver.repair(bench)
    assert completed.changes[0].pair == ("3", "5")
    assert completed.changes[0].after == pytest.approx(0.98955, abs=5e-6)
    nearest = solver.repair(bench, floor=1e-6, method=iw.RepairMethod.NEAREST)
    assert len(nearest.changes) == 10

    readings = [OpenInductance(label, own, 1e-3 * own) for label, own in zip(LABELS, TRUE_OWN_H, strict=True)]
    readings += [ShortedInductance(p[0], (p[1],), 1e-6 * uh, 1e-8 * uh) for p, uh in SHORT_UH.items()]
    found = solver.identify(LABELS, readings)
    assert found.windings.coupling[2, 4] == pytest.approx(0.99099, abs=5e-6)
    again = solver.check(found.windings)
    assert again.eigenvalues[0] == pytest.approx(0.00388, abs=5e-6)

    shorted = solver.characterize(found.windings).all_shorted_leakage_h[0]
    seen = [shorted, completed.all_shorted_leakage_after_h[0], nearest.all_shorted_leakage_after_h[0]]
    assert seen == pytest.approx([13.7e-6, 13.0e-6, 0.034e-6], rel=0.02)


def test_context_and_connections_travel(solver):
    """A reading with its context and a set with its connections give through the wire what they give beside it."""
    context = ReadingContext(1e5, parallel_capacitance_f=60e-12)
    found = solver.identify(("a",), [OpenInductance("a", 1.0243e-3, 1e-6, context)])
    assert found.windings.inductance_h[0, 0] == pytest.approx(1.0000e-3, abs=5e-8)
    assert [finding.code for finding in found.findings] == ["READING_CORRECTED"]

    coils = iw.WindingSet(("a", "b", "c"), 1e-3 * (0.4 * np.eye(3) + 0.6), [0.1, 0.2, 0.1])
    answer = solver.characterize(coils, [InSeries("s", ("a", "b")), InParallel("p", ("s", "c"))], [0.0, 50.0])
    assert answer.windings.labels == ("p",)
    (sharing,) = answer.sharing
    np.testing.assert_allclose(sharing.share[0], [0.25, 0.75], rtol=1e-12)
    assert sharing.windings == ("s", "c")


def test_the_next_reading_follows_the_leakage_asked_for(solver):
    """Asked for 1-4 the answer shorts 1 and 4, asked for 2-5 it shorts 2 and 5."""
    readings = [OpenInductance(label, own, 1e-3 * own) for label, own in zip(LABELS, TRUE_OWN_H, strict=True)]
    readings += [ShortedInductance(p[0], (p[1],), 1e-6 * uh, 5e-8 * uh) for p, uh in SHORT_UH.items()]
    for aim in (("1", "4"), ("2", "5")):
        following = solver.identify(LABELS, readings, aim).next_reading
        assert {following.winding, *following.shorted} == set(aim)


def test_errors_come_back_as_they_were(solver, bench):
    """The same classes, reasons and field paths on this side of the wire."""
    with pytest.raises(iw.InvalidRequest) as caught:
        solver.identify(LABELS, [OpenInductance("1", 1e-3, 1e-6)])
    assert caught.value.reason == "UNDETERMINED"
    with pytest.raises(iw.InvalidWindings):
        solver.characterize(bench)
    with pytest.raises(iw.InvalidRequest) as caught:
        solver.repair(bench, trusted=[("1", "9")])
    assert caught.value.violations[0].field == "trusted[0]"
