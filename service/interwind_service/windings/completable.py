"""Whether unknown couplings have any values that make the set possible, and what every pair may be over all of them.

A chordal pattern of known pairs is decided by its cliques alone (Grone, Johnson, Sá & Wolkowicz 1984); any other by a
semidefinite program, whose dual solution is the certificate.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.model.frozen import FloatArray
from interwind_service.tolerances import (
    COMPLETION_CULPRIT_WORK,
    COMPLETION_GAP,
    COMPLETION_INTERVAL_PAIRS,
    COMPLETION_INTERVAL_WINDINGS,
    COMPLETION_UNKNOWNS,
    INTERVAL_ROUNDING,
)
from interwind_service.windings.barrier import best_completion, extreme_value
from interwind_service.windings.intervals import feasible_intervals
from interwind_service.windings.pattern import Pattern, fill_chordal, pair_cliques, pattern_of
from interwind_service.windings.spectrum import spectrum


@dataclass(frozen=True, slots=True, eq=False)
class Completion:
    """The completion whose smallest eigenvalue is greatest.

    ``completed`` (n, n); ``smallest``: that eigenvalue; ``certificate`` (n, n): Y semidefinite, trace 1, zero at every
    unknown pair, with ⟨Y, K⟩ = ``smallest``: no completion does better, by more than ``tolerance`` at least.
    """

    completed: FloatArray
    smallest: float
    certificate: FloatArray
    pattern: Pattern
    tolerance: float

    @property
    def valid(self) -> bool:
        """Whether the set can be completed."""
        return self.smallest >= -self.tolerance


def completable(coupling: FloatArray) -> tuple[bool, FloatArray]:
    """Tell whether NaN pairs of ``coupling`` (n, n) can be filled so that it is positive semidefinite.

    Returns
    -------
    (True, a completion) or (False, the certificate Y): ⟨Y, K⟩ < 0 whatever the unknown values are.
    """
    best = complete(coupling)
    if best is None:
        raise ValueError("too many unknown pairs in too loose a pattern; see COMPLETION_UNKNOWNS")
    return (True, best.completed) if best.valid else (False, best.certificate)


def complete(coupling: FloatArray) -> Completion | None:
    """Find the best completion of a symmetric coupling matrix with NaN pairs; None when that is beyond the bound."""
    known = ~np.isnan(coupling)
    pattern = pattern_of(known & ~np.eye(len(coupling), dtype=bool))
    if pattern.chordal:
        return _chordal(coupling, pattern)
    pairs = np.argwhere(np.triu(~known, 1))
    if len(pairs) > COMPLETION_UNKNOWNS:
        return None
    start = np.where(known, coupling, 0.0)
    best, tolerance = best_completion(start, pairs), COMPLETION_GAP * float(np.abs(start).max())
    return Completion(best.completed, best.smallest, best.certificate, pattern, tolerance)


def _chordal(coupling: FloatArray, pattern: Pattern) -> Completion:
    """K − t I has the pattern of K, so the best smallest eigenvalue t is the least one of the cliques."""
    n = len(coupling)
    least, vector, worst = np.inf, np.ones(1), (0,)
    for clique in pattern.cliques:
        values, V = np.linalg.eigh(coupling[np.ix_(clique, clique)])
        if values[0] < least:
            least, vector, worst = float(values[0]), V[:, 0], clique
    shifted = fill_chordal(coupling - least * np.eye(n), pattern)
    certificate = np.zeros((n, n))
    certificate[np.ix_(worst, worst)] = np.outer(vector, vector)
    completed = shifted + least * np.eye(n)
    np.fill_diagonal(completed, 1.0)
    return Completion(completed, least, certificate, pattern, spectrum(completed).rounding)


def completion_intervals(coupling: FloatArray, best: Completion) -> tuple[FloatArray, FloatArray, bool]:
    """Return lowest and highest value of every pair, (n, n), the other known pairs held, the unknown ones free.

    The third value tells whether the unknown pairs were free for every pair; beyond the bound for loose patterns they
    are held at the best completion.
    """
    n = len(coupling)
    known = ~np.isnan(coupling) & ~np.eye(n, dtype=bool)
    if best.pattern.chordal:
        low, high = _clique_intervals(coupling, best.pattern)
        loose = _unknown_intervals(coupling, known, low, high)
    else:
        low, high = np.eye(n), np.eye(n)
        loose = [(int(i), int(j)) for i, j in np.argwhere(np.triu(np.ones((n, n), dtype=bool), 1))]
    free = not loose or n <= COMPLETION_INTERVAL_WINDINGS
    if not free:
        held = feasible_intervals(spectrum(best.completed))
        for i, j in loose:
            low[i, j] = low[j, i] = held[0][i, j]
            high[i, j] = high[j, i] = held[1][i, j]
        loose = [] if best.valid else _weighed_most(best.certificate, known)
    for i, j in loose:
        low[i, j], high[i, j] = low[j, i], high[j, i] = _extremes(coupling, best, i, j)
    return low, high, free


def _weighed_most(certificate: FloatArray, known: NDArray[np.bool_]) -> list[tuple[int, int]]:
    """Known pairs that the proof of impossibility rests on most; a pair of no weight cannot be the cure."""
    i, j = np.nonzero(np.triu(known, 1))
    unknown = max(1, len(known) * (len(known) - 1) // 2 - len(i))
    order = np.argsort(-np.abs(certificate[i, j]), kind="stable")[: int(COMPLETION_CULPRIT_WORK / unknown**3)]
    return [(int(i[p]), int(j[p])) for p in order]


def _clique_intervals(coupling: FloatArray, pattern: Pattern) -> tuple[FloatArray, FloatArray]:
    """Known pairs of a chordal pattern: the common part of the intervals within every clique that holds the pair."""
    n = len(coupling)
    low, high = np.full((n, n), -1.0), np.full((n, n), 1.0)
    for clique in pattern.cliques:
        here = np.ix_(clique, clique)
        part = spectrum(coupling[here])
        inner_low, inner_high = feasible_intervals(part)
        valid = part.negative == 0
        outside = np.ones((n, n), dtype=bool)
        outside[here] = False
        if not valid:
            low[outside] = high[outside] = np.nan
        low[here], high[here] = np.maximum(low[here], inner_low), np.minimum(high[here], inner_high)
    empty = ~(low <= high + INTERVAL_ROUNDING)
    low[empty] = high[empty] = np.nan
    np.minimum(low, high, out=low)
    for end in (low, high):
        np.fill_diagonal(end, 1.0)
    return low, high


def _unknown_intervals(
    coupling: FloatArray, known: NDArray[np.bool_], low: FloatArray, high: FloatArray
) -> list[tuple[int, int]]:
    """Set, in place, the unknown pairs that cliques decide, if all others are possible; return the rest of them."""
    places = [(int(i), int(j)) for i, j in np.argwhere(np.triu(~known & ~np.isnan(low), 1))]
    left = places[COMPLETION_INTERVAL_PAIRS:]
    for i, j in places[:COMPLETION_INTERVAL_PAIRS]:
        cliques = pair_cliques(known, i, j)
        if not cliques:
            left.append((i, j))
            continue
        ends = []
        for clique in cliques:
            part = np.where(np.isnan(coupling), 0.0, coupling)[np.ix_(clique, clique)]
            inner = feasible_intervals(spectrum(part))
            place = clique.index(i), clique.index(j)
            ends.append((inner[0][place], inner[1][place]))
        floor, roof = np.max(ends, axis=0)[0], np.min(ends, axis=0)[1]
        if not floor <= roof + INTERVAL_ROUNDING:
            floor = roof = np.nan
        low[i, j] = low[j, i] = min(floor, roof)
        high[i, j] = high[j, i] = roof
    return left


def _extremes(coupling: FloatArray, start: Completion, i: int, j: int) -> tuple[float, float]:
    """Extreme values of pair (i, j) over all completions of the other known pairs, from ``start`` if that is one."""
    freed = coupling.copy()
    freed[i, j] = freed[j, i] = np.nan
    best = start if start.smallest > start.tolerance else complete(freed)
    if best is None or not best.valid:
        return np.nan, np.nan
    if best.smallest <= best.tolerance:
        # No interior to search: draw every coupling in by an amount that moves no eigenvalue further than this.
        freed = (freed + 10 * COMPLETION_GAP * np.eye(len(freed))) / (1 + 10 * COMPLETION_GAP)
        best = complete(freed)
        if best is None:
            return np.nan, np.nan
    pairs = np.argwhere(np.triu(np.isnan(freed), 1))
    target = int(np.flatnonzero((pairs == (i, j)).all(axis=1))[0])
    low = extreme_value(best.completed, pairs, target, -1.0)
    return low, extreme_value(best.completed, pairs, target, 1.0)
