"""Many small sparse systems of one pattern, eliminated as one straight line of array operations.

All systems share the order of elimination, so every step is one operation on the whole stack (`tape`), and zeros cost
nothing. Real and imaginary parts are kept apart, so that each operation is a single correctly rounded one.

A static order can meet a system it does not suit; so each solution is held against its own equations, componentwise
(Oettli & Prager 1964), and each pivot against the terms that cancelled in it. What fails is for another method.

References: Markowitz 1957 (order); Duff, Erisman & Reid 1986, chapters 5 to 7 (threshold, static pattern).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.stacked.tape import Number, largest

Part = Number | None  # None = zero in every system


@dataclass(frozen=True, slots=True, eq=False)
class Cell:
    """One complex entry of every system of a stack."""

    real: Part
    imaginary: Part


ZERO = Cell(None, None)


@dataclass(frozen=True, slots=True, eq=False)
class Solved:
    """``x`` by column; ``excess``: above 0, or NaN, where x is not to be trusted."""

    x: dict[int, Cell]
    excess: Number


def elimination_order(A: NDArray[np.complex128]) -> list[tuple[int, int]]:
    """Choose pivots (row, column) of a representative system: few fill-ins, none small in its column."""
    left = A.copy()
    rows, columns = set(range(len(A))), set(range(len(A)))
    order = []
    while rows:
        size = np.abs(left)
        per_row = {i: sum(size[i, j] > 0.0 for j in columns) for i in rows}
        per_column = {j: sum(size[i, j] > 0.0 for i in rows) for j in columns}
        largest = {j: max(size[i, j] for i in rows) for j in columns}
        fit = [
            ((per_row[i] - 1) * (per_column[j] - 1), -size[i, j], i, j)
            for i in rows
            for j in columns
            if size[i, j] > 0.0 and size[i, j] >= tol.STACK_PIVOT_SHARE * largest[j]
        ]
        if not fit:
            raise np.linalg.LinAlgError("the representative system is singular")
        _, _, r, c = min(fit)
        for i in rows - {r}:
            if size[i, c] > 0.0:
                factor = left[i, c] / left[r, c]
                for j in columns - {c}:
                    left[i, j] -= factor * left[r, j]
                left[i, c] = 0.0
        rows.discard(r)
        columns.discard(c)
        order.append((r, c))
    return order


def solve_stack(A: list[dict[int, Cell]], b: list[Cell], order: list[tuple[int, int]]) -> Solved:
    """Write down how A x = b is solved and judged; ``A`` by rows, each a mapping of columns to cells."""
    rows = [dict(row) for row in A]
    right = list(b)
    pivots = set(order)
    cancelled: dict[tuple[int, int], Number] = {}
    inverse: dict[int, Cell] = {}
    excess: Number = 0.0
    for step, (r, c) in enumerate(order):
        pivot = rows[r].pop(c)
        if (r, c) in cancelled:
            excess = largest(excess, tol.STACK_CANCELLATION * cancelled[r, c] - size(pivot))
        inverse[c] = reciprocal(pivot)
        for i, _ in order[step + 1 :]:
            if c not in rows[i]:
                continue
            factor = times(rows[i].pop(c), inverse[c])
            for j, cell in rows[r].items():
                term = times(factor, cell)
                if (i, j) in pivots:
                    before = cancelled.get((i, j))
                    before = size(rows[i].get(j, ZERO)) if before is None else before
                    cancelled[i, j] = before + size(term)
                rows[i][j] = minus(rows[i].get(j, ZERO), term)
            right[i] = minus(right[i], times(factor, right[r]))
    x: dict[int, Cell] = {}
    for r, c in reversed(order):
        value = right[r]
        for j, cell in rows[r].items():
            value = minus(value, times(cell, x[j]))
        x[c] = times(value, inverse[c])
    for row, own in zip(A, b, strict=True):
        rest, total = own, size(own)
        for j, cell in row.items():
            rest = minus(rest, times(cell, x[j]))
            total = total + size(cell) * size(x[j])
        excess = largest(excess, size(rest) - tol.STACK_BACKWARD_ERROR * total)
    return Solved(x, excess)


def plus(a: Cell, b: Cell) -> Cell:
    """Return a + b."""
    return Cell(add(a.real, b.real), add(a.imaginary, b.imaginary))


def minus(a: Cell, b: Cell) -> Cell:
    """Return a − b."""
    return Cell(subtract(a.real, b.real), subtract(a.imaginary, b.imaginary))


def times(a: Cell, b: Cell) -> Cell:
    """Return a b."""
    return Cell(
        subtract(multiply(a.real, b.real), multiply(a.imaginary, b.imaginary)),
        add(multiply(a.real, b.imaginary), multiply(a.imaginary, b.real)),
    )


def scaled(a: Cell, factor: Number) -> Cell:
    """Return a times a real factor."""
    return Cell(multiply(a.real, factor), multiply(a.imaginary, factor))


def reciprocal(a: Cell) -> Cell:
    """Return 1 / a."""
    if a.imaginary is None:
        return Cell(None if a.real is None else 1.0 / a.real, None)
    if a.real is None:
        return Cell(None, -1.0 / a.imaginary)
    square = a.real * a.real + a.imaginary * a.imaginary
    return Cell(a.real / square, -a.imaginary / square)


def size(a: Cell) -> Number:
    """Return |real| + |imaginary|."""
    parts = [abs(part) for part in (a.real, a.imaginary) if part is not None]
    return parts[0] + parts[1] if len(parts) == 2 else parts[0] if parts else 0.0


def add(a: Part, b: Part) -> Part:
    """Return a + b."""
    return b if a is None else a if b is None else a + b


def subtract(a: Part, b: Part) -> Part:
    """Return a − b."""
    return a if b is None else -b if a is None else a - b


def multiply(a: Part, b: Part) -> Part:
    """Return a b."""
    if a is None or b is None:
        return None
    for one, other in ((a, b), (b, a)):
        if isinstance(one, float) and abs(one) == 1.0:
            return other if one == 1.0 else -other
    return a * b
