"""Matrix exponentials that keep slow modes beside fast ones, and the Gramian of a flow.

The flow is y' = M y. A ladder holds E_j = e^(M span/2^j) − I for j = 0, 1, .. until |M| span/2^j is small; every rung
comes from the finer one by Y <- 2Y + Y Y, so that a mode of rate λ keeps its own relative accuracy however fast its
neighbours are (Moler & Van Loan 1978, scaling and squaring applied to e^X − I).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import AccuracyNotReached
from interwind_service.tolerances import (
    EXPONENTIAL_BASE_NORM,
    EXPONENTIAL_GAUSS_POINTS,
    EXPONENTIAL_TAYLOR_DEGREE,
    LARGEST_EXPONENT,
)

FloatArray = NDArray[np.float64]

_GAUSS_POINT, _GAUSS_WEIGHT = np.polynomial.legendre.leggauss(EXPONENTIAL_GAUSS_POINTS)
_UNIT_POINT, _UNIT_WEIGHT = 0.5 * (_GAUSS_POINT + 1.0), 0.5 * _GAUSS_WEIGHT


def expm1(matrix: FloatArray) -> FloatArray:
    """Return e^matrix − I, shape (n, n)."""
    return Ladder.of(matrix, 1.0).rungs[0]


@dataclass(frozen=True, slots=True, eq=False)
class Ladder:
    """e^(M span/2^j) − I for j = 0 .. depth; ``rungs[j]`` shape (n, n)."""

    matrix: FloatArray
    span: float
    rungs: tuple[FloatArray, ...]

    @classmethod
    def of(cls, matrix: FloatArray, span: float, *, least_depth: int = 0) -> Ladder:
        """Build the ladder of ``matrix`` (n, n), 1/s, over ``span``, s, at least ``least_depth`` rungs deep."""
        size = float(np.abs(matrix).sum(axis=0).max(initial=0.0)) * span
        if not size <= LARGEST_EXPONENT:
            raise AccuracyNotReached(
                f"the fastest mode goes through {size:.3g} time constants between samples that are held together; at "
                f"most {LARGEST_EXPONENT:g} can be; shorten the run, or leave out the smallest elements",
                reason="OUT_OF_NUMBERS",
            )
        depth = least_depth
        if size > EXPONENTIAL_BASE_NORM:
            depth = max(depth, int(np.ceil(np.log2(size / EXPONENTIAL_BASE_NORM))))
        increment = _taylor(matrix * (span * 0.5**depth))
        rungs = [increment]
        for _ in range(depth):
            increment = 2.0 * increment + increment @ increment
            rungs.append(increment)
        return cls(matrix, span, tuple(reversed(rungs)))

    @property
    def depth(self) -> int:
        """Number of halvings of the span."""
        return len(self.rungs) - 1

    def transition(self, level: int) -> FloatArray:
        """Return e^(M span/2^level), shape (n, n)."""
        matrix = self.rungs[level].copy()
        matrix[np.diag_indices_from(matrix)] += 1.0
        return matrix

    def advance(
        self, states: FloatArray, duration_s: FloatArray, *, from_level: int = 0, gram: Gramian | None = None
    ) -> FloatArray:
        """Return e^(M duration) applied to each state; each duration is below span/2^from_level.

        ``states`` shape (count, n), ``duration_s`` shape (count,). Binary digits of the duration choose the rungs, a
        Taylor series does the rest. ``gram`` takes the Gramian of the way.
        """
        states = states.copy()
        fraction = duration_s * (2.0**from_level / self.span)
        for level in range(from_level + 1, self.depth + 1):
            fraction = 2.0 * fraction
            taken = np.flatnonzero(fraction >= 1.0)
            if taken.size:
                fraction[taken] -= 1.0
                moved = states[taken]
                if gram is not None:
                    gram.add(level, moved)
                states[taken] = moved + moved @ self.rungs[level].T
        rest = fraction * (self.span * 0.5**self.depth)
        if gram is not None:
            for point, weight in zip(_UNIT_POINT, _UNIT_WEIGHT, strict=True):
                middle = self._short(states, point * rest)
                gram.add_integral((middle * (weight * rest)[:, None]).T @ middle)
        return self._short(states, rest)

    def _short(self, states: FloatArray, duration_s: FloatArray) -> FloatArray:
        total, term = states.copy(), states
        for order in range(1, EXPONENTIAL_TAYLOR_DEGREE + 1):
            term = (term @ self.matrix.T) * (duration_s / order)[:, None]
            total += term
        return total


class Gramian:
    """∫ y y' dt along pieces of a flow, each a state that runs for span/2^level, s.

    Pieces of one level are summed as y y'; a coarse piece is two finer ones, G + E G E', and the finest is integrated
    by Gauss's rule on e^(M t). All terms are positive semidefinite: nothing cancels.
    """

    def __init__(self, ladder: Ladder) -> None:
        self._ladder = ladder
        size = len(ladder.matrix)
        self._pieces: dict[int, FloatArray] = {}
        self._integral = np.zeros((size, size))

    def add(self, level: int, states: FloatArray) -> None:
        """Add pieces of duration span/2^level that start at ``states``, shape (count, n)."""
        self.add_square(level, states.T @ states)

    def add_square(self, level: int, square: FloatArray) -> None:
        """Add pieces of duration span/2^level by the sum y y' of their starts, shape (n, n)."""
        self._pieces[level] = self._pieces.get(level, 0.0) + square

    def add_integral(self, integral: FloatArray) -> None:
        """Add ∫ y y' dt of a piece already integrated, shape (n, n)."""
        self._integral += integral

    def total(self) -> FloatArray:
        """Return the sum of all pieces, shape (n, n), symmetric."""
        ladder = self._ladder
        square = np.zeros_like(self._integral)
        for level in range(ladder.depth + 1):
            square = square + self._pieces.get(level, 0.0)
            if level < ladder.depth:
                rung = ladder.rungs[level + 1]
                moved = rung @ square
                half = moved + 0.5 * (moved @ rung.T)  # square + E square E' with E = I + rung
                square = 2.0 * square + half + half.T
        finest = ladder.span * 0.5**ladder.depth
        total = self._integral.copy()
        for point, weight in zip(_UNIT_POINT, _UNIT_WEIGHT, strict=True):
            move = _taylor(ladder.matrix * (finest * point))
            move[np.diag_indices_from(move)] += 1.0
            total += (weight * finest) * (move @ square @ move.T)
        return 0.5 * (total + total.T)


def _taylor(matrix: FloatArray) -> FloatArray:
    """e^X − I for a small X by Horner's rule."""
    identity = np.eye(len(matrix))
    total = identity
    for order in range(EXPONENTIAL_TAYLOR_DEGREE, 1, -1):
        total = identity + (matrix @ total) / order
    return matrix @ total
