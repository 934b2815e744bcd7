"""Mean, RMS, peak and harmonics over one period of a linear network."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.drive.generator import Generator
from interwind_service.response.linear.exponential import Ladder
from interwind_service.response.linear.flow import Flow
from interwind_service.response.linear.readout import Readout
from interwind_service.response.switched.figures import Figures

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def figures_over_period(
    flow: Flow,
    generator: Generator,
    readout: Readout,
    rows: FloatArray,
    states: FloatArray,
    gramian: FloatArray,
    period_s: float,
) -> Figures:
    """Return the figures of every observable.

    Means, and RMS and harmonics of voltages, currents and fluxes, are exact; RMS and harmonics of powers and energies
    come from the samples. A peak is found among the samples and refined on the flow.

    Parameters
    ----------
    rows : sampled signals as rows on y, shape (p, n + g).
    states : y at equal steps over the period, both ends, shape (steps + 1, n + g).
    gramian : ∫ y yᵀ dt over the period.
    """
    steps = len(states) - 1
    samples = readout.finish(states @ rows.T)
    unit = flow.states + generator.unit
    moments = rows @ gramian @ rows.T / period_s
    first = rows @ gramian[:, unit] / period_s
    count = min(tol.HARMONICS, (steps - 1) // 2)
    own = _harmonics(flow, generator, rows, states, period_s, count)
    sampled = 2.0 * np.fft.fft(samples[:-1], axis=0)[1 : count + 1].T / steps
    weight = np.full(steps + 1, 1.0 / steps)
    weight[[0, -1]] *= 0.5
    mean, rms = np.empty(samples.shape[1]), np.sqrt(weight @ np.square(samples))
    harmonic = sampled.copy()
    for column, (row, terms) in enumerate(zip(readout.linear, readout.products, strict=True)):
        mean[column] = first[row] if row >= 0 else sum(w * moments[left, right] for w, left, right in terms)
        if row >= 0:
            rms[column], harmonic[column] = np.sqrt(max(moments[row, row], 0.0)), own[row]
    peak, at_s = _peaks(flow, generator, readout, rows, states, samples, period_s / steps)
    return Figures(mean, rms, peak, at_s, harmonic)


def _harmonics(
    flow: Flow, generator: Generator, rows: FloatArray, states: FloatArray, period_s: float, count: int
) -> ComplexArray:
    """Fourier coefficients by (jkω − A) Z = B Ξ + jumps, Ξ those of the drives: shape (p, count)."""
    n, steps = flow.states, len(states) - 1
    jw = 2j * np.pi * np.arange(1, count + 1) / period_s
    times = np.append(generator.events, 0.0)
    jump = generator.state(times)
    jump[:-1] -= generator.before(generator.events)
    jump[-1] -= generator.before(np.array([period_s]))[0]
    if len(generator.events) and generator.events[-1] == period_s:
        jump, times = jump[:-1], times[:-1]  # the end of the period is its beginning
    spectrum = np.exp(-np.outer(jw, times)) @ jump / period_s
    xi = np.zeros((count, len(generator.S)), dtype=complex)
    for k in range(len(generator.S)):
        if generator.rate[k] > 0.0:  # a sine: band-limited, so its samples tell all
            xi[:, k] = np.fft.fft(states[:-1, n + k])[1 : count + 1] / steps
    lines = generator.rate == 0.0
    S = generator.S[np.ix_(lines, lines)]
    xi[:, lines] = np.linalg.solve(jw[:, None, None] * np.eye(int(lines.sum())) - S, spectrum[:, lines][:, :, None])[
        :, :, 0
    ]
    drive = xi @ flow.M[:n, n:].T + spectrum[:, :] @ flow.jump.T
    z = np.linalg.solve(jw[:, None, None] * np.eye(n) - flow.M[:n, :n], drive[:, :, None])[:, :, 0]
    return 2.0 * rows @ np.hstack((z, xi)).T


def _peaks(
    flow: Flow,
    generator: Generator,
    readout: Readout,
    rows: FloatArray,
    states: FloatArray,
    samples: FloatArray,
    step_s: float,
) -> tuple[FloatArray, FloatArray]:
    """Return the value of largest magnitude and its instant: among the samples, then on the flow beside the best."""
    where = np.abs(samples).argmax(axis=0)
    columns = np.arange(samples.shape[1])
    peak, at_s = samples[where, columns].copy(), step_s * where
    ladder = Ladder.of(flow.M, step_s)
    offsets = np.linspace(0.0, 1.0, tol.LINEAR_PEAK_POINTS)
    for column in columns:
        for step in (where[column] - 1, where[column]):
            if not 0 <= step < len(states) - 1:
                continue
            for begin, length, state in _pieces(flow, generator, ladder, int(step), states[step], step_s):
                low, high = 0.0, 1.0
                for _ in range(tol.LINEAR_PEAK_ROUNDS):
                    share = low + (high - low) * offsets
                    y = ladder.advance(np.repeat(state[None], len(share), axis=0), share * length)
                    values = readout.finish(y @ rows.T)[:, column]
                    best = int(np.abs(values).argmax())
                    if abs(values[best]) > abs(peak[column]):
                        peak[column], at_s[column] = values[best], begin + length * share[best]
                    width = (high - low) / (tol.LINEAR_PEAK_POINTS - 1)
                    low, high = max(0.0, share[best] - width), min(1.0, share[best] + width)
    return peak, at_s


def _pieces(
    flow: Flow, generator: Generator, ladder: Ladder, step: int, state: FloatArray, step_s: float
) -> Iterator[tuple[float, float, FloatArray]]:
    """Yield begin, length and starting state of the pieces of a step between the events inside it."""
    begin, end = step * step_s, (step + 1) * step_s
    inside = generator.events[np.searchsorted(generator.events, begin, side="right") :]
    for event in inside[inside < end]:
        yield begin, float(event) - begin, state
        moved = ladder.advance(state[None], np.array([event - begin]))[0]
        xi = generator.state(np.array([event]))[0]
        moved[: flow.states] += flow.jump @ (xi - moved[flow.states :])
        moved[flow.states :] = xi
        begin, state = float(event), moved
    yield begin, end - begin, state
