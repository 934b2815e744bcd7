"""The forecast of a batch against what its rows take."""

from __future__ import annotations

import time

import link
import numpy as np
import pytest

import interwind as iw
from interwind_service.batch.chunk import desk_of, solve_rows
from interwind_service.batch.overrides import lay_out
from interwind_service.server.batch_work import _seconds

FACTOR = 8.0  # between forecast and truth; a batch is planned by it, and a shared machine is noisy
ROWS = 10


@pytest.mark.parametrize(
    "analysis",
    [
        iw.TimeAnalysis(1e-2, 2e-7),  # 50 000 points, next to nothing each, behind what a variant costs once
        iw.TimeAnalysis(1e-4, 2e-7),
        iw.PeriodicAnalysis(1e-5, 1e-8),
        iw.FrequencyAnalysis(link.FREQUENCY_HZ, link.OBSERVE),
    ],
    ids=["many points", "few points", "periodic", "frequency"],
)
def test_forecast_is_of_the_right_size(analysis):
    """Processor seconds of some rows, forecast and spent, agree within a factor."""
    overrides, numbers = lay_out(link.network(), [iw.Vary("load", "resistance_ohm", np.linspace(5.0, 30.0, 500))])
    desk = desk_of(overrides, analysis)
    call_s, row_s = _seconds(desk, numbers)
    spent_s = []
    for _ in range(3):
        began_s = time.process_time()
        solve_rows(desk, numbers[:ROWS], 0)
        spent_s.append(time.process_time() - began_s)
    forecast_s = call_s + ROWS * row_s
    print(forecast_s / min(spent_s))
    assert min(spent_s) / FACTOR < forecast_s < FACTOR * max(spent_s)
