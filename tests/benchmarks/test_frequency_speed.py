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


CASES = [
    (benchmark.transformer, 30, 5),
    (benchmark.transformer, 100, 12),
    (benchmark.transformer, 300, 25),
    (benchmark.ladder, 100, 12),
    (benchmark.ladder, 300, 25),
]


@pytest.mark.long
@pytest.mark.parametrize(("build", "count", "times"), CASES)
def test_many_frequencies_for_the_price_of_one(solver, build, count, times):
    """1000 frequencies over five decades, every unknown asked for: not met yet but at 300 windings, and red till then.

    Medians of calls in turn lie near 3, 11 and 28, for the ladder near 10 and 18; see the guide of the service.
    """
    network = build(count)
    every = list(solver.stamp(network).unknowns)
    own, plain, gap = benchmark.ratio(solver, network, max(3, 900 // count), every)
    assert gap < 1e-9
    assert plain > times * own


def test_a_hundred_windings(solver):
    """The plain answer and the swept one agree, the swept one comes sooner by far."""
    own, plain, gap = benchmark.ratio(solver, benchmark.transformer(100), 2)
    assert gap < 1e-9
    assert plain > 5 * own
