"""Long linear runs: whole call against scipy.signal.lsim on the same state space, in the same run."""

from __future__ import annotations

import importlib.util
from pathlib import Path

import pytest

_spec = importlib.util.spec_from_file_location("time_speed", Path(__file__).with_name("time_speed.py"))
benchmark = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(benchmark)


@pytest.mark.parametrize("name", ["step", "sine", "record"])
def test_two_hundred_thousand_steps_are_ten_times_faster(name):
    """20 states, 3 observables, energy ledger included; quiet, 60 and more, 25 to 35 for a corner at every sample."""
    own, reference, gap = benchmark.ratio(name, 200_000, 3)
    assert gap < 1e-4  # lsim takes a sine as straight lines between samples
    assert reference > 10 * own


@pytest.mark.long
@pytest.mark.parametrize("name", ["step", "sine", "record"])
def test_a_million_steps_are_twenty_five_times_faster(name):
    own, reference, _ = benchmark.ratio(name, 1_000_000, 3)
    assert reference > 25 * own
