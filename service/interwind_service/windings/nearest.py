"""The nearest valid coupling matrix: the smallest weighted Frobenius change that lifts every eigenvalue to the floor.

    minimise ½ ‖W (K − X) W‖²   subject to   X_ii = 1,  X_ij = K_ij for trusted pairs,  X − f I ⪰ 0,   W = diag(w)

(Higham 2002). With Z = W (X − f I) W this is the projection onto a cone and an affine set, and its dual

    θ(y) = ½ ‖(C + A*y)₊‖² − bᵀ y,   ∇θ = A((C + A*y)₊) − b

is convex, with a Lipschitz gradient that is strongly semismooth: Newton's method with a generalized Hessian converges
quadratically (Qi & Sun 2006). The systems are solved by conjugate gradients, so that a trusted pair costs no more than
another unknown.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import AccuracyNotReached
from interwind.model.frozen import FloatArray
from interwind_service.tolerances import (
    NEAREST_CG_STEPS,
    NEAREST_FORCING,
    NEAREST_RESIDUAL,
    NEAREST_STEPS,
    SUFFICIENT_DECREASE,
)


@dataclass(frozen=True, slots=True, eq=False)
class Nearest:
    """The nearest matrix (n, n); the norm of what its fixed entries miss; the Newton steps taken."""

    matrix: FloatArray
    violation: float
    steps: int


def nearest_correlation(
    target: FloatArray,
    *,
    trusted: NDArray[np.bool_] | None = None,
    weights: FloatArray | None = None,
    floor: float = 0.0,
) -> Nearest:
    """Return the nearest unit-diagonal matrix with eigenvalues of at least ``floor``.

    Parameters
    ----------
    target : shape (n, n), symmetric.
    trusted : shape (n, n), symmetric, True where the entry of ``target`` is kept; the diagonal is 1 always.
    weights : shape (n,), positive, w of the norm; None = all one.
    floor : smallest eigenvalue allowed, below 1.

    Raises
    ------
    AccuracyNotReached : Newton's method does not settle: the trusted entries leave no room above the floor.
    """
    n = len(target)
    w = np.ones(n) if weights is None else weights / np.max(weights)
    scale = np.outer(w, w)
    keep = np.zeros((n, n), dtype=bool) if trusted is None else trusted
    i, j = np.nonzero(np.triu(keep, 1))
    fixed = _Fixed(np.append(np.arange(n), i), np.append(np.arange(n), j), n)
    wanted = fixed.of((target - np.diag(target.diagonal()) + (1.0 - floor) * np.eye(n)) * scale)
    C = (target - floor * np.eye(n)) * scale
    Z, violation, steps = _dual_newton(C, fixed, wanted)
    X = Z / scale + floor * np.eye(n)
    X = np.where(keep, target, 0.5 * (X + X.T))
    np.fill_diagonal(X, 1.0)
    return Nearest(X, violation, steps)


@dataclass(frozen=True, slots=True, eq=False)
class _Fixed:
    """The entries held: A takes them out of a matrix, A* puts them in; off the diagonal with √2, so that A A* = I."""

    i: NDArray[np.intp]
    j: NDArray[np.intp]
    n: int

    def of(self, matrix: FloatArray) -> FloatArray:
        return matrix[self.i, self.j] * np.where(self.i == self.j, 1.0, np.sqrt(2.0))

    def adjoint(self, y: FloatArray) -> FloatArray:
        matrix = np.zeros((self.n, self.n))
        matrix[self.i, self.j] = y * np.where(self.i == self.j, 1.0, np.sqrt(0.5))
        matrix[self.j, self.i] = matrix[self.i, self.j]
        return matrix


@dataclass(frozen=True, slots=True, eq=False)
class _Point:
    """One dual point y: eigenvalues and eigenvectors of C + A*y, its projection, θ and ∇θ."""

    y: FloatArray
    values: FloatArray
    vectors: FloatArray
    projection: FloatArray
    theta: float
    gradient: FloatArray

    @property
    def norm(self) -> float:
        return float(np.linalg.norm(self.gradient))


def _point(C: FloatArray, fixed: _Fixed, wanted: FloatArray, y: FloatArray) -> _Point:
    values, P = np.linalg.eigh(C + fixed.adjoint(y))
    plus = P[:, values > 0] * np.sqrt(values[values > 0])
    projection = plus @ plus.T
    theta = 0.5 * float(np.sum(values[values > 0] ** 2)) - float(wanted @ y)
    return _Point(y, values, P, projection, theta, fixed.of(projection) - wanted)


def _dual_newton(C: FloatArray, fixed: _Fixed, wanted: FloatArray) -> tuple[FloatArray, float, int]:
    at = _point(C, fixed, wanted, wanted - fixed.of(C))
    goal = NEAREST_RESIDUAL * float(np.linalg.norm(wanted))
    for step in range(NEAREST_STEPS):
        if at.norm <= goal:
            return at.projection, at.norm, step
        direction = _direction(at, fixed)
        slope = float(direction @ at.gradient)
        length = 1.0
        while True:
            trial = _point(C, fixed, wanted, at.y + length * direction)
            # Close to the solution θ no longer resolves the gain; there the gradient decides.
            if trial.theta <= at.theta + SUFFICIENT_DECREASE * length * slope or trial.norm < 0.5 * at.norm:
                break
            length *= 0.5
            if length < SUFFICIENT_DECREASE:
                return _stalled(at, goal, step)
        at = trial
    return _stalled(at, goal, NEAREST_STEPS)


def _stalled(at: _Point, goal: float, step: int) -> tuple[FloatArray, float, int]:
    """Accept what rounding alone keeps from the goal; refuse the rest."""
    if at.norm <= 100.0 * goal:
        return at.projection, at.norm, step
    raise AccuracyNotReached(
        f"the nearest matrix was not reached: the fixed entries are off by {at.norm:.2g} after {step} Newton steps. "
        "The trusted pairs leave hardly any room above the floor: lower floor, or trust fewer pairs"
    )


def _direction(at: _Point, fixed: _Fixed) -> FloatArray:
    """Solve V d = −∇θ by preconditioned conjugate gradients, V h = A(P (Ω ∘ (Pᵀ A*h P)) Pᵀ)."""
    positive = at.values > 0
    P = at.vectors
    omega = np.zeros((len(P), len(P)))
    omega[np.ix_(positive, positive)] = 1.0
    mixed = at.values[positive][:, None] / (at.values[positive][:, None] - at.values[~positive][None, :])
    omega[np.ix_(positive, ~positive)] = mixed
    omega[np.ix_(~positive, positive)] = mixed.T
    squares = P * P
    diagonal = np.maximum((squares @ omega @ squares.T)[fixed.i, fixed.j], NEAREST_RESIDUAL)
    shift = min(NEAREST_FORCING, at.norm * NEAREST_FORCING)

    def curvature(h: FloatArray) -> FloatArray:
        return fixed.of(P @ (omega * (P.T @ fixed.adjoint(h) @ P)) @ P.T) + shift * h

    d = np.zeros_like(at.gradient)
    residual = -at.gradient
    goal = min(NEAREST_FORCING, at.norm) * at.norm
    z = residual / diagonal
    p, rz = z, float(residual @ z)
    for _ in range(NEAREST_CG_STEPS):
        q = curvature(p)
        length = rz / float(p @ q)
        d, residual = d + length * p, residual - length * q
        if np.linalg.norm(residual) <= goal:
            break
        z = residual / diagonal
        rz, previous = float(residual @ z), rz
        p = z + (rz / previous) * p
    return d
