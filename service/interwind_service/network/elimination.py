"""Gauss-Jordan elimination with complete pivoting: ranks and kernels of incidence matrices, exact on graphs.

The matrices hold 0, +1, −1 and turns ratios, never element values; on a pure graph every intermediate entry is again
0, +1 or −1 (total unimodularity), so that rank decisions are exact there and safe with turns ratios.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service.tolerances import STRUCTURAL_PIVOT, STRUCTURAL_PIVOT_SHARE

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class Elimination:
    """A x = b solved for the pivot columns: x[pivots] = right − R x[free].

    ``pivots`` (rank,), ``free`` (n − rank,) columns; ``kernel`` (n, n − rank), unit rows at ``free``; ``particular``
    (n, right sides), 0 at ``free``; ``left_kernel`` (m, m − rank): combinations of rows that vanish.
    """

    pivots: IntArray
    free: IntArray
    kernel: FloatArray
    particular: FloatArray
    left_kernel: FloatArray

    @property
    def rank(self) -> int:
        """Number of pivots."""
        return len(self.pivots)


def eliminate(A: FloatArray, b: FloatArray | None = None, *, preference: FloatArray | None = None) -> Elimination:
    """Eliminate A (m, n) with right sides b (m, k).

    Among entries of comparable size the column of smallest ``preference`` (n,) is taken as pivot first.
    """
    rows, columns = A.shape
    right = np.zeros((rows, 0)) if b is None else b
    work = np.hstack((A, right, np.eye(rows)))
    size = np.abs(A)  # of the entries in open rows and columns, 0 elsewhere
    largest = size.max(initial=0.0)
    by_row, by_column = size.max(axis=1, initial=0.0), size.max(axis=0, initial=0.0)
    open_row, open_column = np.ones(rows, dtype=bool), np.ones(columns, dtype=bool)
    pivot_rows: list[int] = []
    pivots: list[int] = []
    while (top := by_row.max(initial=0.0)) > STRUCTURAL_PIVOT * largest:
        if preference is None:
            row = int(by_row.argmax())
            column = int(size[row].argmax())
        else:
            near = np.flatnonzero(by_column >= STRUCTURAL_PIVOT_SHARE * top)
            column = int(near[np.argmin(preference[near])])
            row = int(size[:, column].argmax())
        work[row] /= work[row, column]
        filled = np.flatnonzero(work[row])
        others = np.flatnonzero(work[:, column])
        others = others[others != row]
        work[np.ix_(others, filled)] -= np.outer(work[others, column], work[row, filled])
        work[others, column] = 0.0
        open_row[row] = open_column[column] = False
        size[row] = size[:, column] = 0.0
        changed = filled[filled < columns]
        block = np.ix_(others, changed)
        size[block] = np.abs(work[block]) * open_row[others, None] * open_column[changed]
        by_row[row] = by_column[column] = 0.0
        by_row[others] = size[others].max(axis=1, initial=0.0)
        by_column[changed] = size[:, changed].max(axis=0, initial=0.0)
        pivot_rows.append(row)
        pivots.append(column)
    free = np.flatnonzero(open_column)
    kernel = np.zeros((columns, len(free)))
    kernel[free, np.arange(len(free))] = 1.0
    kernel[pivots] = -work[np.ix_(pivot_rows, free)]
    kernel[np.abs(kernel) <= STRUCTURAL_PIVOT] = 0.0
    particular = np.zeros((columns, right.shape[1]))
    particular[pivots] = work[pivot_rows, columns : columns + right.shape[1]]
    left = work[open_row, columns + right.shape[1] :].T
    return Elimination(np.array(pivots, dtype=np.int64), free, kernel, particular, left)
