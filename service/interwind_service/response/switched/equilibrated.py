"""Solving a tableau whose entries span thirty decades, and naming what leaves it without a unique solution."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import lapack

from interwind.errors import InvalidNetwork
from interwind_service import tolerances as tol
from interwind_service.response.switched.tableau import Tableau

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


class Equilibrated:
    """LU of a matrix, rows and columns scaled by powers of two (Ruiz 2001, from memory), with one refinement."""

    def __init__(self, matrix: FloatArray) -> None:
        size = len(matrix)
        row, column = np.ones(size), np.ones(size)
        magnitude = np.abs(matrix)
        for _ in range(tol.MODAL_EQUILIBRATION_PASSES):
            scaled = magnitude * row[:, None] * column
            peak = scaled.max(axis=1)
            row /= np.where(peak > 0.0, np.exp2(np.round(0.5 * np.log2(np.where(peak > 0.0, peak, 1.0)))), 1.0)
            peak = scaled.max(axis=0)
            column /= np.where(peak > 0.0, np.exp2(np.round(0.5 * np.log2(np.where(peak > 0.0, peak, 1.0)))), 1.0)
        self.row, self.column, self.matrix = row, column, matrix
        self.lu, self.pivot, self.info = lapack.dgetrf(matrix * row[:, None] * column)
        scaled_norm = np.abs(matrix * row[:, None] * column).sum(axis=0).max(initial=0.0)
        self.rcond = lapack.dgecon(self.lu, scaled_norm)[0] if self.info == 0 else 0.0

    def solve(self, rhs: FloatArray | ComplexArray) -> FloatArray | ComplexArray:
        """Solve for all columns of ``rhs``."""
        if rhs.shape[1] == 0:
            return rhs
        if np.iscomplexobj(rhs):
            return self.solve(rhs.real) + 1j * self.solve(rhs.imag)
        first = self._once(rhs)
        return first + self._once(rhs - self.matrix @ first)

    def _once(self, rhs: FloatArray) -> FloatArray:
        return lapack.dgetrs(self.lu, self.pivot, rhs * self.row[:, None])[0] * self.column[:, None]

    def null_members(self) -> NDArray[np.int64]:
        """Return the columns that take part in the smallest singular vector, largest first."""
        vector = np.linalg.svd(self.matrix * self.row[:, None] * self.column)[2][-1]
        order = np.argsort(-np.abs(vector))
        return order[np.abs(vector)[order] > tol.NULL_MEMBER * np.abs(vector).max()]


def refuse_singular(factor: Equilibrated, tableau: Tableau) -> None:
    """Raise InvalidNetwork naming what is undetermined when the equations have no unique solution."""
    if factor.rcond > tol.SINGULAR_TABLEAU:
        return
    names: list[str] = []
    nodes = {int(c): name for name, c in zip(tableau.topology.nodes, tableau.column_of_node, strict=True) if c >= 0}
    branches = dict(zip(tableau.column_of_current.tolist(), tableau.topology.names, strict=True))
    for member in factor.null_members().tolist():
        text = f"node {nodes[member]!r}" if member in nodes else repr(branches.get(member, ""))
        if text != "''" and text not in names:
            names.append(text)
    raise InvalidNetwork.at(
        "elements", f"the network has no unique solution; what is undetermined involves {', '.join(names[:6])}"
    )
