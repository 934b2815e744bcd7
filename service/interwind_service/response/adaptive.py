"""Frequencies that miss no resonance: chosen at the poles, until every peak stands on a returned point.

The state equations say where the modes are. Around each, the magnitude of every observable is followed to its exact
maximum; these frequencies are returned together with some on the flanks and an even grid between. What the chosen
points still miss is measured on a grid finer by `ADAPTIVE_CHECK`, and told.
"""

from __future__ import annotations

import dataclasses
from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest
from interwind.model.finding import Finding, Severity
from interwind.model.network import Network
from interwind.model.observables import Observable
from interwind.model.response import AdaptiveSweep, FrequencyResponse
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.response.frequency import drives_of, frequency_response
from interwind_service.response.linear.readout import readout_of
from interwind_service.response.poles import close_poles, linear_rows, model_at
from interwind_service.response.request.admit import admit
from interwind_service.response.sinusoidal.observe import resolve
from interwind_service.response.sinusoidal.shifted_schur import shifted_schur

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def adaptive_response(
    network: Network, sweep: AdaptiveSweep, observe: Sequence[Observable] | None = None
) -> FrequencyResponse:
    """Compute the frequency response at frequencies chosen so that no peak is missed; see `frequency_response`.

    Raises
    ------
    InvalidRequest : a span or a tolerance that makes no sense.
    """
    topology = admit(network)
    frequency_hz, findings = adaptive_frequencies(topology, sweep, resolve(topology, observe))
    response = frequency_response(network, frequency_hz, observe)
    return dataclasses.replace(response, findings=(*response.findings, *findings))


def adaptive_frequencies(
    topology: Topology, sweep: AdaptiveSweep, asked: Sequence[Observable]
) -> tuple[FloatArray, list[Finding]]:
    """Choose frequencies (F,), Hz, rising, and say what peak error is left.

    Raises
    ------
    InvalidRequest : a span or a tolerance that makes no sense.
    """
    start, stop = _span(sweep)
    linear = [item for item, place in zip(asked, readout_of(topology, asked).linear, strict=True) if place >= 0]
    rows = linear_rows(topology, linear)
    space = model_at(topology, float(np.sqrt(start * stop)))
    _, phasors = drives_of(topology)
    u = phasors[: len(topology.inputs)]
    schur = shifted_schur(space.A)
    C_u = rows @ space.C @ schur.U
    direct = rows @ space.gain_at_shift @ u
    direct -= rows @ space.C @ np.linalg.solve(space.shift * np.eye(space.states) - space.A, space.B @ u)
    impulse = rows @ space.Y1 @ u

    def magnitude(frequency_hz: FloatArray) -> FloatArray:
        """|y|, shape (f, observables); jω − A = jω (I − A / jω)."""
        s = 2j * np.pi * frequency_hz
        with np.errstate(divide="ignore", invalid="ignore"):
            t = schur.solve((space.B @ u)[:, None], -1.0 / s)[:, :, 0] / s
            y = C_u @ t + direct[:, None] + impulse[:, None] * s
        return np.nan_to_num(np.abs(y).T, nan=0.0, posinf=0.0)  # met a lossless pole: the response says so itself

    p = np.linalg.eigvals(space.A)
    p = p[p.imag > 0.0]
    centre, half = np.abs(p) / (2.0 * np.pi), np.maximum(-p.real, 0.0) / (2.0 * np.pi)
    inside = (centre >= start) & (centre <= stop)
    even = np.geomspace(start, stop, max(2, 1 + int(np.ceil(np.log10(stop / start) * tol.ADAPTIVE_POINTS_A_DECADE))))
    flanks = (centre[inside][:, None] + half[inside][:, None] * np.array(tol.ADAPTIVE_FLANKS)).ravel()
    points = _merged(np.concatenate((even, flanks)), start, stop)
    error_db = 0.0
    for _ in range(tol.ADAPTIVE_ROUNDS if linear and space.states else 0):
        tops, error_db = _missed(magnitude, points, sweep.tolerance_db)
        if not tops.size:
            break
        points = _merged(np.concatenate((points, tops)), start, stop)
    return points, [
        Finding(
            "ADAPTIVE_PEAK_ERROR", Severity.INFO, field="frequency_hz",
            message=f"{len(points)} frequencies chosen; no peak of what was asked for is missed by more than "
            f"{error_db:.2g} dB",
            measured=error_db, limit=sweep.tolerance_db,
        ),
        *close_poles(p[inside]),
    ]  # fmt: skip


