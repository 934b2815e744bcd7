"""Switched and nonlinear networks against general stiff integrators, whole calls through the service, in one run."""

from __future__ import annotations

import importlib.util
from pathlib import Path

import pytest

import interwind as iw

_spec = importlib.util.spec_from_file_location("switching_speed", Path(__file__).with_name("switching_speed.py"))
benchmark = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(benchmark)


@pytest.fixture(scope="module")
def solver():
    with iw.connect() as client:
        yield client


@pytest.mark.long
def test_cell_lift_is_eighty_times_faster(solver):
    """100 periods against Radau at rtol 1e-7 on the smooth-diode equations; rails within 0.01 %."""
    ratio, gap = benchmark.cell_lift(solver)
    assert gap < 1e-4
    assert ratio > 80


@pytest.mark.long
def test_flyback_is_not_waited_for(solver):
    """An output that settles in 3000 periods takes at most 60, and agrees with the long wait."""
    _, periods, gap = benchmark.flyback(solver)
    assert periods <= 60
    assert gap < 1e-6


@pytest.mark.long
@pytest.mark.timeout(1800)
def test_ring_modulator_is_twice_as_fast(solver):
    """To 1e-4 of the largest voltage at 1 ms, against Radau at the same accuracy."""
    (ours, own_gap), (theirs, gap) = benchmark.ring(solver)
    assert own_gap < 1e-4
    assert gap < 1e-4
    assert 2 * ours < theirs
