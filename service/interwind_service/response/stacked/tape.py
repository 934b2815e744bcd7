"""A straight line of array operations, written down once and run on one block of a stack after the other.

A number either varies over variants (V, 1), over frequencies (1, F), over both (V, F), or not at all. What varies over
frequencies alone is computed once; the rest runs in a few registers that are used again and again, so that a block
stays in the cache and nothing is allocated. Each operation is a single correctly rounded one: what comes out for a
variant does not depend on the block it stands in.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


class Node:
    """A number still to be computed; ``over`` = (varies over variants, varies over frequencies)."""

    __slots__ = ("index", "over", "tape")

    def __init__(self, tape: Tape, index: int, over: tuple[bool, bool]) -> None:
        self.tape, self.index, self.over = tape, index, over

    def __add__(self, other: Number) -> Node:
        return self.tape.sum(self, other)

    def __sub__(self, other: Number) -> Node:
        return self.tape.difference(self, other)

    def __mul__(self, other: Number) -> Node:
        return self.tape.product(self, other)

    def __truediv__(self, other: Number) -> Node:
        return self.tape.note(np.divide, self, other)

    def __radd__(self, other: float) -> Node:
        return self.tape.sum(self, other)

    def __rsub__(self, other: float) -> Node:
        return self.tape.difference(other, self)

    def __rmul__(self, other: float) -> Node:
        return self.tape.product(self, other)

    def __rtruediv__(self, other: float) -> Node:
        return self.tape.note(np.divide, other, self)

    def __neg__(self) -> Node:
        return self.tape.negated(self)

    def __abs__(self) -> Node:
        return self.tape.note(np.abs, self.tape.bare(self))


Number = Node | float


class Tape:
    """Where operations are written down, none twice; signs are carried to where they cost nothing."""

    def __init__(self) -> None:
        self.steps: list[tuple[Any, tuple[Number, ...]]] = []
        self.nodes: list[Node] = []
        self._known: dict[tuple[Any, ...], Node] = {}

    def input(self, *, over_variants: bool) -> Node:
        """Return a node for a given column: of variants (V, 1), else of frequencies (1, F)."""
        return self._add(None, (), (over_variants, not over_variants))

    def note(self, function: Any, *operands: Number) -> Node:
        """Return the node of one operation, the one that is there already if it was written down before."""
        key = (function, *(operand.index if isinstance(operand, Node) else (operand,) for operand in operands))
        if key not in self._known:
            nodes = [operand for operand in operands if isinstance(operand, Node)]
            over = (any(node.over[0] for node in nodes), any(node.over[1] for node in nodes))
            self._known[key] = self._add(function, operands, over)
        return self._known[key]

    def bare(self, a: Number) -> Number:
        """Return a without the sign that was put before it last."""
        if isinstance(a, Node) and self.steps[a.index][0] is np.negative:
            return self.steps[a.index][1][0]
        return a

    def negated(self, a: Number) -> Node:
        """Return −a."""
        bare = self.bare(a)
        return bare if bare is not a and isinstance(bare, Node) else self.note(np.negative, a)

    def sum(self, a: Number, b: Number) -> Node:
        """Return a + b."""
        if self.bare(b) is not b:
            return self.difference(a, self.bare(b))
        return self.difference(b, self.bare(a)) if self.bare(a) is not a else self.note(np.add, a, b)

    def difference(self, a: Number, b: Number) -> Node:
        """Return a − b."""
        if self.bare(b) is not b:
            return self.sum(a, self.bare(b))
        return self.negated(self.sum(self.bare(a), b)) if self.bare(a) is not a else self.note(np.subtract, a, b)

    def product(self, a: Number, b: Number) -> Node:
        """Return a b."""
        whole = self.note(np.multiply, self.bare(a), self.bare(b))
        return whole if (self.bare(a) is a) == (self.bare(b) is b) else self.negated(whole)

    def _add(self, function: Any, operands: tuple[Number, ...], over: tuple[bool, bool]) -> Node:
        node = Node(self, len(self.nodes), over)
        self.nodes.append(node)
        self.steps.append((function, operands))
        return node


def largest(a: Number, b: Number) -> Number:
    """Return the larger one; NaN where either is."""
    if isinstance(a, Node):
        return a.tape.note(np.maximum, a, b)
    return b.tape.note(np.maximum, a, b) if isinstance(b, Node) else float(np.maximum(a, b))


class Program:
    """What ``outputs`` need of a tape, made ready for blocks of ``rows`` variants.

    ``inputs``: the nodes that are given a column in each run; ``omega``: the one frequency input, with its ``values``
    (1, F).
    """

    def __init__(
        self, outputs: Sequence[Number], inputs: Sequence[Node], omega: Node, values: FloatArray, rows: int
    ) -> None:
        tape = omega.tape
        last = _last_uses(tape, outputs)
        place: dict[int, FloatArray] = {omega.index: values}
        self._inputs = [np.empty((rows, 1)) for _ in inputs]
        place |= {node.index: array for node, array in zip(inputs, self._inputs, strict=True)}
        self._steps: list[tuple[Any, tuple[Any, ...], FloatArray]] = []
        free: dict[tuple[int, ...], list[FloatArray]] = {}
        own: set[int] = set()  # nodes whose place is a register
        for index in sorted(last):
            function, operands = tape.steps[index]
            if function is None:
                continue
            arrays = [place[operand.index] if isinstance(operand, Node) else operand for operand in operands]
            over_variants, over_frequencies = tape.nodes[index].over
            if not over_variants:
                place[index] = function(*arrays)
                continue
            done = {o.index for o in operands if isinstance(o, Node) and last[o.index] == index and o.index in own}
            shape = (rows, values.shape[1] if over_frequencies else 1)
            for operand in done:  # element by element, a result may overwrite an operand of its own shape
                if place[operand].shape == shape:
                    free.setdefault(shape, []).append(place[operand])
            stock = free.setdefault(shape, [])
            place[index] = stock.pop() if stock else np.empty(shape)
            own.add(index)
            self._steps.append((function, tuple(arrays), place[index]))
            for operand in done:
                if place[operand].shape != shape:
                    free.setdefault(place[operand].shape, []).append(place[operand])
        self._outputs = [place[output.index] if isinstance(output, Node) else output for output in outputs]
        self.rows = rows

    def run(self, columns: Sequence[FloatArray]) -> list[FloatArray | float]:
        """Run a block; ``columns`` (up to rows, 1) for the inputs in order. Results hold until the next run.

        A shorter block is filled up with its first variant; what comes out for that is not to be used.
        """
        for array, column in zip(self._inputs, columns, strict=True):
            array[: len(column)] = column
            array[len(column) :] = column[0]
        for function, arrays, out in self._steps:
            function(*arrays, out=out)
        return self._outputs


def _last_uses(tape: Tape, outputs: Sequence[Number]) -> dict[int, int]:
    """Return, for every node that the outputs rest on, the step that needs it last."""
    last = {output.index: len(tape.steps) for output in outputs if isinstance(output, Node)}
    for index in range(len(tape.steps) - 1, -1, -1):
        if index in last:
            for operand in tape.steps[index][1]:
                if isinstance(operand, Node):
                    last.setdefault(operand.index, index)
    return last
