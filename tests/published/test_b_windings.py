"""Area B, windings: textbook values of coupled coils, through the public client where it reaches them."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw
from interwind.model.characterization import EquivalentKind
from interwind.model.connection import InParallel, InSeries
from interwind.model.readings import OpenInductance, SeriesInductance, ShortedInductance


def pair(first_h: float, second_h: float, k: float) -> iw.WindingSet:
    return iw.WindingSet.from_coupling(("one", "two"), [first_h, second_h], [[1.0, k], [k, 1.0]])


def joined(solver, coils, connection) -> float:
    """The inductance of all windings of ``coils`` joined into one."""
    set_ = solver.characterize(coils, [connection]).windings
    assert set_.labels == ("all",)
    return float(set_.inductance_h[0, 0])


def test_b07_tee_and_pi(solver):
    """B-07, from memory (Alexander & Sadiku, ch. 13, Example 13.5): T 8, 2, 2 H; π 18, 4.5, 18 H; exact."""
    coils = iw.WindingSet(("one", "two"), [[10.0, 2.0], [2.0, 4.0]])
    circuits = {circuit.kind: circuit for circuit in solver.characterize(coils).equivalents}

    def legs(kind):
        return {branch.windings: branch.inductance_h for branch in circuits[kind].branches}

    assert legs(EquivalentKind.T) == {("one",): 8.0, ("two",): 2.0, (): 2.0}
    expected = {("one",): 18.0, ("two",): 4.5, ("one", "two"): 18.0}
    assert legs(EquivalentKind.PI) == pytest.approx(expected, rel=1e-14)


def test_b15_three_coils_in_series(solver):
    """B-15, from memory (Alexander & Sadiku, Problem 13.2, early editions), recomputed: 22 H and the eigenvalues."""
    coils = iw.WindingSet(("a", "b", "c"), [[10.0, 6.0, -4.0], [6.0, 12.0, -6.0], [-4.0, -6.0, 8.0]])

    assert joined(solver, coils, InSeries("all", ("a", "b", "c"))) == pytest.approx(22.0, abs=1e-8)
    expected = [3.64476644, 5.32215659, 21.03307697]
    np.testing.assert_allclose(solver.check(coils).eigenvalues_h, expected, rtol=0, atol=1e-8)


@pytest.mark.parametrize(
    ("first_h", "aiding_h", "opposing_h", "second_h", "mutual_h", "k"),
    [
        # B-16, from memory (Alexander & Sadiku, Problem 13.3): L1 = 3 L2 and L1 + L2 = (250 + 150) / 2 mH give 150 mH.
        (0.150, 0.250, 0.150, 0.050, 0.025, 0.288675134595),
        # B-20, looked up: collegedunia.com question 68300b9c…: equal coils, L = (14 + 6) / 4 H.
        (5.0, 14.0, 6.0, 5.0, 2.0, 0.4),
    ],
    ids=["B-16", "B-20"],
)
def test_aiding_and_opposing_readings(solver, first_h, aiding_h, opposing_h, second_h, mutual_h, k):
    """Series readings and one self-inductance give the other, the mutual inductance and the coupling; exact."""
    readings = [
        OpenInductance("one", first_h, 1e-3 * first_h),
        SeriesInductance(("one", "two"), True, aiding_h, 1e-3 * aiding_h),
        SeriesInductance(("one", "two"), False, opposing_h, 1e-3 * opposing_h),
    ]
    found = solver.identify(("one", "two"), readings)
    L = found.windings.inductance_h

    np.testing.assert_allclose([L[1, 1], L[0, 1]], [second_h, mutual_h], rtol=1e-9)
    np.testing.assert_allclose(found.windings.coupling[0, 1], k, rtol=1e-9)
    # M = (L_a − L_o) / 4, so its deviation is √(u_a² + u_o²) / 4 (derived).
    deviation = np.hypot(1e-3 * aiding_h, 1e-3 * opposing_h) / 4.0
    np.testing.assert_allclose(np.sqrt(found.covariance_h2[1, 1]), deviation, rtol=1e-9)
    assert joined(solver, found.windings, InSeries("all", ("one", "two"))) == pytest.approx(aiding_h, rel=1e-9)
    turned = InSeries("all", ("one", "two"), (True, False))
    assert joined(solver, found.windings, turned) == pytest.approx(opposing_h, rel=1e-9)


def test_b17_aiding_and_parallel(solver):
    """B-17, from memory (Alexander & Sadiku, Problem 13.5): 25 and 60 mH, k = 0.5: 123.729833 and 24.313723 mH."""
    coils = pair(25e-3, 60e-3, 0.5)

    assert joined(solver, coils, InSeries("all", ("one", "two"))) == pytest.approx(123.729833e-3, rel=1e-6)
    assert joined(solver, coils, InParallel("all", ("one", "two"))) == pytest.approx(24.313723e-3, rel=1e-6)


@pytest.mark.parametrize(
    ("first_h", "second_h", "k", "aiding", "printed_h", "recomputed_h"),
    [
        (835e-6, 2.44e-3, 0.922, False, 643e-6, 642.920e-6),
        (30e-6, 50e-6, 0.5, True, 118.8e-6, 118.730e-6),
    ],
    ids=["10-5", "10-6"],
)
def test_b18_series_with_mixed_units(solver, first_h, second_h, k, aiding, printed_h, recomputed_h):
    """B-18, looked up: krabitvrepair.com/asp/ebasic_44.asp, Problems 10-5 and 10-6; 0.1 % of the print."""
    series = joined(solver, pair(first_h, second_h, k), InSeries("all", ("one", "two"), (True, aiding)))

    assert series == pytest.approx(printed_h, rel=1e-3)
    assert series == pytest.approx(recomputed_h, rel=1e-5)


@pytest.mark.parametrize(
    ("mutual_h", "aiding_h", "opposing_h"), [(8e-3, 58.5e-3, 26.5e-3), (10e-3, 62.5e-3, 22.5e-3)], ids=["k<1", "k=1"]
)
def test_b19_effective_inductance(solver, mutual_h, aiding_h, opposing_h):
    """B-19, looked up: fliphtml5.com/bcwsu/favi, Example 2.18: 2.5 and 40 mH, M = 8 or 10 mH; exact."""
    coils = iw.WindingSet(("one", "two"), [[2.5e-3, mutual_h], [mutual_h, 40e-3]])

    assert joined(solver, coils, InSeries("all", ("one", "two"))) == pytest.approx(aiding_h, rel=1e-14)
    turned = InSeries("all", ("one", "two"), (True, False))
    assert joined(solver, coils, turned) == pytest.approx(opposing_h, rel=1e-14)


@pytest.mark.parametrize(("k", "shorted_h"), [(0.1, 99e-6), (0.5, 75e-6), (0.9, 19e-6), (0.99, 1.99e-6)])
def test_b21_open_and_short(solver, k, shorted_h):
    """B-21, derived (Terman; Hayes et al.): L_sc = L1 (1 − k²), L1 = 100 µH, and back: k = √(1 − L_sc / L_oc)."""
    coils = pair(100e-6, 400e-6, k)
    readings = [
        OpenInductance("one", 100e-6, 1e-7),
        OpenInductance("two", 400e-6, 4e-7),
        ShortedInductance("one", ("two",), shorted_h, 1e-3 * shorted_h),
    ]

    assert solver.characterize(coils).leakage_h[0, 1] == pytest.approx(shorted_h, rel=1e-13)
    assert solver.identify(("one", "two"), readings).windings.coupling[0, 1] == pytest.approx(k, rel=1e-9)


def test_b28_tapped_winding(solver):
    """B-28, derived: parts 100 and 400 µH, k = 1: total 900 µH, open tap voltage (L1 + M) / (L1 + L2 + 2 M) = 1/3."""
    connections = [InSeries("whole", ("one", "two")), InSeries("tap", ("one",))]
    L = solver.characterize(pair(100e-6, 400e-6, 1.0), connections).windings.inductance_h

    np.testing.assert_allclose(L[0, 0], 900e-6, rtol=1e-14)
    np.testing.assert_allclose(L[0, 1] / L[0, 0], 1.0 / 3.0, rtol=1e-14)
