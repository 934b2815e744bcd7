"""Samples of a switched or nonlinear run on their way out: recorded, handed on, and looked at for their cautions."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest
from interwind.model.observables import Observable
from interwind.model.recording import Recording
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.response.request.cautions import Stress
from interwind_service.response.request.recording import Recorder, Window, window_of
from interwind_service.response.switched.observed_stress import larger_of, observed_stress
from interwind_service.rows import RowSink

FloatArray = NDArray[np.float64]


class Handover:
    """Takes all samples of a run in order; those of the window are kept, or go to a sink as they are made."""

    def __init__(
        self,
        topology: Topology,
        observables: Sequence[Observable],
        window: Window,
        *,
        envelope: bool = False,
        sink: RowSink | None = None,
    ) -> None:
        self.topology, self.observables, self.window, self.sink = topology, tuple(observables), window, sink
        self.recorder = Recorder(window, len(self.observables), envelope=envelope, keep=sink is None)
        self.stress = Stress()

    def take(self, first: int, rows: FloatArray) -> None:
        """Take the samples of steps first, first + 1, .. shape (any, observables)."""
        self.stress = larger_of(self.stress, observed_stress(self.topology, self.observables, rows))
        low = max(self.window.first, first)
        rows = rows[low - first : max(0, self.window.last + 1 - first)]
        if len(rows):
            self.recorder.take(low, rows)
            if self.sink is not None:
                self.sink(low, rows)

    def time_s(self, step_s: float) -> FloatArray:
        """Return the instants of the samples kept, s."""
        return step_s * (self.window.first + self.window.every * np.arange(len(self.recorder.samples)))


def window_held(recording: Recording | None, step_s: float, steps: int, columns: int, *, streamed: bool) -> Window:
    """Return the window of a recording, None for the whole run.

    Raises
    ------
    InvalidRequest : as `window_of`; more values than a response may hold, unless they are ``streamed``.
    """
    window = window_of(recording or Recording(), step_s, steps)
    if not streamed and window.kept * columns > tol.MAX_RESPONSE_VALUES:
        raise InvalidRequest.at(
            "observe",
            f"{window.kept} samples of {columns} observables found; at most {tol.MAX_RESPONSE_VALUES} values are "
            "held; observe less, choose a larger step_s, or record a window or every so many samples",
        )
    return window
