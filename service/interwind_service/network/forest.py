"""Spanning forests of a graph given by the end nodes of its branches (Kruskal 1956)."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np
from numpy.typing import NDArray

IntArray = NDArray[np.int64]


class _Union:
    """Disjoint sets with path halving."""

    def __init__(self, size: int) -> None:
        self.parent = list(range(size))

    def find(self, item: int) -> int:
        parent = self.parent
        while parent[item] != item:
            parent[item] = parent[parent[item]]
            item = parent[item]
        return item

    def join(self, one: int, other: int) -> bool:
        a, b = self.find(one), self.find(other)
        if a == b:
            return False
        self.parent[max(a, b)] = min(a, b)
        return True


def components(nodes: int, start: IntArray, finish: IntArray) -> IntArray:
    """Return the component of each node, shape (nodes,), numbered in order of their first node."""
    union = _Union(nodes)
    for a, b in zip(start.tolist(), finish.tolist(), strict=True):
        union.join(a, b)
    number: dict[int, int] = {}
    return np.array([number.setdefault(union.find(k), len(number)) for k in range(nodes)], dtype=np.int64)


def spanning_forest(nodes: int, start: IntArray, finish: IntArray, order: Iterable[int]) -> IntArray:
    """Return the branches of the spanning forest that takes branches in ``order`` (the greedy basis of the graph)."""
    parent = list(range(nodes))
    a, b = start.tolist(), finish.tolist()
    taken = []
    for k in order:
        one, other = a[k], b[k]
        while parent[one] != one:
            parent[one] = one = parent[parent[one]]
        while parent[other] != other:
            parent[other] = other = parent[parent[other]]
        if one != other:
            parent[max(one, other)] = min(one, other)
            taken.append(k)
            if len(taken) == nodes - 1:
                break
    return np.array(taken, dtype=np.int64)


def path_matrix(nodes: int, start: IntArray, finish: IntArray, tree: IntArray) -> NDArray[np.float64]:
    """Return P (nodes, tree): node voltages = P @ tree branch voltages, the first node of each component being zero.

    Entries are 0, +1 and −1: the branches on the way from a node to its zero, with their direction.
    """
    neighbours: list[list[tuple[int, int, float]]] = [[] for _ in range(nodes)]
    for column, k in enumerate(tree.tolist()):
        a, b = int(start[k]), int(finish[k])
        neighbours[a].append((b, column, -1.0))
        neighbours[b].append((a, column, 1.0))
    P = np.zeros((nodes, len(tree)))
    seen = [False] * nodes
    for root in range(nodes):
        if seen[root]:
            continue
        seen[root] = True
        stack = [root]
        while stack:
            node = stack.pop()
            for other, column, sign in neighbours[node]:
                if not seen[other]:
                    seen[other] = True
                    P[other] = P[node]
                    P[other, column] = sign
                    stack.append(other)
    return P


class Rooted:
    """A forest with a parent for each node, so that the branches between two nodes are found by climbing."""

    def __init__(self, nodes: int, start: IntArray, finish: IntArray, tree: IntArray) -> None:
        neighbours: list[list[tuple[int, int]]] = [[] for _ in range(nodes)]
        for k in tree.tolist():
            a, b = int(start[k]), int(finish[k])
            neighbours[a].append((b, k))
            neighbours[b].append((a, k))
        self._start = start
        self._parent, self._branch, self._depth = [-1] * nodes, [-1] * nodes, [-1] * nodes
        for root in range(nodes):
            if self._depth[root] >= 0:
                continue
            self._depth[root] = 0
            stack = [root]
            while stack:
                node = stack.pop()
                for other, k in neighbours[node]:
                    if self._depth[other] < 0:
                        self._parent[other], self._branch[other] = node, k
                        self._depth[other] = self._depth[node] + 1
                        stack.append(other)

    def between(self, one: int, other: int) -> list[tuple[int, int]]:
        """Return (branch, sign) so that v(one) − v(other) is the signed sum of the branch voltages."""
        found = []
        while one != other:
            up, sign = (one, 1) if self._depth[one] >= self._depth[other] else (other, -1)
            k = self._branch[up]
            found.append((k, sign if self._start[k] == up else -sign))
            if up == one:
                one = self._parent[one]
            else:
                other = self._parent[other]
        return found
