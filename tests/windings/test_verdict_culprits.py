"""The culprit of a planted error: always listed, its interval holding the truth, and nearly always named first."""

from __future__ import annotations

import numpy as np
import pytest

from interwind.model.finding import Verdict
from interwind.model.windings import WindingSet
from interwind_service.windings.verdict import check


def misread_stack(rng: np.random.Generator) -> tuple[WindingSet, tuple[str, str], float] | None:
    """A tight stack of 4 to 8 windings with one coupling off by 0.03; None when that is not impossible.

    L_ij = N_i N_j (150 + 3 min(z_i, z_j) + 0.3 δ_ij) nH; an error that would take |k| past 1 goes the other way.
    """
    n = int(rng.integers(4, 9))
    z, turns = np.sort(rng.uniform(0.2, 3, n)), rng.integers(5, 60, n)
    L = np.outer(turns, turns) * (150 + 3 * np.minimum.outer(z, z) + 0.3 * np.eye(n)) * 1e-9
    d = np.sqrt(L.diagonal())
    K = L / np.outer(d, d)
    i, j = sorted(int(w) for w in rng.choice(n, 2, replace=False))
    truth, error = float(K[i, j]), 0.03 * rng.choice([-1, 1])
    error = -0.03 if abs(truth + error) > 1 else error
    K[i, j] = K[j, i] = truth + error
    if np.linalg.eigvalsh(K)[0] >= 0:
        return None
    labels = tuple(f"w{w + 1}" for w in range(n))
    return WindingSet.from_coupling(labels, L.diagonal(), K), (labels[i], labels[j]), truth


@pytest.mark.parametrize("seed", [1, 2])
def test_planted_error_is_named_first(seed):
    """300 random tight sets: listed with the truth inside in every one; first in 98 % at least (all when written).

    Ranking by the smallest eigenvalue of the completed matrix reaches 92 to 93 %, by the smallest change 83 to 86 %.
    """
    rng = np.random.default_rng(seed)
    first = counted = 0
    while counted < 300:
        drawn = misread_stack(rng)
        if drawn is None:
            continue
        counted += 1
        coils, pair, truth = drawn
        report = check(coils)
        assert report.verdict is Verdict.INVALID
        (culprit,) = [c for c in report.culprits if c.pair == pair]
        assert culprit.low <= truth <= culprit.high
        assert culprit.suggested == pytest.approx(0.5 * (culprit.low + culprit.high), abs=1e-15)
        first += report.culprits[0].pair == pair
    assert first >= 0.98 * 300


def test_dots_do_not_change_the_ranking():
    """Windings turned round: the same pairs in the same order."""
    rng = np.random.default_rng(3)
    drawn = None
    while drawn is None:
        drawn = misread_stack(rng)
    coils = drawn[0]
    dots = rng.choice([-1.0, 1.0], coils.size)
    turned = WindingSet.from_coupling(coils.labels, coils.self_inductance_h, coils.coupling * np.outer(dots, dots))

    assert [c.pair for c in check(coils).culprits] == [c.pair for c in check(turned).culprits]


def test_suggested_value_has_the_largest_determinant():
    """The determinant over the interval is greatest at the value suggested (Grone, Johnson, Sá & Wolkowicz 1984)."""
    rng = np.random.default_rng(4)
    drawn = None
    while drawn is None:
        drawn = misread_stack(rng)
    culprit = check(drawn[0]).culprits[0]
    i, j = (drawn[0].index(label) for label in culprit.pair)
    values = np.linspace(culprit.low, culprit.high, 1001)
    determinants = []
    for value in values:
        K = drawn[0].coupling.copy()
        K[i, j] = K[j, i] = value
        determinants.append(np.linalg.det(K))

    assert values[np.argmax(determinants)] == pytest.approx(culprit.suggested, abs=2e-3 * (culprit.high - culprit.low))


def test_whole_winding_misread_is_blamed_as_a_winding():
    """Two couplings of one winding wrong: no pair cures, leaving that winding out does, and it carries most blame."""
    n = 6
    K = 0.99 + 0.01 * np.eye(n)
    K[2, 0] = K[0, 2] = 0.90
    K[2, 4] = K[4, 2] = 0.91
    report = check(WindingSet.from_coupling([f"w{w}" for w in range(n)], np.full(n, 1e-3), K))

    assert report.culprits == ()
    assert [f.windings for f in report.findings if f.code == "CULPRIT_WINDING"] == [("w2",)]
    assert int(np.argmax(report.blame)) == 2
    assert report.blame.sum() == pytest.approx(1.0)


def test_many_culprits_are_bounded_and_said():
    """A weak contradiction in a large set may be cured by more pairs than anybody reads."""
    n = 80
    K = np.eye(n) + (np.ones((n, n)) - np.eye(n)) * (-1.0 / (n - 1) - 1e-4)
    report = check(WindingSet.from_coupling([f"w{w}" for w in range(n)], np.full(n, 1e-3), K))
    (finding,) = [f for f in report.findings if f.code == "CULPRITS_TRUNCATED"]

    assert finding.measured == n * (n - 1) / 2
    assert finding.limit == len(report.culprits)
