"""Large dense sets: one reduction serves a thousand frequencies, for no more than fifteen complex factorizations."""

from __future__ import annotations

import importlib.util
import sys
from pathlib import Path

import pytest

_spec = importlib.util.spec_from_file_location("frequency_large", Path(__file__).with_name("frequency_large.py"))
benchmark = importlib.util.module_from_spec(_spec)
sys.modules["frequency_large"] = benchmark
_spec.loader.exec_module(benchmark)


def test_three_hundred_coupled_windings_agree_with_direct_points():
    """Over five decades, at twenty of a thousand frequencies; passive and reciprocal."""
    found = benchmark.measure(300, repeats=1)
    assert found.error < 1e-9
    assert found.answer.evidence.passivity_margin > 0.0
    assert found.answer.evidence.reciprocity_error < 1e-9


@pytest.mark.long
def test_a_thousand_coupled_windings_cost_fifteen_factorizations():
    """Near ten on a quiet machine."""
    found = benchmark.measure(1000)
    assert found.error < 1e-6
    assert found.call_s < 15 * found.factor_s
