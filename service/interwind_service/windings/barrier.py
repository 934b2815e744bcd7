"""Semidefinite programs in a few unknown couplings, by the logarithmic barrier (Nesterov & Nemirovskii 1994).

The greatest smallest eigenvalue over all completions, and the extreme values of one unknown pair.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.model.frozen import FloatArray
from interwind_service.tolerances import BARRIER_DECREMENT, BARRIER_SHRINK, BARRIER_STEPS, COMPLETION_GAP

Pairs = NDArray[np.intp]


@dataclass(frozen=True, slots=True, eq=False)
class BestCompletion:
    """The completion with the greatest smallest eigenvalue, that value, and the dual certificate.

    ``certificate`` Y (n, n) is semidefinite with unit trace and, up to rounding, zero at every unknown pair, so that
    ⟨Y, K⟩ is the same for all completions and no completion has a smallest eigenvalue above it.
    """

    completed: FloatArray
    smallest: float
    certificate: FloatArray


def best_completion(matrix: FloatArray, pairs: Pairs) -> BestCompletion:
    """Maximise t over x with K(x) − t I semidefinite; ``matrix`` (n, n) starts at the unknown ``pairs`` (m, 2)."""
    n, m = len(matrix), len(pairs)
    K = matrix.copy()
    t = float(np.linalg.eigvalsh(K)[0]) - 1.0
    mu, inverse = 1.0, np.eye(n)
    while True:
        for _ in range(BARRIER_STEPS):
            inverse = _inverse(K - t * np.eye(n))
            square = inverse @ inverse
            gradient = np.empty(m + 1)
            gradient[:m] = 2.0 * inverse[pairs[:, 0], pairs[:, 1]]
            gradient[m] = 1.0 / mu - np.trace(inverse)
            hessian = np.empty((m + 1, m + 1))
            hessian[:m, :m] = _curvature(inverse, pairs)
            hessian[:m, m] = hessian[m, :m] = -2.0 * square[pairs[:, 0], pairs[:, 1]]
            hessian[m, m] = np.trace(square)
            step, decrement = _newton(hessian, gradient)
            scale = _damping(decrement)
            K, t = _moved(K, pairs, scale * step[:m]), t + scale * step[m]
            if decrement < BARRIER_DECREMENT:
                break
        if n * mu < COMPLETION_GAP:
            Y = inverse / np.trace(inverse)
            return BestCompletion(K, float(np.linalg.eigvalsh(K)[0]), Y)
        mu *= BARRIER_SHRINK


def extreme_value(matrix: FloatArray, pairs: Pairs, target: int, direction: float) -> float:
    """Return the greatest (``direction`` +1) or least (−1) value of pair number ``target`` over all completions.

    ``matrix`` is a positive definite completion to start from.
    """
    n, K, mu = len(matrix), matrix.copy(), 1.0
    while True:
        for _ in range(BARRIER_STEPS):
            inverse = _inverse(K)
            gradient = 2.0 * inverse[pairs[:, 0], pairs[:, 1]]
            gradient[target] += direction / mu
            step, decrement = _newton(_curvature(inverse, pairs), gradient)
            K = _moved(K, pairs, _damping(decrement) * step)
            if decrement < BARRIER_DECREMENT:
                break
        if n * mu < COMPLETION_GAP:
            return float(K[tuple(pairs[target])])
        mu *= BARRIER_SHRINK


def _curvature(inverse: FloatArray, pairs: Pairs) -> FloatArray:
    """−∂² log det / ∂x_ij ∂x_kl = 2 (W_ik W_jl + W_il W_jk) with W the inverse."""
    i, j = pairs[:, 0], pairs[:, 1]
    straight = inverse[np.ix_(i, i)] * inverse[np.ix_(j, j)]
    crossed = inverse[np.ix_(i, j)] * inverse[np.ix_(j, i)]
    return 2.0 * (straight + crossed)


def _newton(hessian: FloatArray, gradient: FloatArray) -> tuple[FloatArray, float]:
    scale = 1.0 / np.sqrt(hessian.diagonal())
    scaled, right = hessian * np.outer(scale, scale), gradient * scale
    try:
        step = scale * np.linalg.solve(scaled, right)
    except np.linalg.LinAlgError:
        step = scale * np.linalg.lstsq(scaled, right, rcond=None)[0]
    return step, float(np.sqrt(max(step @ gradient, 0.0)))


def _damping(decrement: float) -> float:
    """Step that stays inside the cone, the barrier being self-concordant (Nesterov & Nemirovskii 1994)."""
    return 1.0 / (1.0 + decrement) if decrement > 0.25 else 1.0


def _inverse(matrix: FloatArray) -> FloatArray:
    inverse = np.linalg.inv(matrix)
    return 0.5 * (inverse + inverse.T)


def _moved(matrix: FloatArray, pairs: Pairs, by: FloatArray) -> FloatArray:
    moved = matrix.copy()
    np.add.at(moved, (pairs[:, 0], pairs[:, 1]), by)
    np.add.at(moved, (pairs[:, 1], pairs[:, 0]), by)
    return moved
