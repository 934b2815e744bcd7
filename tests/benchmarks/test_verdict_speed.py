"""Verdict, witness and all feasible intervals within ten eigenvalue problems of the same size."""

from __future__ import annotations

import importlib.util
from pathlib import Path

import numpy as np
import pytest

from interwind_service.windings.verdict import check

_spec = importlib.util.spec_from_file_location("verdict_speed", Path(__file__).with_name("verdict_speed.py"))
benchmark = importlib.util.module_from_spec(_spec)
_spec.loader.exec_module(benchmark)


@pytest.mark.long
@pytest.mark.parametrize("size", benchmark.SIZES)
def test_verdict_takes_less_than_ten_eigenvalue_problems(size):
    """Medians of the same run; the ratio lies near 6 on a quiet machine."""
    coils = benchmark.sets(size)["possible"]
    repeats = 9 if size < 1000 else 3
    base = benchmark.median_s(lambda: np.linalg.eigvalsh(coils.coupling), repeats)

    assert benchmark.median_s(lambda: check(coils), repeats) < 10 * base
