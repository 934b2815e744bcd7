"""Readings that cannot be used, and too few of them: each refusal names the place and what to do."""

from __future__ import annotations

import numpy as np
import pytest

from interwind.errors import InvalidRequest
from interwind.model.readings import OpenInductance, PairLeakage, ShortedInductance
from interwind_service.windings.identify import identify

LABELS = ("a", "b", "c", "d")


def open_and_short() -> list:
    """Four open inductances, then the six pairs shorted from one side, exact, of a tight set."""
    N, z = np.array([30.0, 12.0, 5.0, 9.0]), np.array([0.3, 0.9, 1.4, 2.2])
    L = np.outer(N, N) * (150 + 3 * np.minimum.outer(z, z) + 0.3 * np.eye(4)) * 1e-9
    own = L.diagonal()
    readings = [OpenInductance(label, h, 1e-3 * h) for label, h in zip(LABELS, own, strict=True)]
    for i in range(4):
        for j in range(i + 1, 4):
            h = own[i] - L[i, j] ** 2 / own[j]
            readings.append(ShortedInductance(LABELS[i], (LABELS[j],), h, 1e-3 * h))
    return readings


BAD = [
    ([], "readings", "none found"),
    (["L"], "readings[0]", "a reading is expected"),
    ([OpenInductance("e", 1, 1)], "readings[0].windings", "no winding"),
    ([OpenInductance("a", -1e-3, 1e-6)], "readings[0].inductance_h", "resonance"),
    ([OpenInductance("a", np.nan, 1e-6)], "readings[0].inductance_h", "above 0"),
    ([OpenInductance("a", 1e-3, 0.0)], "readings[0].uncertainty_h", "above 0"),
    ([OpenInductance("a", 1e-300, 1e-303)], "readings[0].inductance_h", "a size of"),
    ([OpenInductance("a", 1e-3, 1e-300)], "readings[0].uncertainty_h", "rounding would decide"),
    ([OpenInductance("a", 1e-3, 1e9)], "readings[0].uncertainty_h", "says nothing"),
    ([PairLeakage(("a", "b"), (1.0, 0.0), 1e-3, 1e-6)], "readings[0].turns", "other than 0"),
]


@pytest.mark.parametrize(("readings", "field", "words"), BAD, ids=[row[2] for row in BAD])
def test_bad_readings_are_refused_with_their_field(readings, field, words):
    """A typed error names the reading, the value found and what to do."""
    with pytest.raises(InvalidRequest, match=words) as caught:
        identify(LABELS, readings)
    assert caught.value.violations[0].field == field


@pytest.mark.parametrize(
    ("left_out", "named"), [(4, "a-b"), (9, "c-d"), (1, "b")], ids=["short a-b", "short c-d", "open b"]
)
def test_an_open_entry_is_named_with_what_to_measure(left_out, named):
    """One reading less leaves one entry open: which, and what would settle it."""
    readings = [reading for k, reading in enumerate(open_and_short()) if k != left_out]
    with pytest.raises(InvalidRequest, match="measure the inductance of") as caught:
        identify(LABELS, readings)

    assert caught.value.reason == "UNDETERMINED"
    assert named.split("-")[0] in caught.value.metadata["windings"]
    assert caught.value.metadata["open_count"] == "1"


def test_weak_coupling_is_not_settled_by_a_short():
    """At k = 0 a short-circuit reading has no slope: the pair is open, and series readings are asked for."""
    readings = [
        OpenInductance("a", 1e-3, 1e-6),
        OpenInductance("b", 1e-3, 1e-6),
        ShortedInductance("a", ("b",), 1e-3, 1e-6),
    ]
    with pytest.raises(InvalidRequest, match="series aiding and opposing"):
        identify(("a", "b"), readings)


def test_unknown_aim_is_refused():
    """The chosen leakage must be one of the set."""
    with pytest.raises(InvalidRequest, match="two different labels"):
        identify(LABELS, open_and_short(), aim=("a", "z"))
