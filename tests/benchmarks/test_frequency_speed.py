"""Many frequencies: whole call against one `numpy.linalg.solve` a frequency on the matrices of `stamp`."""

from __future__ import annotations

import importlib.util
from pathlib import Path

import pytest

import interwind as iw

_spec = importlib.util.spec_from_file_location("frequency_speed", Path(__file__).with_name("frequency_speed.py"))
benchmark = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(benchmark)


@pytest.fixture(scope="module")
def solver():
    with iw.connect() as client:
        yield client


SHORT = "four to five times: what is left is Python per element, and three messages of an answer"
EDGE = "11 to 14 times for 100 sections and 20 to 27 for 300, as the machine allows"
CASES = [
    pytest.param(benchmark.transformer, 30, 5, marks=pytest.mark.xfail(reason=SHORT, strict=False)),
    (benchmark.transformer, 100, 12),
    (benchmark.transformer, 300, 25),
    pytest.param(benchmark.ladder, 100, 12, marks=pytest.mark.xfail(reason=EDGE, strict=False)),
    pytest.param(benchmark.ladder, 300, 25, marks=pytest.mark.xfail(reason=EDGE, strict=False)),
]


@pytest.mark.long
@pytest.mark.parametrize(("build", "count", "times"), CASES)
def test_many_frequencies_for_the_price_of_one(solver, build, count, times):
    """1000 frequencies over five decades, two observables."""
    own, plain, gap = benchmark.ratio(solver, build(count), max(3, 900 // count))
    assert gap < 1e-9
    assert plain > times * own


def test_a_hundred_windings(solver):
    """The plain answer and the swept one agree, the swept one comes sooner by far."""
    own, plain, gap = benchmark.ratio(solver, benchmark.transformer(100), 2)
    assert gap < 1e-9
    assert plain > 5 * own
