"""Identification: every kind of reading, mixtures of them, and what comes with the fitted set."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from interwind.errors import AccuracyNotReached, InvalidRequest
from interwind.model.finding import Verdict
from interwind.model.readings import (
    EffectiveLeakage,
    InverseInductance,
    MutualInductance,
    OpenInductance,
    PairLeakage,
    SeriesInductance,
    ShortedInductance,
    VoltageRatio,
)
from interwind.model.windings import WindingSet
from interwind_service.windings.characterize import characterize
from interwind_service.windings.identify import identify
from interwind_service.windings.readings import predicted, stated_value
from interwind_service.windings.verdict import check

LABELS = ("a", "b", "c", "d")
TURNS = np.array([30.0, 12.0, 5.0, 9.0])


def tight_set(n: int = 4) -> np.ndarray:
    """L_ij = N_i N_j (150 + 3 min(z_i, z_j) + 0.3 δ_ij) nH."""
    z = np.array([0.3, 0.9, 1.4, 2.2])[:n]
    return np.outer(TURNS[:n], TURNS[:n]) * (150 + 3 * np.minimum.outer(z, z) + 0.3 * np.eye(n)) * 1e-9


def read(reading, L: np.ndarray, labels=LABELS, relative: float = 1e-3):
    """The same kind of reading with the value that L shows."""
    value, _ = predicted(reading, L, labels)
    size = relative * abs(value)
    if isinstance(reading, VoltageRatio):
        return replace(reading, ratio=value, uncertainty=size)
    if isinstance(reading, InverseInductance):
        return replace(reading, inverse_inductance_per_h=value, uncertainty_per_h=size)
    return replace(reading, inductance_h=value, uncertainty_h=size)


def pairs(labels=LABELS):
    return [(a, b) for k, a in enumerate(labels) for b in labels[k + 1 :]]


OPEN = [OpenInductance(a, 1, 1) for a in LABELS]
FORMS = {
    "open and short": OPEN + [ShortedInductance(a, (b,), 1, 1) for a, b in pairs()],
    "aiding": OPEN + [SeriesInductance(pair, True, 1, 1) for pair in pairs()],
    "opposing": OPEN + [SeriesInductance(pair, False, 1, 1) for pair in pairs()],
    "ratios both ways": OPEN[:1] + [VoltageRatio(a, b, 1, 1) for a in LABELS for b in LABELS if a != b],
    "mutual": OPEN + [MutualInductance(pair, 1, 1) for pair in pairs()],
    "pair leakages with turns": OPEN[:1]
    + [VoltageRatio("a", b, 1, 1) for b in LABELS[1:]]
    + [PairLeakage((a, b), (TURNS[LABELS.index(a)], TURNS[LABELS.index(b)]), 1, 1) for a, b in pairs()],
    "cantilever": OPEN[:1]
    + [VoltageRatio("a", b, 1, 1) for b in LABELS[1:]]
    + [EffectiveLeakage("a", pair, 1, 1) for pair in pairs()],
    "inverse matrix": [InverseInductance((a, a), 1, 1) for a in LABELS] + [InverseInductance(p, 1, 1) for p in pairs()],
    "several shorted": OPEN
    + [ShortedInductance(a, (b,), 1, 1) for a, b in pairs() if (a, b) != ("c", "d")]
    + [ShortedInductance("a", ("b", "c", "d"), 1, 1)],
}


@pytest.mark.parametrize("form", FORMS)
def test_every_form_gives_the_set_back(form):
    """Exact readings of any determined form give L to 1e-7 and the leakages to 1e-4 of themselves, chi-square 0."""
    L = tight_set()
    found = identify(LABELS, [read(reading, L) for reading in FORMS[form]])

    np.testing.assert_allclose(found.windings.inductance_h, L, rtol=1e-7)
    off = ~np.eye(4, dtype=bool)
    np.testing.assert_allclose(found.leakage_h[off], characterize(WindingSet(LABELS, L)).leakage_h[off], rtol=1e-4)
    assert found.chi_square < 1e-8
    assert found.outliers == ()
    assert found.degrees_of_freedom == len(FORMS[form]) - 10


def test_derivatives_agree_with_differences():
    """tr(S dL) against a central difference, for every kind and a random symmetric change."""
    L = tight_set()
    rng = np.random.default_rng(1)
    change = rng.normal(size=(4, 4))
    change = 1e-7 * (change + change.T) * np.sqrt(np.outer(L.diagonal(), L.diagonal()))
    for reading in [reading for form in FORMS.values() for reading in form]:
        value, S = predicted(reading, L, LABELS)
        ahead, _ = predicted(reading, L + change, LABELS)
        behind, _ = predicted(reading, L - change, LABELS)
        scale = abs(value) + abs(ahead - value)
        assert np.sum(S * change) == pytest.approx(0.5 * (ahead - behind), abs=1e-9 * scale, rel=1e-3)


def test_covariance_of_a_linear_case_in_closed_form():
    """Aiding and opposing readings and one open one: L22 = (A + O)/2 − L11, M = (A − O)/4, so by hand (JCGM 100)."""
    readings = [
        OpenInductance("a", 2e-3, 1e-5),
        SeriesInductance(("a", "b"), True, 7e-3, 4e-5),
        SeriesInductance(("a", "b"), False, 1e-3, 3e-5),
    ]
    found = identify(("a", "b"), readings)
    T = np.array([[1, 0, 0], [0, 0.25, -0.25], [-1, 0.5, 0.5]])
    expected = T @ np.diag([1e-10, 16e-10, 9e-10]) @ T.T

    np.testing.assert_allclose(found.covariance_h2, expected, rtol=1e-9, atol=1e-20)
    deviation = found.windings.inductance_uncertainty_h
    np.testing.assert_allclose(deviation[[0, 0, 1], [0, 1, 1]], np.sqrt(expected.diagonal()), rtol=1e-9)
    r = found.windings.inductance_h[0, 1] / found.windings.inductance_h[1, 1]
    c = np.array([1.0, -2.0 * r, r * r])
    np.testing.assert_allclose(found.leakage_uncertainty_h[0, 1], np.sqrt(c @ expected @ c), rtol=1e-9)


def test_error_bars_survive_the_way_to_characterize():
    """The identified set carries the deviations of its couplings: its leakage bars are near those of the fit.

    A leakage and a self-inductance both read to 1 % make a coupling that knows neither apart: up to √3 wider bars
    (derived). The verdict is sure, where entries taken as independent would leave it open.
    """
    L = tight_set()
    found = identify(LABELS, [read(reading, L, relative=0.01) for reading in FORMS["open and short"]])
    carried = characterize(found.windings).leakage_uncertainty_h

    off = ~np.eye(4, dtype=bool)
    ratio = carried[off] / found.leakage_uncertainty_h[off]
    assert 0.99 < ratio.min()
    assert ratio.max() < np.sqrt(3.0) * 1.01
    assert check(found.windings).verdict is Verdict.VALID
    entries = WindingSet(LABELS, L, inductance_uncertainty_h=found.windings.inductance_uncertainty_h)
    assert check(entries).verdict is Verdict.UNDECIDED


def test_polarity_travels_and_is_asked_for():
    """A winding turned round is found by one voltage ratio; without any sign in the readings that is said."""
    L = tight_set() * np.outer([1, -1, 1, 1], [1, -1, 1, 1])
    shorts = [read(reading, L) for reading in FORMS["open and short"]]
    without = identify(LABELS, shorts)
    assert [f.windings for f in without.findings if f.code == "POLARITY_NOT_READ"] == [LABELS]
    assert np.all(without.windings.inductance_h > 0)

    ratios = [read(VoltageRatio("a", b, 1, 1), L) for b in LABELS[1:]]
    found = identify(LABELS, shorts + ratios)
    np.testing.assert_allclose(found.windings.inductance_h, L, rtol=1e-7)
    assert "POLARITY_NOT_READ" not in {f.code for f in found.findings}


def with_error(readings, position: int, factor: float):
    return [
        replace(reading, inductance_h=reading.inductance_h * factor, uncertainty_h=reading.uncertainty_h * factor)
        if k == position
        else reading
        for k, reading in enumerate(readings)
    ]


@pytest.fixture
def redundant():
    """Consistent readings of four windings: open once, each pair short from one side twice and once from the other."""
    L = tight_set()
    shorts = [ShortedInductance(a, (b,), 1, 1) for a, b in pairs()]
    forms = OPEN + shorts + [ShortedInductance(b, (a,), 1, 1) for a, b in pairs()] + shorts
    return [read(reading, L, relative=0.01) for reading in forms]


@pytest.mark.parametrize(
    ("position", "factor", "words"),
    [
        (4, 1.2, "again"),
        (4, 1000.0, "check the unit"),
        (9, 2.0, "factor 2"),
        (5, (5.0 / 30.0) ** 2, "other side"),
        (1, 1e-3, "check the unit"),
    ],
)
def test_a_gross_error_is_named_with_its_slip(redundant, position, factor, words):
    """Reading 5 is a-b shorted, 6 is a-c (turns 30 : 5): the outlier is that one alone, with the value that fits."""
    found = identify(LABELS, with_error(redundant, position, factor))
    (outlier,) = found.outliers
    (finding,) = (f for f in found.findings if f.code == "OUTLIER")

    assert outlier.position == position
    assert words in finding.message
    assert finding.limit == pytest.approx(stated_value(redundant[position])[0], rel=0.05)


def test_an_error_that_no_windings_can_follow_is_refused_by_name(redundant):
    """A leakage a million times too small, and sure of itself, leaves no fit to report: the error names the reading."""
    with pytest.raises(AccuracyNotReached, match=r"Reading 8 of b-c .* check the unit"):
        identify(LABELS, with_error(redundant, 7, 1e-6))


def test_two_gross_errors_are_both_named(redundant):
    """Leaving one out is not enough; both are set aside."""
    found = identify(LABELS, with_error(with_error(redundant, 6, 1.5), 13, 0.6))

    assert {outlier.position for outlier in found.outliers} == {6, 13}


def test_one_reading_too_few_to_tell_which_is_wrong():
    """The same winding read twice, differently: the contradiction is said and neither is blamed."""
    readings = [
        OpenInductance("a", 1.0e-3, 1e-6),
        OpenInductance("a", 1.1e-3, 1e-6),
        OpenInductance("b", 1.0e-3, 1e-6),
        ShortedInductance("a", ("b",), 1e-4, 1e-6),
    ]
    found = identify(("a", "b"), readings)
    (finding,) = (f for f in found.findings if f.code == "READINGS_CONTRADICT")

    assert found.outliers == ()
    assert "Readings 1, 2" in finding.message


def test_two_readings_of_a_pair_that_differ_ask_for_a_third(redundant):
    """With two readings a pair nothing tells which is wrong: both are named, and the pair is to be read next."""
    found = identify(LABELS, with_error(redundant[:16], 4, 1.2))
    (finding,) = (f for f in found.findings if f.code == "READINGS_CONTRADICT")

    assert found.outliers == ()
    assert "Readings 5, 11" in finding.message
    assert found.next_reading.winding in finding.windings
    assert found.next_reading.shorted[0] in finding.windings


def test_understated_uncertainty_is_not_blamed_on_one_reading(redundant):
    """When all readings scatter three times more than stated, chi-square says so."""
    rng = np.random.default_rng(0)
    scattered = [
        replace(r, inductance_h=r.inductance_h * (1 + 0.03 * e))
        for r, e in zip(redundant, np.clip(rng.normal(size=22), -1, 1), strict=True)
    ]
    found = identify(LABELS, scattered)

    assert found.chi_square > 3 * found.degrees_of_freedom
    assert {"READINGS_CONTRADICT", "OUTLIER"} & {f.code for f in found.findings}


def test_next_reading_is_the_best_of_all_candidates():
    """Taking the suggested reading shrinks the chosen leakage more than any other short-circuit test (brute force)."""
    L = tight_set()
    readings = [read(reading, L, relative=0.01) for reading in FORMS["aiding"]]
    found = identify(LABELS, readings, aim=("a", "d"))
    after = {}
    for a in LABELS:
        for b in LABELS:
            if a != b:
                extra = read(ShortedInductance(a, (b,), 1, 1), L, relative=0.01)
                after[a, b] = identify(LABELS, [*readings, extra]).leakage_uncertainty_h[0, 3]

    best = min(after, key=after.get)
    assert isinstance(found.next_reading, ShortedInductance)
    assert {found.next_reading.winding, *found.next_reading.shorted} == set(best) == {"a", "d"}
    assert found.next_reading.inductance_h == pytest.approx(found.leakage_h[0, 3], rel=1e-9)


def test_no_next_reading_without_a_gain():
    """When everything is known ten times better than a bench reads, nothing is asked for."""
    L = tight_set()
    found = identify(LABELS, [read(reading, L, relative=1e-4) for reading in FORMS["open and short"]])

    assert found.next_reading is None


def test_cantilever_there_and_back():
    """Directly measurable parameters of four windings to L and back (Erickson & Maksimović 1998, from memory)."""
    L = tight_set()
    found = identify(LABELS, [read(reading, L) for reading in FORMS["cantilever"]])
    circuit = next(c for c in characterize(found.windings).equivalents if c.kind.name == "CANTILEVER")
    branches = {branch.windings: branch.inductance_h for branch in circuit.branches}

    for reading in FORMS["cantilever"]:
        if isinstance(reading, EffectiveLeakage):
            assert branches[reading.windings] == pytest.approx(predicted(reading, L, LABELS)[0], rel=1e-6)
    np.testing.assert_allclose(circuit.turns_ratio, L[0] / L[0, 0], rtol=1e-9)


def test_inverse_matrix_with_infinite_magnetising():
    """Rows that sum to zero have no L: refused; with one diagonal entry left out and its winding read open, solved."""
    gamma = 1e6 * np.array([[3.0, -1.0, -2.0], [-1.0, 1.5, -0.5], [-2.0, -0.5, 2.5]])
    labels = LABELS[:3]
    readings = [
        InverseInductance((labels[i], labels[j]), gamma[i, j], 1e-3 * abs(gamma[i, j]))
        for i in range(3)
        for j in range(i, 3)
    ]
    with pytest.raises(InvalidRequest, match="read that winding open instead") as caught:
        identify(labels, readings)
    assert caught.value.reason == "SINGULAR_INVERSE"

    found = identify(labels, [OpenInductance("a", 1e-3, 1e-6), *readings[1:]])
    L = found.windings.inductance_h
    np.testing.assert_allclose(np.linalg.inv(L)[1:, 1:], gamma[1:, 1:], rtol=1e-6)
    np.testing.assert_allclose(L, 1e-3, rtol=2e-3)
