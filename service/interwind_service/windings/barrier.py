"""Semidefinite programs in a few unknown couplings, by the logarithmic barrier (Nesterov & Nemirovskii 1994).

The greatest smallest eigenvalue over all completions, and the extreme values of one unknown pair.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import suppress
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
    """Maximise t over x with K(x) − t I semidefinite; ``matrix`` (n, n) starts at the unknown ``pairs`` (m, 2).

    The value found is within ``COMPLETION_GAP`` of the greatest, in units of the largest entry.
    """
    n, m = len(matrix), len(pairs)
    identity, K = np.eye(n), matrix.copy()
    scale = float(np.abs(matrix).max())
    t = float(np.linalg.eigvalsh(K)[0]) - scale
    inverse = identity
    with suppress(np.linalg.LinAlgError):  # closer to the edge than rounding allows: as far as it goes
        for mu in _parameters(scale, n):
            for _ in range(BARRIER_STEPS):
                inverse = _inverse(K - t * identity)
                square = inverse @ inverse
                gradient, hessian = np.empty(m + 1), np.empty((m + 1, m + 1))
                gradient[:m], hessian[:m, :m] = (
                    2.0 * inverse[pairs[:, 0], pairs[:, 1]],
                    log_det_curvature(inverse, pairs),
                )
                gradient[m], hessian[m, m] = 1.0 / mu - np.trace(inverse), np.trace(square)
                hessian[:m, m] = hessian[m, :m] = -2.0 * square[pairs[:, 0], pairs[:, 1]]
                step, decrement = newton_step(hessian, gradient)
                move = spread(step[:m], pairs, n)
                length = _line_search(K - t * identity, move - step[m] * identity, step[m] / mu)
                K, t = K + length * move, t + length * step[m]
                if decrement < BARRIER_DECREMENT:
                    break
    return BestCompletion(K, float(np.linalg.eigvalsh(K)[0]), inverse / np.trace(inverse))


def extreme_value(matrix: FloatArray, pairs: Pairs, target: int, direction: float) -> float:
    """Return the greatest (``direction`` +1) or least (−1) value of pair number ``target`` over all completions.

    ``matrix`` is a positive definite completion to start from.
    """
    n, K = len(matrix), matrix.copy()
    with suppress(np.linalg.LinAlgError):  # as above
        for mu in _parameters(1.0, n):
            for _ in range(BARRIER_STEPS):
                inverse = _inverse(K)
                gradient = 2.0 * inverse[pairs[:, 0], pairs[:, 1]]
                gradient[target] += direction / mu
                step, decrement = newton_step(log_det_curvature(inverse, pairs), gradient)
                move = spread(step, pairs, n)
                K = K + _line_search(K, move, direction * step[target] / mu) * move
                if decrement < BARRIER_DECREMENT:
                    break
    return float(K[tuple(pairs[target])])


def _parameters(scale: float, n: int) -> Iterator[float]:
    """The barrier parameter μ from ``scale`` down to where the duality gap n μ is small enough."""
    mu = scale
    yield mu
    while n * mu >= scale * COMPLETION_GAP:
        mu *= BARRIER_SHRINK
        yield mu


def log_det_curvature(inverse: FloatArray, pairs: Pairs) -> FloatArray:
    """−∂² log det / ∂x_ij ∂x_kl = 2 (W_ik W_jl + W_il W_jk) with W the inverse."""
    first, second = inverse[pairs[:, 0]], inverse[pairs[:, 1]]
    straight = first[:, pairs[:, 0]] * second[:, pairs[:, 1]]
    straight += first[:, pairs[:, 1]] * second[:, pairs[:, 0]]
    straight *= 2.0
    return straight


def newton_step(hessian: FloatArray, gradient: FloatArray) -> tuple[FloatArray, float]:
    """Return Newton's step of a concave function, −∂² = ``hessian``, and its decrement."""
    scale = 1.0 / np.sqrt(hessian.diagonal())
    scaled, right = hessian * np.outer(scale, scale), gradient * scale
    try:
        step = scale * np.linalg.solve(scaled, right)
    except np.linalg.LinAlgError:
        step = scale * np.linalg.lstsq(scaled, right, rcond=None)[0]
    return step, float(np.sqrt(max(step @ gradient, 0.0)))


def _line_search(matrix: FloatArray, move: FloatArray, slope: float) -> float:
    """Maximise slope·α + log det(S + α Δ) = slope·α + Σ log(1 + α λ_i), λ the eigenvalues of S⁻¹ Δ, by Newton steps.

    The function is concave and falls to −∞ at the edge of the cone; a step that would pass the edge is cut short of it.
    """
    root = np.linalg.cholesky(matrix)
    half = np.linalg.solve(root, move)
    values = np.linalg.eigvalsh(np.linalg.solve(root, half.T))
    edge = -1.0 / values[0] if values[0] < 0 else np.inf
    alpha = 0.0
    for _ in range(BARRIER_STEPS):
        terms = values / (1.0 + alpha * values)
        by = (slope + terms.sum()) / (terms @ terms)
        alpha, before = min(alpha + by, 0.5 * (alpha + edge)), alpha
        if abs(alpha - before) <= BARRIER_DECREMENT * abs(alpha):
            break
    return float(alpha)


def _inverse(matrix: FloatArray) -> FloatArray:
    inverse = np.linalg.inv(matrix)
    return 0.5 * (inverse + inverse.T)


def spread(values: FloatArray, pairs: Pairs, size: int) -> FloatArray:
    """Return the symmetric matrix with these values at the pairs and zeros elsewhere."""
    found = np.zeros((size, size))
    found[pairs[:, 0], pairs[:, 1]] = found[pairs[:, 1], pairs[:, 0]] = values
    return found
