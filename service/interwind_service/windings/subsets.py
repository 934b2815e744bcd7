"""The smallest impossible subsets: as few windings as possible that cannot exist together.

A principal submatrix is the inductance matrix of some of the windings with the others open, so each must be
semidefinite (Cauchy interlacing); a set is impossible as soon as one subset is, and the smallest says where to look.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import combinations
from math import comb

import numpy as np

from interwind.model.frozen import FloatArray
from interwind_service.tolerances import SUBSET_DELETION_WINDINGS, SUBSET_TRIPLE_WINDINGS, SUBSETS_EXAMINED
from interwind_service.windings.spectrum import EPSILON, Spectrum

Subset = tuple[int, ...]


@dataclass(frozen=True, slots=True)
class ImpossibleSubsets:
    """Subsets of one size, the most impossible first, and the smallest eigenvalue of each.

    ``searched`` is the size up to which all subsets were tried; subsets no larger than that are the smallest there are.
    """

    subsets: tuple[Subset, ...]
    smallest: tuple[float, ...]
    searched: int


def impossible_subsets(coupling: FloatArray, judged: Spectrum) -> ImpossibleSubsets:
    """Search all pairs, triples and larger subsets in turn as far as a bounded amount of work allows.

    Beyond it, the subset that carries the witness is thinned out until no winding can be left off any more: it is then
    minimal, unless it is too large to thin out one by one, though a smaller one may exist elsewhere. ``coupling``
    (n, n) may hold NaN; subsets with an unknown pair are passed over. ``judged`` is the decomposition of ``coupling``,
    completed where pairs are unknown.
    """
    n = len(coupling)
    searched, left = 1, SUBSETS_EXAMINED
    while searched < n:
        size = searched + 1
        if size == 3 and n <= SUBSET_TRIPLE_WINDINGS:
            found = _triples(coupling)
        elif size == 2 or comb(n, size) <= left:
            left -= comb(n, size) if size > 2 else 0
            found = _of_size(coupling, size)
        else:
            break
        searched = size
        if found:
            found.sort(key=lambda entry: entry[1])
            return ImpossibleSubsets(tuple(s for s, _ in found), tuple(value for _, value in found), searched)
    if searched == n or not judged.negative or np.any(np.isnan(coupling)):
        return ImpossibleSubsets((), (), searched)
    subset = _thinned(coupling, judged)
    return ImpossibleSubsets((subset,), (_least(coupling, subset),), searched)


def _of_size(coupling: FloatArray, size: int) -> list[tuple[Subset, float]]:
    """Every subset of one size whose smallest eigenvalue is negative beyond rounding."""
    n = len(coupling)
    if size == 2:
        i, j = np.nonzero(np.triu(np.abs(coupling) > 1.0 + 4 * EPSILON, 1))
        return [((int(a), int(b)), 1.0 - abs(float(coupling[a, b]))) for a, b in zip(i, j, strict=True)]
    index = np.array(list(combinations(range(n), size)))
    blocks = coupling[index[:, :, None], index[:, None, :]]
    known = ~np.isnan(blocks).any(axis=(1, 2))
    index, blocks = index[known], blocks[known]
    if not len(index):
        return []
    values = np.linalg.eigvalsh(blocks)
    bad = np.flatnonzero(values[:, 0] < -size * EPSILON * np.abs(values).max(axis=1))
    return [(tuple(int(w) for w in index[b]), float(values[b, 0])) for b in bad]


def _triples(coupling: FloatArray) -> list[tuple[Subset, float]]:
    """Triples with 1 + 2 abc − a² − b² − c² < 0, which with all |k| ≤ 1 is the same as a negative eigenvalue."""
    found = []
    for i in range(len(coupling) - 2):
        a, rest = coupling[i, i + 1 :], coupling[i + 1 :, i + 1 :]
        square = a * a
        determinant = 1.0 + 2.0 * np.outer(a, a) * rest - square[:, None] - square[None, :] - rest * rest
        for j, k in np.argwhere(np.triu(determinant < 0, 1)):
            triple = (i, int(i + 1 + j), int(i + 1 + k))
            values = np.linalg.eigvalsh(coupling[np.ix_(triple, triple)])
            if values[0] < -3 * EPSILON * abs(values[-1]):
                found.append((triple, float(values[0])))
    return found


def _thinned(coupling: FloatArray, judged: Spectrum) -> Subset:
    """A minimal impossible subset among the windings that carry the witness most.

    Smallest eigenvalues of nested submatrices only fall (Cauchy), so the shortest impossible prefix is found by
    bisection; then each of its windings, the lightest first, is left off if the rest stays impossible.
    """
    order = np.argsort(-np.abs(judged.vectors[:, 0]), kind="stable")
    possible, impossible = 1, len(order)
    while impossible - possible > 1:
        middle = (possible + impossible) // 2
        if _least(coupling, order[:middle]) < -judged.rounding:
            impossible = middle
        else:
            possible = middle
    kept = [int(w) for w in order[:impossible]]
    if len(kept) <= SUBSET_DELETION_WINDINGS:
        for winding in reversed(kept[:]):
            rest = [w for w in kept if w != winding]
            if len(rest) > 1 and _least(coupling, rest) < -judged.rounding:
                kept = rest
    return tuple(sorted(kept))


def _least(coupling: FloatArray, subset: object) -> float:
    index = np.asarray(subset)
    return float(np.linalg.eigvalsh(coupling[np.ix_(index, index)])[0])
