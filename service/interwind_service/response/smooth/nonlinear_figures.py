"""Mean, RMS, peak and harmonics of a Rosenbrock run over a period or a window, from its dense output.

Gauss-Legendre rules on panels no wider than a step and short against every harmonic carry all of them.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from interwind_service.response.smooth.rosenbrock import Steps
from interwind_service.response.switched.figures import Figures, take_crests
from interwind_service.response.switched.modal_integrals import gauss_points

FloatArray = NDArray[np.float64]


class NonlinearFigures:
    """The sums from ``start_s`` to ``stop_s`` with so many harmonics of 1 / (stop − start), gathered block by block."""

    def __init__(self, observables: int, start_s: float, stop_s: float, harmonics: int) -> None:
        self.start_s, self.stop_s, self.harmonics = start_s, stop_s, harmonics
        self.omega = 2.0 * np.pi / (stop_s - start_s) * np.arange(harmonics + 1)
        self.spectrum = np.zeros((observables, harmonics + 1), dtype=complex)
        self.square, self.peak, self.at_s = (np.zeros(observables) for _ in range(3))

    def take(self, evaluate: Callable[[FloatArray], FloatArray], steps: Steps) -> None:
        """Add some steps of a stretch, along which ``evaluate`` gives the observables at instants."""
        if not len(self.square):
            return
        length_s = self.stop_s - self.start_s
        cuts = np.maximum(1, np.ceil(steps.length_s * 2.0 * self.harmonics / length_s)).astype(int)
        starts = np.repeat(steps.start_s, cuts)
        number = np.arange(len(starts)) - np.repeat(np.cumsum(cuts) - cuts, cuts)
        edges = np.append(
            starts + number * np.repeat(steps.length_s / cuts, cuts), steps.start_s[-1] + steps.length_s[-1]
        )
        edges = np.unique(np.clip(edges, self.start_s, self.stop_s))
        if len(edges) < 2:
            return

        t, weight = gauss_points(edges)
        value = evaluate(t)
        self.spectrum += value.T @ (np.exp(-1j * self.omega * t[:, None]) * weight[:, None])
        self.square += weight @ value**2
        looks = np.concatenate([edges[:1], t, edges[-1:]])
        take_crests(
            looks, np.vstack([evaluate(edges[:1]), value, evaluate(edges[-1:])]), evaluate, 0.0, self.peak, self.at_s
        )

    def figures(self, undefined: NDArray[np.bool_]) -> Figures:
        """Return the figures, NaN for what was undefined in it."""
        length_s = self.stop_s - self.start_s
        spectrum = self.spectrum / length_s
        found = Figures(
            spectrum[:, 0].real.copy(),
            np.sqrt(self.square / length_s),
            self.peak,
            self.at_s,
            2.0 * spectrum[:, 1:],
        )
        for array in (found.mean, found.rms, found.peak, found.peak_time_s, found.harmonic):
            array[undefined] = np.nan
        return found
