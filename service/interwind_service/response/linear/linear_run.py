"""A linear run from 0 to its stop: before, inside and after the window whose samples are wanted."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service.progress import report
from interwind_service.response.drive.generator import Generator
from interwind_service.response.linear.flow import Flow
from interwind_service.response.linear.propagation import Propagation
from interwind_service.response.request.recording import Window

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class LinearRun:
    """``gramian`` = ∫ y yᵀ dt over the run, ``window_gramian`` over the window; ``end`` = y at the stop, (n + g,).

    ``states`` (some, n + g): y at samples spread over the run.
    """

    gramian: FloatArray
    window_gramian: FloatArray
    end: FloatArray
    states: FloatArray

    def peak_energy(self, energy: FloatArray, stop_s: float) -> float:
        """Return the largest ½ |energy y|², ``energy`` (n, n + g), among ``states``, or its mean over the run."""
        seen = float(np.square(self.states @ energy.T).sum(axis=1).max())
        mean = float(np.sum((energy @ self.gramian) * energy)) / stop_s
        return 0.5 * max(seen, mean)


def run_linear(
    flow: Flow,
    generator: Generator,
    start: FloatArray,
    readout: FloatArray,
    take: Callable[[int, FloatArray], None],
    *,
    step_s: float,
    steps: int,
    window: Window,
) -> LinearRun:
    """Run from ``start``, the states at 0+, and hand the samples of the window to ``take``, in order.

    Parameters
    ----------
    readout : rows of the samples, shape (p, n + g).
    take : called with the number of the first step and the samples (any, p).
    """
    x = start
    total = np.zeros_like(flow.M)
    inside = total
    states = []
    end = np.concatenate((start, generator.state(np.zeros(1))[0]))
    for first, last in ((0, window.first), (window.first, window.last), (window.last, steps)):
        if first == last:
            continue
        wanted = first == window.first and last == window.last
        rows = readout if wanted else readout[:0]
        run = Propagation(flow, generator, x, rows, step_s=step_s, steps=last - first, first=first)
        done = first
        for piece in run.rows():
            if wanted:
                take(done, piece)
            done += len(piece)
            report(min(done, steps), steps)
        gramian = run.gramian()
        total = total + gramian
        inside = gramian if wanted else inside
        states.append(run.some_states())
        end = run.end
        x = end[: flow.states]
    return LinearRun(total, inside, end, np.vstack(states))