def _span(sweep: AdaptiveSweep) -> tuple[float, float]:
    start, stop = float(sweep.start_hz), float(sweep.stop_hz)
    low, high = tol.MODAL_LEAST_HZ, tol.MODAL_MOST_HZ
    if not low <= start <= high:
        raise InvalidRequest.at("start_hz", f"{start!r} Hz found; {low:g} to {high:g} Hz is expected")
    if not start < stop <= high:
        raise InvalidRequest.at("stop_hz", f"{stop!r} Hz found; above start_hz and at most {high:g} Hz is expected")
    if not (np.isfinite(sweep.tolerance_db) and sweep.tolerance_db >= tol.ADAPTIVE_LEAST_DB):
        raise InvalidRequest.at(
            "tolerance_db", f"{sweep.tolerance_db!r} dB found; at least {tol.ADAPTIVE_LEAST_DB:g} is expected"
        )
    return start, stop


def _missed(
    magnitude: Callable[[FloatArray], FloatArray], points: FloatArray, tolerance_db: float
) -> tuple[FloatArray, float]:
    """Return the peaks (k,), Hz, that the points miss by more than the tolerance, and the largest error, dB."""
    share = np.arange(tol.ADAPTIVE_CHECK) / tol.ADAPTIVE_CHECK
    fine = np.append((points[:-1, None] * (points[1:] / points[:-1])[:, None] ** share).ravel(), points[-1])
    y = magnitude(fine)
    is_top = np.zeros(y.shape, dtype=bool)
    is_top[1:-1] = (y[1:-1] > y[:-2]) & (y[1:-1] >= y[2:])
    where, column = np.nonzero(is_top)
    if not where.size:
        return np.zeros(0), 0.0
    low, high, best = fine[where - 1], fine[where + 1], fine[where]
    pick = np.arange(len(where))
    for _ in range(tol.ADAPTIVE_ZOOMS):
        grid = low + (high - low) * np.linspace(0.0, 1.0, 9)[:, None]
        values = magnitude(grid.ravel()).reshape(9, len(where), -1)[:, pick, column]
        k = np.clip(values.argmax(axis=0), 1, 7)
        low, best, high = grid[k - 1, pick], grid[k, pick], grid[k + 1, pick]
    top = magnitude(best)[pick, column]
    known = magnitude(points)
    right = np.clip(np.searchsorted(points, best), 1, len(points) - 1)
    nearest = np.maximum(known[right - 1, column], known[right, column])
    with np.errstate(divide="ignore", invalid="ignore"):
        error_db = np.where(top > 0.0, 20.0 * np.log10(top / nearest), 0.0)
    missed = error_db > tolerance_db
    # A peak is also put on its own point where the error is small already, so that its frequency is told exactly.
    gap = np.minimum(np.abs(best / points[right - 1] - 1.0), np.abs(best / points[right] - 1.0))
    wanted = missed | ((gap > tol.ADAPTIVE_SAME) & (top >= tol.ADAPTIVE_PROMINENT * y.max(axis=0)[column]))
    return np.unique(best[wanted]), float(max(0.0, error_db.max())) if not wanted.any() else float(error_db.max())


def _merged(points: FloatArray, start: float, stop: float) -> FloatArray:
    """Return the points within the span, rising, those closer than `ADAPTIVE_SAME` taken as one."""
    points = np.unique(points[(points >= start) & (points <= stop)])
    keep = np.append(True, np.diff(points) > tol.ADAPTIVE_SAME * points[1:])
    return points[keep]
