"""Exact propagation of a flow y' = M y over a uniform grid, in blocks of steps by matrix products.

y = (x, ξ), x the states of the network, ξ those of its drives. ξ is known beforehand at every instant, so only x is
carried: over a block without events the samples are one product with the block's observability matrix and the starts of
all blocks follow from a doubling scan. Blocks with events on the grid alone are products, too (`KickedBlocks`). The
others step through together, one grid step of all of them at a time, and a step with events inside takes the exact
response between its events. No step error enters at any step size.

References: Van Loan 1978 (integrals of the exponential); Hillis & Steele 1986 (the scan).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.drive.generator import Generator
from interwind_service.response.linear.exponential import Gramian, Ladder
from interwind_service.response.linear.flow import Flow
from interwind_service.response.linear.kicked import KickedBlocks

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, eq=False)
class EventSteps:
    """Events by grid step: step k runs from k h to (k + 1) h and owns the events in (k h, (k + 1) h].

    ``steps`` (K,) rising, distinct; ``inside`` : the events strictly inside, as (step, time) rows sorted by time.
    """

    steps: IntArray
    inside_step: IntArray
    inside_time: FloatArray

    @classmethod
    def of(cls, events: FloatArray, step_s: float) -> EventSteps:
        """Sort events into the steps of a grid."""
        step, on_grid = np.empty(len(events), dtype=np.int64), np.empty(len(events), dtype=bool)
        for low in range(0, len(events), tol.CORNERS_TOGETHER):
            own = slice(low, low + tol.CORNERS_TOGETHER)
            nearest = np.rint(events[own] / step_s)
            on_grid[own] = nearest * step_s == events[own]
            step[own] = nearest - 1.0
        off = np.flatnonzero(~on_grid)
        times = events[off]
        below = np.floor(times / step_s)
        below = np.where(below * step_s > times, below - 1.0, below)
        step[off] = np.where((below + 1.0) * step_s <= times, below + 1.0, below)
        inside = step[off]
        first = np.ones(len(step), dtype=bool)
        np.greater(step[1:], step[:-1], out=first[1:])
        return cls(step if first.all() else step[first], inside, times)


class Propagation:
    """One run of ``steps`` grid steps of ``step_s``, from step ``first`` on; iterate `rows` once, then read the totals.

    Parameters
    ----------
    flow : y' = M y and the jumps at events; the last g states are those of ``generator``.
    generator : ξ at every instant, and the events.
    start : the states at step ``first``, from the right, shape (n,).
    readout : rows of the samples, shape (p, n + g).
    """

    def __init__(
        self,
        flow: Flow,
        generator: Generator,
        start: FloatArray,
        readout: FloatArray,
        *,
        step_s: float,
        steps: int,
        first: int = 0,
    ) -> None:
        self.generator, self.readout, self.step_s, self.steps = generator, readout, step_s, steps
        self.first, self.last = first, first + steps
        self.n, self.size, self.jump = len(start), len(flow.M), flow.jump.T
        self.jumps = bool(np.any(flow.jump))
        self._x = start.astype(np.float64)
        self.events = EventSteps.of(generator.events, step_s)
        width = max(1, len(readout)) * max(1, self.size)
        block_bits = int(np.clip(np.log2(tol.BLOCK_ENTRIES / width), tol.LEAST_BLOCK_BITS, tol.MOST_BLOCK_BITS))
        if len(self.events.steps) * tol.SPARSE_EVENTS > steps:
            block_bits = min(block_bits, tol.WALKED_BLOCK_BITS)
        self._block_bits = min(block_bits, max(0, int(np.ceil(np.log2(max(steps, 1) / tol.TESTED_STATES)))))
        block = 1 << self._block_bits
        self.block = block
        chunk_bits = int(max(0.0, np.log2(max(1.0, tol.CHUNK_ENTRIES / (block * max(1, len(readout), self.size))))))
        self._chunk_bits = min(chunk_bits, max(0, int(np.ceil(np.log2(max(1.0, steps / block))))))
        self.chunk = 1 << self._chunk_bits
        step_level = self._chunk_bits + self._block_bits
        self.ladder = Ladder.of(flow.M, step_s * block * self.chunk, least_depth=step_level)
        self.gram = Gramian(self.ladder)
        self.step_level = step_level
        self.move = self.ladder.transition(step_level).T
        self._block = self.ladder.transition(self._chunk_bits)
        self._spans = [self.ladder.transition(level)[: self.n, : self.n].T for level in range(self._chunk_bits, -1, -1)]
        self._observe = _observability(readout, self.ladder, step_level, self._block_bits)
        self._kicked: dict[tuple[int, ...], KickedBlocks] = {}
        self.end = np.concatenate((self._x, generator.state(np.array([first * step_s]))[0]))
        self._seen: list[FloatArray] = [self.end[None]]

    def rows(self) -> Iterator[FloatArray]:
        """Yield the samples of steps ``first`` .. ``first + steps`` in order, in pieces of shape (any, p)."""
        for first in range(self.first, self.last, self.block * self.chunk):
            yield self._advance_chunk(first)
        yield (self.readout @ self.end)[None]

    def gramian(self) -> FloatArray:
        """Return ∫ y yᵀ dt over the run, shape (n + g, n + g)."""
        for kicked in self._kicked.values():
            self.gram.add_square(self.step_level, kicked.sum_of_squares())
        self._kicked = {}
        return self.gram.total()

    def some_states(self) -> FloatArray:
        """Return y at some samples spread over the run, the first and the last among them, shape (some, n + g)."""
        seen = np.vstack((*self._seen, self.end[None]))
        return seen[:: max(1, len(seen) // tol.TESTED_STATES)]

    def _advance_chunk(self, first: int) -> FloatArray:
        blocks = min(self.chunk, -(-(self.last - first) // self.block))
        starts = first + self.block * np.arange(blocks)
        xi = self.generator.state(starts * self.step_s)
        stop = min(self.last, first + blocks * self.block)
        low, high = np.searchsorted(self.events.steps, (first, stop))
        eventful = self.events.steps[low:high]
        of_block = (eventful - first) // self.block
        stepped, kicked = np.zeros(blocks, dtype=bool), np.zeros(blocks, dtype=bool)
        kicked[of_block] = True
        low, high = np.searchsorted(self.events.inside_step, (first, stop))
        stepped[(self.events.inside_step[low:high] - first) // self.block] = True
        stepped[-1] |= stop < first + blocks * self.block
        kicked &= ~stepped
        kicks = _Kicks(self, first, kicked, eventful[kicked[of_block]]) if kicked.any() else None
        if kicks is not None and kicks.width * self.block > tol.WIDEST_KICKS * self.size:
            stepped, kicked, kicks = stepped | kicked, np.zeros(blocks, dtype=bool), None
        walk = None
        if stepped.any():
            walk = _Walk(self, first, stop, np.flatnonzero(stepped), eventful[stepped[of_block]])

        n = self.n
        ends = np.empty((blocks + 1, n))
        ends[0] = self._x
        ends[1:] = xi @ self._block[:n, n:].T
        if kicks is not None:
            ends[1:][kicked] += kicks.kicks @ kicks.products.ends[:, :n]
        if walk is not None:
            at_rest = np.hstack((np.zeros((len(walk.blocks), n)), xi[walk.blocks]))
            ends[walk.blocks + 1] = walk.go(at_rest)[-1, :, :n]
        for bit, move in enumerate(self._spans):
            shift = 1 << bit
            if shift > blocks:
                break
            ends[shift:] += ends[:-shift] @ move
        y = np.hstack((ends[:-1], xi))
        self._seen.append(y[:: max(1, self.steps // (self.block * tol.TESTED_STATES))])

        samples = np.empty((blocks, self.block * len(self.readout)))
        smooth = ~(stepped | kicked)
        if smooth.any():
            own = y if smooth.all() else y[smooth]
            self.gram.add(self._chunk_bits, own)
            samples[smooth] = own @ self._observe
        if kicks is not None and kicked.all():
            samples = kicks.products.take(y, kicks.kicks)
        elif kicks is not None:
            samples[kicked] = kicks.products.take(y[kicked], kicks.kicks)
        samples = samples.reshape(blocks, self.block, len(self.readout))
        end_state = np.concatenate((ends[-1], np.zeros(self.size - n)))
        if walk is not None:
            states = walk.go(y[walk.blocks])
            walk.gather(states)
            samples[walk.blocks] = (states[:-1] @ self.readout.T).transpose(1, 0, 2)
            if walk.blocks[-1] == blocks - 1:
                end_state = states[walk.last_steps, -1].copy()
        self._x = end_state[:n]
        end_state[n:] = self.generator.state(np.array([stop * self.step_s]))[0]
        self.end = end_state
        return samples.reshape(blocks * self.block, len(self.readout))[: stop - first]

    def xi_changes(self, steps: IntArray) -> tuple[FloatArray, FloatArray]:
        """Return ξ before steps (K,), and what it gains on each beyond its own flow, both shape (K, g)."""
        if len(steps) and steps[-1] - steps[0] + 1 == len(steps):
            xi = self.generator.state(np.arange(steps[0], steps[-1] + 2) * self.step_s)
            before, after = xi[:-1], xi[1:]
        else:
            before = self.generator.state(steps * self.step_s)
            after = self.generator.state((steps + 1) * self.step_s)
        return before, after - before @ self.move[self.n :, self.n :]

    def kicked_blocks(self, columns: tuple[int, ...]) -> KickedBlocks:
        """Return the products for kicks of some drive states, ``columns`` of ξ."""
        if columns not in self._kicked:
            kick = np.hstack((self.jump, np.eye(self.size - self.n)))[list(columns)]
            self._kicked[columns] = KickedBlocks(self.move, self._observe, kick, self.readout, block=self.block)
        return self._kicked[columns]


class _Kicks:
    """The kicks of the blocks of a chunk that have events on the grid alone: ``kicks`` (blocks, B q)."""

    def __init__(self, run: Propagation, first: int, kicked: BoolArray, eventful: IntArray) -> None:
        before, change = run.xi_changes(eventful)
        columns = [
            k
            for k in range(change.shape[1])
            if np.abs(change[:, k]).max() > tol.KICK_ROUNDING * np.abs(before[:, k]).max()
        ]
        self.width, count = len(columns), int(np.count_nonzero(kicked))
        kicks = change[:, columns]
        if len(kicks) < run.block * count:
            every = np.zeros((len(kicked), run.block, self.width))
            every[(eventful - first) // run.block, (eventful - first) % run.block] = kicks
            kicks = every[kicked]
        self.kicks = kicks.reshape(count, run.block * self.width)
        self.products = run.kicked_blocks(tuple(columns))


class _Walk:
    """Blocks that are stepped through, all together: those with events and a last one that is not full.

    An event step adds a kick known beforehand: y_{k+1} = e^(M h) y_k + kick_k.
    """

    def __init__(self, run: Propagation, first: int, stop: int, blocks: IntArray, eventful: IntArray) -> None:
        self.run, self.blocks = run, blocks
        self.last_steps = min(run.block, stop - (first + int(blocks[-1]) * run.block))
        place = np.full(int(blocks[-1]) + 1, -1, dtype=np.int64)
        place[blocks] = np.arange(len(blocks))
        row, local = place[(eventful - first) // run.block], (eventful - first) % run.block
        low, high = np.searchsorted(run.events.inside_step, (first, stop))
        self.pieces = _Pieces(run, run.events.inside_step[low:high], run.events.inside_time[low:high])
        kinked = np.searchsorted(eventful, self.pieces.steps)
        self.kinked = local[kinked], row[kinked]
        order = np.argsort(local.astype(np.int16), kind="stable")
        self.row, self.kick = row[order], self._kicks(eventful, kinked)[order]
        self.bounds = np.searchsorted(local[order], np.arange(run.block + 1))

    def _kicks(self, eventful: IntArray, kinked: IntArray) -> FloatArray:
        run, n = self.run, self.run.n
        before, change = run.xi_changes(eventful)
        kick = np.zeros((len(eventful), run.size))
        kick[:, n:] = change
        if run.jumps:
            kick[:, :n] = kick[:, n:] @ run.jump
        if len(kinked):
            kick[kinked, :n] = self.pieces.forced() - before[kinked] @ run.move[n:, :n]
        return kick

    def go(self, y: FloatArray) -> FloatArray:
        """Step from the starts of the blocks, (blocks, n + g), to their ends; return (steps + 1, blocks, n + g)."""
        run = self.run
        states = np.empty((run.block + 1, *y.shape))
        states[0] = y
        for local in range(run.block):
            np.matmul(states[local], run.move, out=states[local + 1])
            own = slice(self.bounds[local], self.bounds[local + 1])
            if own.stop - own.start == len(self.blocks):
                states[local + 1] += self.kick[own]
            elif own.stop > own.start:
                states[local + 1][self.row[own]] += self.kick[own]
        return states

    def gather(self, states: FloatArray) -> None:
        """Add the Gramian of the steps walked."""
        run, walked = self.run, states[:-1]
        if not len(self.pieces.steps) and self.last_steps == run.block:
            run.gram.add(run.step_level, walked.reshape(-1, run.size))
            return
        whole = np.ones(walked.shape[:2], dtype=bool)
        whole[self.kinked] = False
        whole[self.last_steps :, -1] = False
        run.gram.add(run.step_level, walked[whole])
        if len(self.pieces.steps):
            self.pieces.gather(states[self.kinked][:, : run.n])


class _Pieces:
    """The pieces between the events of each step that has some strictly inside."""

    def __init__(self, run: Propagation, step: IntArray, time_s: FloatArray) -> None:
        self.run = run
        first = np.flatnonzero(np.diff(step, prepend=-1))
        self.steps, self.count = step[first], np.diff(first, append=len(step))
        order = np.arange(len(step)) + np.searchsorted(self.steps, step) + 1
        begin = np.empty(len(step) + len(self.steps))
        begin[order] = time_s
        self.head = first + np.arange(len(first))
        begin[self.head] = self.steps * run.step_s
        self.begin = begin
        self.owner = np.repeat(np.arange(len(self.steps)), self.count + 1)
        end = np.append(begin[1:], 0.0)
        tail = self.head + self.count
        close = (self.steps + 1) * run.step_s
        end[tail] = close
        self.length = end - begin
        self.rest = close[self.owner] - end
        self.xi = run.generator.state(begin)
        self.next_xi = np.empty_like(self.xi)
        self.next_xi[:-1] = self.xi[1:]
        self.next_xi[tail] = run.generator.state(close)

    def forced(self) -> FloatArray:
        """What the drives alone add to x over each step, shape (steps, n)."""
        run, n = self.run, self.run.n
        total = np.zeros((len(self.steps), n))
        if not len(self.steps):
            return total
        state = np.hstack((np.zeros((len(self.begin), n)), self.xi))
        state = run.ladder.advance(state, self.length, from_level=run.step_level)
        state[:, :n] += (self.next_xi - state[:, n:]) @ run.jump
        state[:, n:] = 0.0
        state = run.ladder.advance(state, self.rest, from_level=run.step_level)
        np.add.at(total, self.owner, state[:, :n])
        return total

    def gather(self, x: FloatArray) -> None:
        """Add the Gramian of these steps, x (steps, n) being the states at their starts."""
        run, n = self.run, self.run.n
        for order in range(int(self.count.max()) + 1):
            rows = np.flatnonzero(self.count >= order)
            piece = self.head[rows] + order
            state = np.hstack((x[rows], self.xi[piece]))
            moved = run.ladder.advance(state, self.length[piece], from_level=run.step_level, gram=run.gram)
            x = x.copy()
            x[rows] = moved[:, :n] + (self.next_xi[piece] - moved[:, n:]) @ run.jump


def _observability(readout: FloatArray, ladder: Ladder, step_level: int, bits: int) -> FloatArray:
    """Samples of a block from its start: shape (size, block p), column i p + j is output j after i steps."""
    rows = readout
    for bit in range(bits):
        rows = np.vstack((rows, rows @ ladder.transition(step_level - bit)))
    return np.ascontiguousarray(rows.T)
