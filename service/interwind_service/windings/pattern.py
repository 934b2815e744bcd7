"""Which pairs are known, as a graph: chordal patterns are decided by their cliques alone.

Maximum cardinality search (Tarjan & Yannakakis 1984) orders the windings so that, in a chordal pattern, the earlier
neighbours of each winding form a clique; one winding after the other is then filled in by its maximum-determinant
values (Grone, Johnson, Sá & Wolkowicz 1984).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.model.frozen import FloatArray


@dataclass(frozen=True, slots=True)
class Pattern:
    """``order``: the windings as searched; ``earlier``: the neighbours of each one searched before it; ``chordal``."""

    order: tuple[int, ...]
    earlier: tuple[tuple[int, ...], ...]
    chordal: bool

    @property
    def cliques(self) -> tuple[tuple[int, ...], ...]:
        """The maximal cliques of a chordal pattern, each ascending."""
        candidates = [frozenset((w, *before)) for w, before in zip(self.order, self.earlier, strict=True)]
        largest_first = sorted(set(candidates), key=len, reverse=True)
        kept: list[frozenset[int]] = []
        for clique in largest_first:
            if not any(clique <= other for other in kept):
                kept.append(clique)
        return tuple(tuple(sorted(clique)) for clique in kept)


def pattern_of(known: NDArray[np.bool_]) -> Pattern:
    """Search the graph of known pairs, shape (n, n), symmetric.

    It is chordal when the earlier neighbours of each winding, but for the latest of them, are neighbours of that one.
    """
    n = len(known)
    weight, searched, place = np.zeros(n), np.zeros(n, dtype=bool), np.zeros(n, dtype=int)
    order, earlier, chordal = [], [], True
    for _ in range(n):
        w = int(np.argmax(np.where(searched, -1.0, weight)))
        before = np.flatnonzero(known[w] & searched)
        if chordal and len(before):
            latest = before[np.argmax(place[before])]
            chordal = bool(np.all(known[latest, before] | (before == latest)))
        place[w] = len(order)
        order.append(w)
        earlier.append(tuple(int(k) for k in before))
        searched[w] = True
        weight[known[w]] += 1
    return Pattern(tuple(order), tuple(earlier), chordal)


def fill_chordal(matrix: FloatArray, pattern: Pattern) -> FloatArray:
    """Return the maximum-determinant completion of a chordal pattern whose cliques are semidefinite.

    K_rw = K_rB K_BB⁺ K_Bw for each winding w in the order of the search, B its earlier neighbours, r the earlier rest.
    """
    X = np.where(np.isnan(matrix), 0.0, matrix)
    done = np.zeros(len(X), dtype=bool)
    for w, before in zip(pattern.order, pattern.earlier, strict=True):
        B = list(before)
        done[B] = False
        rest = np.flatnonzero(done)
        done[B] = True
        if len(B) and len(rest):
            gain = solve_semidefinite(X[np.ix_(B, B)], X[B, w])
            X[rest, w] = X[w, rest] = X[np.ix_(rest, B)] @ gain
        done[w] = True
    return X


def solve_semidefinite(matrix: FloatArray, right: FloatArray) -> FloatArray:
    """Least-squares solution of a semidefinite system, null directions within rounding left out."""
    values, V = np.linalg.eigh(matrix)
    kept = values > len(values) * np.finfo(np.float64).eps * max(values[-1], 0.0)
    return (V[:, kept] / values[kept]) @ (V[:, kept].T @ right)


def pair_cliques(known: NDArray[np.bool_], i: int, j: int) -> Sequence[tuple[int, ...]]:
    """Return the maximal cliques that hold both i and j once that pair is known; empty if that is not chordal.

    Together they decide the pair exactly when the pattern with the pair known is chordal.
    """
    with_pair = known.copy()
    with_pair[i, j] = with_pair[j, i] = True
    pattern = pattern_of(with_pair)
    return [clique for clique in pattern.cliques if i in clique and j in clique] if pattern.chordal else ()
