"""Long time responses leave the worker while they are made, and are the same as if they had been kept."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw
from interwind_service import engine

OUT = iw.NodeVoltage("out")


def network() -> iw.Network:
    """A damped pair behind a step."""
    coils = iw.WindingSet(("drive", "rail"), [[1.0e-3, 0.23e-3], [0.23e-3, 60e-6]], [0.6, 0.03])
    return iw.Network(
        "chassis",
        [
            iw.VoltageSource("supply", "in", "chassis", waveform=iw.Step(10.0)),
            iw.Windings("T1", coils, {"drive": ("in", "chassis"), "rail": ("out", "chassis")}),
            iw.Resistor("load", "out", "chassis", 50.0),
        ],
    )


@pytest.fixture(scope="module")
def solver():
    with iw.connect() as client:
        yield client


def test_streamed_rows_are_the_same(solver):
    """600 000 steps: progress is told on the way, and every sample and every time has the bits of the kept answer."""
    told: list[tuple[int, int]] = []

    streamed = solver.time_response(
        network(), 6e-3, 10e-9, [OUT], progress=lambda done, total: told.append((done, total))
    )

    kept = engine.time_response(network(), 6e-3, 10e-9, [OUT])
    assert np.array_equal(streamed.samples, kept.samples)
    assert np.array_equal(streamed.time_s, kept.time_s)
    assert streamed.ledger == kept.ledger
    assert told
    assert told[-1][1] == 600_000


def test_recordings_travel(solver):
    """A window, every hundredth sample with its envelope, and figures over all samples of the window."""
    recording = iw.Recording(1e-4, 2e-4, 100, envelope=True)

    kept = solver.time_response(network(), 3e-4, 10e-9, [OUT], recording=recording)

    whole = solver.time_response(network(), 3e-4, 10e-9, [OUT])
    window = whole[OUT][10_000:20_001]
    assert kept.time_s == pytest.approx(whole.time_s[10_000:20_001:100])
    assert kept[OUT] == pytest.approx(window[::100], rel=1e-12)
    assert kept.figures.peaks[0] == pytest.approx(window[np.abs(window).argmax()], rel=1e-12)
    assert kept.highest.max() == pytest.approx(window.max(), rel=1e-12)
    assert kept.lowest.min() == pytest.approx(window.min(), rel=1e-12)
