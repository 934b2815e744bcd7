"""Leakage geometry: with turns referred, pair leakages are squared distances between points (Schoenberg 1935).

In the limit of a large magnetising inductance a set of pair leakages ℓ_ij, all referred to one number of turns, belongs
to real windings exactly when sqrt(ℓ_ij) embed as distances in Euclidean space, that is when −½ J ℓ J, J = I − 1 1ᵀ / n,
is semidefinite (Young & Householder 1938). For three windings that is the triangle inequality of the square roots.
"""

from __future__ import annotations

import numpy as np

from interwind.model.frozen import FloatArray


def embedding_eigenvalues(leakage: FloatArray) -> FloatArray:
    """Eigenvalues of −½ J ℓ J without the one of the vector of ones, shape (n − 1,), ascending, in the unit of ℓ.

    ``leakage`` (n, n), symmetric, zero diagonal, referred to one number of turns. Negative: no windings have them.
    """
    n = len(leakage)
    centre = np.eye(n) - 1.0 / n
    basis = np.linalg.svd(centre)[0][:, : n - 1]
    return np.asarray(np.linalg.eigvalsh(-0.5 * basis.T @ leakage @ basis))


def star_legs(leakage_12: float, leakage_13: float, leakage_23: float) -> tuple[float, float, float]:
    """Legs of the star of three windings (Boyajian 1924); one may be negative in a set that is possible."""
    return (
        0.5 * (leakage_12 + leakage_13 - leakage_23),
        0.5 * (leakage_12 + leakage_23 - leakage_13),
        0.5 * (leakage_13 + leakage_23 - leakage_12),
    )


def square_root_excess(leakage: FloatArray) -> float:
    """Longest square root less the two others of three windings, (3, 3): positive when the triangle does not close."""
    a, b, c = sorted(np.sqrt(leakage[[0, 0, 1], [1, 2, 2]]))
    return float(c - a - b)


def referred_leakage(coupling: FloatArray) -> FloatArray:
    """Pair leakage of windings of equal self-inductance, ℓ_ij / L = 1 − k_ij², shape (n, n)."""
    return np.asarray(np.maximum(1.0 - coupling * coupling, 0.0))
