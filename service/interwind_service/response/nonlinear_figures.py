"""Mean, RMS, peak and harmonics over one period of a Rosenbrock run, from its dense output.

Gauss-Legendre rules on panels no wider than a step and short against every harmonic carry all of them.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.figures import Figures, take_crests
from interwind_service.response.modal_integrals import gauss_points
from interwind_service.response.nonlinear import Reader
from interwind_service.response.rosenbrock import Steps

FloatArray = NDArray[np.float64]


class NonlinearFigures:
    """The sums of one period, gathered block by block."""

    def __init__(self, observables: int, period_s: float) -> None:
        self.period_s = period_s
        self.omega = 2.0 * np.pi / period_s * np.arange(tol.HARMONICS + 1)
        self.spectrum = np.zeros((observables, tol.HARMONICS + 1), dtype=complex)
        self.square, self.peak, self.at_s = (np.zeros(observables) for _ in range(3))

    def take(self, reader: Reader, steps: Steps) -> None:
        """Add some steps of a stretch."""
        if not len(self.square):
            return
        cuts = np.maximum(1, np.ceil(steps.length_s * 2.0 * tol.HARMONICS / self.period_s)).astype(int)
        starts = np.repeat(steps.start_s, cuts)
        number = np.arange(len(starts)) - np.repeat(np.cumsum(cuts) - cuts, cuts)
        edges = np.append(
            starts + number * np.repeat(steps.length_s / cuts, cuts), steps.start_s[-1] + steps.length_s[-1]
        )

        def evaluate(t: FloatArray) -> FloatArray:
            return reader.along(steps, t)

        t, weight = gauss_points(edges)
        value = evaluate(t)
        self.spectrum += value.T @ (np.exp(-1j * self.omega * t[:, None]) * weight[:, None])
        self.square += weight @ value**2
        looks = np.concatenate([edges[:1], t, edges[-1:]])
        take_crests(
            looks, np.vstack([evaluate(edges[:1]), value, evaluate(edges[-1:])]), evaluate, 0.0, self.peak, self.at_s
        )

    def figures(self, undefined: NDArray[np.bool_]) -> Figures:
        """Return the figures of the period, NaN for what was undefined in it."""
        spectrum = self.spectrum / self.period_s
        found = Figures(
            spectrum[:, 0].real.copy(),
            np.sqrt(self.square / self.period_s),
            self.peak,
            self.at_s,
            2.0 * spectrum[:, 1:],
        )
        for array in (found.mean, found.rms, found.peak, found.peak_time_s, found.harmonic):
            array[undefined] = np.nan
        return found
