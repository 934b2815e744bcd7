"""Thousands of nodes: a whole call costs no more than a plain sparse factorization a frequency."""

from __future__ import annotations

import importlib.util
from pathlib import Path

import pytest

_spec = importlib.util.spec_from_file_location("frequency_sparse", Path(__file__).with_name("frequency_sparse.py"))
benchmark = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(benchmark)


@pytest.mark.long
def test_ten_thousand_unknowns_cost_a_plain_factorization_each():
    """At most 1.1 times; numbering and stamping are counted on our side alone."""
    own, plain, gap, unknowns = benchmark.measure()
    assert gap < 1e-9
    assert 9_000 < unknowns < 11_000
    assert own <= 1.1 * plain
