"""Figures of a trajectory over one period: mean, root mean square, peak and harmonics, from the modal sums themselves.

Linear quantities are integrated in closed form; powers and energies, being products, by Gauss-Legendre rules on panels
short against every mode and harmonic. A peak is found on the grid of each segment and refined on the sum.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.switched.modal_integrals import gauss_points, transform
from interwind_service.response.switched.readings import Readings
from interwind_service.response.switched.trajectory import Group, Trajectory, product_integrals

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class Figures:
    """``mean``, ``rms``, ``peak``, ``peak_time_s`` (observables,); ``harmonic`` (observables, K), complex peak."""

    mean: FloatArray
    rms: FloatArray
    peak: FloatArray
    peak_time_s: FloatArray
    harmonic: ComplexArray


def figures_of(
    run: Trajectory, readings: dict[int, Readings], period_s: float, harmonics: int, settle_s: float
) -> Figures:
    """Return the figures of a run that covers one period from 0."""
    count = len(next(iter(readings.values())).linear)
    omega = 2.0 * np.pi / period_s * np.arange(harmonics + 1)
    spectrum, square = np.zeros((count, harmonics + 1), dtype=complex), np.zeros(count)
    peak, at = np.zeros(count), np.zeros(count)
    for group in run.groups():
        own = readings[group.piece.number]
        coefficients = own.rows.coefficients(group.piece, group.kappa, group.w)
        _linear(own, group, coefficients, omega, spectrum, square)
        _by_panels(own, group, coefficients, omega, spectrum, square)
        _peaks(own, group, coefficients, settle_s, peak, at)
    undefined = np.any([own.undefined for own in readings.values()], axis=0)
    spectrum /= period_s
    mean, rms = spectrum[:, 0].real.copy(), np.sqrt(np.maximum(square, 0.0) / period_s)
    for array in (mean, rms, peak, at):
        array[undefined] = np.nan
    harmonic = 2.0 * spectrum[:, 1:]
    harmonic[undefined] = np.nan
    return Figures(mean, rms, peak, at, harmonic)


def _linear(own: Readings, group: Group, coefficients: ComplexArray, omega: FloatArray, spectrum, square) -> None:
    chosen = np.flatnonzero(own.linear >= 0)
    if not chosen.size:
        return
    rows = coefficients[:, own.linear[chosen]]
    piece = group.piece
    straight, turned = transform(piece.rates, piece.order, group.span_s, omega)
    phase = np.exp(-1j * omega * group.start_s[:, None])
    straight *= phase[:, None, :]
    turned *= phase[:, None, :]
    spectrum[chosen] += 0.5 * np.einsum("srb,sbk->rk", rows, straight, optimize=True)
    spectrum[chosen] += 0.5 * np.einsum("srb,sbk->rk", rows.conj(), turned, optimize=True)
    square[chosen] += product_integrals(piece, group.span_s, rows, rows).sum(axis=0)


def _by_panels(own: Readings, group: Group, coefficients: ComplexArray, omega: FloatArray, spectrum, square) -> None:
    chosen = np.unique(own.products[:, 0])
    if not chosen.size:
        return
    shortest = np.pi / max(omega[-1], np.pi / group.span_s.max())
    for k, span in enumerate(group.span_s):
        edges = group.piece.panels(float(span), float(shortest))
        t, weight = gauss_points(edges)
        value = own.values((group.piece.basis(t) @ coefficients[k].T).real)[:, chosen]
        turning = np.exp(-1j * omega * (group.start_s[k] + t)[:, None]) * weight[:, None]
        spectrum[chosen] += value.T @ turning
        square[chosen] += weight @ value**2


def _peaks(own: Readings, group: Group, coefficients: ComplexArray, settle_s: float, peak, at) -> None:
    """Take the largest magnitudes of these segments, leaving out the modes that are jumps of the ideal network."""
    piece = group.piece
    jumps = np.flatnonzero(piece.jump & (piece.speed * settle_s > tol.SETTLED))
    if jumps.size:
        coefficients = coefficients.copy()
        coefficients[:, :, jumps] = 0.0
    for k, span in enumerate(group.span_s):
        if jumps.size and span < tol.JUMP_SPAN * settle_s:
            continue

        def evaluate(t: FloatArray, k: int = k) -> FloatArray:
            return own.values((piece.basis(t) @ coefficients[k].T).real)

        t = np.append(piece.look[piece.look < span], span)
        take_crests(t, evaluate(t), evaluate, group.start_s[k], peak, at)


def take_crests(
    t: FloatArray,
    value: FloatArray,
    evaluate: Callable[[FloatArray], FloatArray],
    start_s: float,
    peak: FloatArray,
    at: FloatArray,
) -> None:
    """Put into ``peak`` and ``at`` (observables,) the crests of ``value`` (T, observables) that stand above them."""
    size = np.abs(value)
    for observable in np.flatnonzero(size.max(axis=0) * tol.PEAK_HEADROOM > np.abs(peak)):
        column = size[:, observable]
        padded = np.concatenate([[-1.0], column, [-1.0]])
        tops = np.flatnonzero((padded[1:-1] >= padded[:-2]) & (padded[1:-1] >= padded[2:]))
        for top in tops[column[tops] * tol.PEAK_HEADROOM > abs(peak[observable])]:
            low, high = t[max(top - 1, 0)], t[min(top + 1, len(t) - 1)]
            instant, found = _refine(evaluate, int(observable), float(low), float(high), t[top])
            if abs(found) > abs(peak[observable]):
                peak[observable], at[observable] = found, start_s + instant


def _refine(
    evaluate: Callable[[FloatArray], FloatArray], observable: int, low: float, high: float, best: float
) -> tuple[float, float]:
    """Narrow a bracket round a maximum of the magnitude by ever finer grids."""
    for _ in range(tol.PEAK_ROUNDS):
        t = np.linspace(low, high, tol.PEAK_POINTS)
        value = evaluate(t)[:, observable]
        top = int(np.argmax(np.abs(value)))
        low, high, best = t[max(top - 1, 0)], t[min(top + 1, len(t) - 1)], t[top]
    return float(best), float(value[top])
