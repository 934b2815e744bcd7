"""Inductance matrices of many variants of one set, and which of them can surely exist."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.model.vary import Column, VaryCoupling, VaryInductance, VaryMatrix
from interwind.model.windings import WindingSet
from interwind_service import tolerances as tol
from interwind_service.windings.resistance import check_resistance

FloatArray = NDArray[np.float64]


def vary_matrices(windings: WindingSet, columns: Sequence[Column], count: int) -> FloatArray | None:
    """Return L of each variant, shape (V, n, n), H: matrices and entries first, couplings with those self-inductances.

    None when a column says it otherwise than by numbers of the matrix. Columns of other sets must be left out.
    """
    base = 0.5 * (windings.inductance_h + windings.inductance_h.T)
    L = np.broadcast_to(base, (count, *base.shape)).copy()
    for column in sorted(columns, key=lambda item: isinstance(item, VaryCoupling)):
        if isinstance(column, VaryMatrix):
            L[...] = column.inductance_h
            continue
        if not isinstance(column, VaryInductance | VaryCoupling):
            return None
        i, j = (windings.labels.index(label) for label in column.pair)
        if isinstance(column, VaryInductance):
            L[:, i, j] = L[:, j, i] = column.values_h
        else:
            with np.errstate(invalid="ignore"):
                L[:, i, j] = L[:, j, i] = column.values * np.sqrt(L[:, i, i] * L[:, j, j])
    return L


def couplings(L: FloatArray) -> tuple[FloatArray, NDArray[np.bool_]]:
    """Return the coupling matrices, and which are finite and exactly symmetric; the rest is the identity."""
    with np.errstate(all="ignore"):
        root = np.sqrt(np.einsum("vii->vi", L))
        K = L / (root[:, :, None] * root[:, None, :])
        good = (L == L.transpose(0, 2, 1)).all(axis=(1, 2)) & np.isfinite(K).all(axis=(1, 2))
    size = L.shape[1]
    K[~good] = np.eye(size)
    K[:, np.arange(size), np.arange(size)] = 1.0
    return K, good


def clear_eigenvalues(
    windings: WindingSet, columns: Sequence[Column], count: int
) -> tuple[FloatArray, NDArray[np.bool_]]:
    """Return the eigenvalues of each variant's coupling matrix, ascending, (V, n), and where they settle it, (V,).

    Settled are sets whose smallest eigenvalue is above what rounding can move, `CLEAR_EIGENVALUE` n: they are not
    INVALID, whatever uncertainty is stated. The others are for the full verdict, one by one.
    """
    L = vary_matrices(windings, columns, count)
    if L is None or check_resistance(windings):
        return np.full((count, windings.size), np.nan), np.zeros(count, dtype=bool)
    K, good = couplings(L)
    eigenvalues = np.linalg.eigvalsh(K)
    return eigenvalues, good & (eigenvalues[:, 0] > tol.CLEAR_EIGENVALUE * windings.size)


def loose(L: FloatArray) -> NDArray[np.bool_]:
    """Say which sets have every pivot of their coupling matrix above `LOOSE_PIVOT`, in the order of their labels."""
    K, good = couplings(L)
    pivots = np.ones(len(L))
    with np.errstate(all="ignore"):
        for k in range(L.shape[1]):
            pivots = np.minimum(pivots, K[:, k, k])
            for i in range(k + 1, L.shape[1]):
                K[:, i, k + 1 :] -= (K[:, i, k] / K[:, k, k])[:, None] * K[:, k, k + 1 :]
    return good & (pivots > tol.LOOSE_PIVOT)
