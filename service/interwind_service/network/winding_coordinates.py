"""Coordinates in which a tightly coupled group keeps the digits of its leakage.

With winding currents i = N y the inductance becomes S = Nᵀ L N. A loosely coupled group takes N = 1/d (scaled currents,
S its coupling matrix). A tight one takes N from the pivoted factorization L = P (Uᵀ Δ U) Pᵀ, N = P U⁻¹, S = Δ diagonal:
rounding N is a relative change of turns ratios, so each leakage in Δ keeps its own digits, however small, and perfect
coupling is an exact 0 in Δ. The factorization runs in doubled precision (Dekker 1971; Knuth 1969), for a small
difference of large entries is exact only there.

References: Demmel & Veselić 1992 (scaled definite matrices); Higham 2002, section 10.3 (pivoted Cholesky).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import lapack

from interwind_service import tolerances as tol
from interwind_service.network.groups import WindingGroup
from interwind_service.network.topology import Topology

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class WindingCoordinates:
    """i = N y, S = Nᵀ L N (n, n); ``rank`` = number of non-zero leakages, n unless the coupling is perfect.

    ``scale`` (n,) of a loosely coupled group, N = diag(scale); products with N are products with it.
    """

    N: FloatArray
    S: FloatArray
    rank: int
    scale: FloatArray | None = None

    def currents(self, y: FloatArray) -> FloatArray:
        """Return i = N y, shape (n, k), real or complex."""
        return self.N @ y if self.scale is None else self.scale[:, None] * y

    def of_currents(self, i: FloatArray) -> FloatArray:
        """Return y of N y = i, shape (n, k), real or complex."""
        return np.linalg.solve(self.N, i) if self.scale is None else i / self.scale[:, None]

    def columns(self, Q: FloatArray) -> FloatArray:
        """Return Q N, shape (k, n)."""
        return Q @ self.N if self.scale is None else Q * self.scale

    def losses(self, resistance_ohm: FloatArray) -> FloatArray:
        """Return Nᵀ R N."""
        if self.scale is None:
            return self.N.T @ resistance_ohm @ self.N
        return self.scale[:, None] * resistance_ohm * self.scale


def all_coordinates(topology: Topology) -> tuple[WindingCoordinates, ...]:
    """Return the coordinates of every winding group of a network."""
    return tuple(winding_coordinates(group) for group in topology.groups)


def winding_coordinates(group: WindingGroup) -> WindingCoordinates:
    """Choose the coordinates of a group by its smallest pivot."""
    if group.stated_as_coupling:
        base, scale = group.coupling, group.root
    else:
        scale = np.exp2(np.round(np.log2(group.root)))
        base = group.inductance_h / np.outer(scale, scale)  # exact: powers of two
    preference = group.resistance_ohm.diagonal() / group.inductance_h.diagonal()
    if _is_loose(base):
        return WindingCoordinates(np.diag(1.0 / scale), base, group.size, 1.0 / scale)
    order, pivots, U = _factor(_Pair(base, np.zeros_like(base)), preference)
    zero = pivots <= tol.PERFECT_COUPLING_PIVOT * group.size * base.diagonal().max()
    pivots = np.where(zero, 0.0, pivots)
    inverse = np.linalg.inv(U)
    N = np.zeros_like(inverse)
    N[order] = np.triu(inverse)
    return WindingCoordinates(N / scale[:, None], np.diag(pivots), int((~zero).sum()))


def _is_loose(base: FloatArray) -> bool:
    """Whether every pivot of the pivoted Cholesky factorization is large; LAPACK's stops at the first that is not."""
    _, _, rank, _ = lapack.dpstrf(base, tol=tol.LOOSE_PIVOT)
    return int(rank) == len(base)


class _Pair:
    """A matrix as an unevaluated sum high + low; low None = plain double precision."""

    def __init__(self, high: FloatArray, low: FloatArray | None = None) -> None:
        self.high = high.copy()
        self.low = None if low is None else low.copy()

    def take(self, rows: NDArray[np.int64]) -> tuple[FloatArray, FloatArray]:
        high = self.high[np.ix_(rows, rows)]
        return high, np.zeros_like(high) if self.low is None else self.low[np.ix_(rows, rows)]


def _factor(matrix: _Pair, preference: FloatArray) -> tuple[NDArray[np.int64], FloatArray, FloatArray]:
    """Factor Pᵀ B P = Uᵀ diag(pivots) U, U unit upper triangular; a pivot that has vanished leaves a unit row.

    Among pivots of comparable size the one of smallest ``preference`` (resistance over inductance) goes first, so that
    a perfectly coupled mode is carried by the windings that damp it least.
    """
    n = len(preference)
    high, low = matrix.high, matrix.low
    left = list(range(n))
    order: list[int] = []
    pivots = np.zeros(n)
    U = np.eye(n)
    rows: list[FloatArray] = []
    for step in range(n):
        diagonal = high[left, left]
        top = diagonal.max()
        if top <= tol.PERFECT_COUPLING_PIVOT * n:
            order += left
            pivots[step:] = 0.0
            break
        near = [k for k, value in zip(left, diagonal, strict=True) if value >= tol.PIVOT_SHARE * top]
        pick = min(near, key=lambda k: preference[k])
        order.append(pick)
        left.remove(pick)
        pivots[step] = high[pick, pick]
        row = np.zeros(n)
        if left:
            ratio, ratio_low = _divide(
                high[pick],
                low[pick] if low is not None else None,
                high[pick, pick],
                low[pick, pick] if low is not None else 0.0,
            )
            row[left] = ratio[left]
            if low is None:
                high -= np.outer(ratio, high[pick])
            else:
                high, low = _subtract_outer(high, low, ratio, ratio_low, high[pick].copy(), low[pick].copy())
        rows.append(row)
    for step, row in enumerate(rows):
        U[step, step + 1 :] = row[order[step + 1 :]]
    return np.array(order, dtype=np.int64), pivots, U


def _two_sum(a: FloatArray, b: FloatArray) -> tuple[FloatArray, FloatArray]:
    s = a + b
    t = s - a
    return s, (a - (s - t)) + (b - t)


def _split(a: FloatArray) -> tuple[FloatArray, FloatArray]:
    c = 134217729.0 * a  # 2^27 + 1 (Dekker 1971)
    high = c - (c - a)
    return high, a - high


def _two_product(a: FloatArray, b: FloatArray) -> tuple[FloatArray, FloatArray]:
    p = a * b
    a1, a2 = _split(a)
    b1, b2 = _split(b)
    return p, ((a1 * b1 - p) + a1 * b2 + a2 * b1) + a2 * b2


def _divide(high: FloatArray, low: FloatArray | None, by: float, by_low: float) -> tuple[FloatArray, FloatArray]:
    ratio = high / by
    if low is None:
        return ratio, np.zeros_like(ratio)
    p, e = _two_product(ratio, np.broadcast_to(np.float64(by), ratio.shape))
    return ratio, ((high - p) - e + low - ratio * by_low) / by


def _subtract_outer(
    high: FloatArray, low: FloatArray, u: FloatArray, u_low: FloatArray, v: FloatArray, v_low: FloatArray
) -> tuple[FloatArray, FloatArray]:
    p, e = _two_product(np.broadcast_to(u[:, None], high.shape), np.broadcast_to(v[None, :], high.shape))
    e = e + np.outer(u, v_low) + np.outer(u_low, v)
    s, t = _two_sum(high, -p)
    t = t + low - e
    return _two_sum(s, t)
