"""Stacks of linear systems, factored once and solved for every right side, with the numbers that vouch for them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import get_lapack_funcs

from interwind_service import tolerances as tol

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Solutions:
    """``x`` (f, n, m); ``residual`` (f,) = |b − A x|∞ / (|A|∞ |x|∞ + |b|∞); ``condition`` (f,) after scaling, 1-norm.

    ``scale`` (f, n) and ``largest`` (f, m): an entry of x below ε scale largest is rounding noise. Where A is singular,
    x and the residual are NaN and the condition is inf.
    """

    x: ComplexArray
    residual: FloatArray
    condition: FloatArray
    scale: FloatArray
    largest: FloatArray


def solve(A: ComplexArray, b: ComplexArray) -> Solutions:
    """Solve A x = b for stacks A (f, n, n) and b (f, n, m), both real or complex: equilibrate, factor, refine once.

    References: Ruiz 2001 (equilibration); Skeel 1980 (one refinement in working precision); Higham 2002, chapter 15.
    """
    f, n, m = b.shape
    if n == 0 or f == 0:
        return Solutions(np.zeros(b.shape, b.dtype), np.zeros(f), np.ones(f), np.ones((f, n)), np.ones((f, m)))
    scaled, rows, columns = equilibrate(A)
    right = b * rows[:, :, None]
    if n <= tol.STACKED_SOLVE_SIZE:
        x, condition = _by_inverse(scaled, right)
    else:
        x, condition = _by_factors(scaled, right)
    singular = ~(condition < tol.SINGULAR_CONDITION)
    x[singular] = np.nan
    gap = np.abs(right - scaled @ x).max(axis=(1, 2)) if m else np.zeros(f)
    largest = np.abs(x).max(axis=1)
    size = np.abs(scaled).sum(axis=2).max(axis=1) * largest.max(axis=1, initial=0.0)
    size += np.abs(right).max(axis=(1, 2), initial=0.0)
    residual = np.divide(gap, size, out=np.zeros(f), where=size > 0.0)
    residual[singular] = np.nan
    condition = np.where(singular, np.inf, condition)
    return Solutions(x * columns[:, :, None], residual, condition, columns, largest)


def equilibrate(A: ComplexArray) -> tuple[ComplexArray, FloatArray, FloatArray]:
    """Return (diag(r) A diag(c), r, c), r and c powers of two, every row and column near 1."""
    size = np.abs(A)
    f, n = A.shape[:2]
    r, c = np.ones((f, n)), np.ones((f, A.shape[2]))
    for _ in range(tol.EQUILIBRATION_PASSES):
        row, column = _root(size.max(axis=2)), _root(size.max(axis=1))
        size *= row[:, :, None]
        size *= column[:, None, :]
        r *= row
        c *= column
    scaled = A * r[:, :, None]
    scaled *= c[:, None, :]
    return scaled, r, c


def _root(largest: FloatArray) -> FloatArray:
    """The power of two next to 1/sqrt(largest); 1 for 0."""
    return np.ldexp(1.0, -(np.frexp(largest)[1] // 2))


def _by_inverse(A: ComplexArray, b: ComplexArray) -> tuple[ComplexArray, FloatArray]:
    try:
        inverse = np.linalg.inv(A)
    except np.linalg.LinAlgError:
        return _by_factors(A, b)
    x = inverse @ b
    x += inverse @ (b - A @ x)
    return x, _norm_one(A) * _norm_one(inverse)


def _norm_one(A: ComplexArray) -> FloatArray:
    return np.abs(A).sum(axis=1).max(axis=1)


def _by_factors(A: ComplexArray, b: ComplexArray) -> tuple[ComplexArray, FloatArray]:
    getrf, getrs, gecon = get_lapack_funcs(("getrf", "getrs", "gecon"), (A, b))
    x = np.full(b.shape, np.nan, dtype=b.dtype)
    condition = np.full(len(A), np.inf)
    norm = _norm_one(A)
    for k in range(len(A)):
        factors, pivots, info = getrf(A[k])
        if info != 0:
            continue
        reciprocal, _ = gecon(factors, norm[k])
        if reciprocal == 0.0:
            continue
        condition[k] = 1.0 / reciprocal
        first, _ = getrs(factors, pivots, b[k])
        step, _ = getrs(factors, pivots, b[k] - A[k] @ first)
        x[k] = first + step
    return x, condition
