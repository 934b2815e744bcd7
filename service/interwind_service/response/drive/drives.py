"""Drives of a switched network: all sources as one generator, and the instants at which anything is set anew.

Between two breakpoints every source is u(t) = Re U w(t), dw/dt = W w, with chains w_c' = s_c w_c + w_next: a constant
and a straight line (s = 0), a sine (s = jω), exponentials and powers of t times one. Channel 0 is the constant 1 of the
forward voltages. Gates and waveforms change w only at breakpoints, so one set of modes serves a whole run.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest
from interwind.model.devices import Gate, GateTimes, Switch
from interwind_service import tolerances as tol
from interwind_service.network.forest import components
from interwind_service.network.topology import Topology
from interwind_service.response.drive.corners import snap
from interwind_service.response.drive.generator import Generator, generator_of

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class Drives:
    """``exponent`` (k,) s, 1/s; ``link`` (k,) the next channel of the chain, -1 for none; ``U`` (inputs, k).

    ``turn`` (k, g) makes w of the states ξ of the generator; channel 0 stands beside them. ``steady`` : w stands still
    between breakpoints; ``linked`` : some chain is longer than one channel.
    """

    generator: Generator
    exponent: ComplexArray
    link: IntArray
    U: ComplexArray
    turn: ComplexArray
    steady: bool
    linked: bool

    @property
    def W(self) -> ComplexArray:
        """The generator matrix, shape (k, k)."""
        matrix = np.diag(self.exponent)
        linked = np.flatnonzero(self.link >= 0)
        matrix[linked, self.link[linked]] = 1.0
        return matrix

    def state(self, time_s: float) -> ComplexArray:
        """Return w at an instant that is no breakpoint, shape (k,)."""
        w: ComplexArray = self.turn @ self.generator.state(np.array([time_s]))[0]
        w[0] = 1.0
        return w

    def moved(self, w: ComplexArray, by_s: float) -> ComplexArray:
        """Return e^{W by} w, shape (k,)."""
        return w if self.steady else self.moved_to(w, np.array([by_s]))[0]

    def moved_to(self, w: ComplexArray, by_s: FloatArray) -> ComplexArray:
        """Return e^{W by} w for several times (T,), shape (T, k); ``w`` (k,) or one for each time, (T, k)."""
        growth = np.exp(self.exponent * by_s[:, None])
        moved: ComplexArray = growth * w
        if not self.linked:
            return moved
        source, order, term = self.link, 1, np.ones(len(by_s))
        while np.any(source >= 0):
            term = term * by_s / order
            reached = np.flatnonzero(source >= 0)
            moved[:, reached] += growth[:, reached] * term[:, None] * w[..., source[reached]]
            source = np.where(source >= 0, self.link[source], -1)
            order += 1
        return moved


def drives_of(topology: Topology, stop_s: float, step_s: float) -> Drives:
    """Return the generator of the sources of a network over [0, stop] in chains, after that of all sources."""
    generator = generator_of(topology, stop_s, step_s)
    exponent: list[complex] = [0.0]
    link, turns, reads = [-1], [np.zeros((1, len(generator.S)), dtype=complex)], [np.zeros((len(generator.U), 1))]
    for block in _blocks(generator.S):
        turn, exponents, links = _chain_form(generator.S[np.ix_(block, block)])
        link += [len(exponent) + other if other >= 0 else -1 for other in links]
        exponent += exponents
        placed = np.zeros((len(turn), len(generator.S)), dtype=complex)
        placed[:, block] = turn
        turns.append(placed)
        reads.append(_reading(generator.U[:, block], turn))
    steady = not any(exponent) and max(link) < 0
    return Drives(
        generator,
        np.array(exponent, dtype=complex),
        np.array(link, dtype=np.int64),
        np.hstack(reads),
        np.vstack(turns),
        steady,
        max(link) >= 0,
    )


def _blocks(S: FloatArray) -> list[IntArray]:
    """Return the states of each generator."""
    row, column = np.nonzero(S)
    of = components(len(S), row, column)
    return [np.flatnonzero(of == k) for k in range(int(of.max(initial=-1)) + 1)]


def _chain_form(S: FloatArray) -> tuple[ComplexArray, list[complex], list[int]]:
    """Return (turn, exponents, links) with w = turn ξ a chain: one complex channel for a turning pair."""
    size = len(S)
    if size == 2 and S[0, 1] * S[1, 0] < 0.0:  # ξ = (sin, cos): cos + j sin turns at −rate + jω
        return np.array([[1j, 1.0]]), [complex(S[0, 0], S[0, 1])], [-1]
    scale, links = np.ones(size), [-1] * size
    feeds = {row: int(np.flatnonzero(_off_diagonal(S, row))[0]) for row in range(size) if _off_diagonal(S, row).any()}
    for row in sorted(feeds, key=lambda r: _depth(r, feeds), reverse=True):
        links[row] = feeds[row]
        scale[feeds[row]] = scale[row] * S[row, feeds[row]]
    return np.diag(scale).astype(complex), [complex(S[k, k]) for k in range(size)], links


def _off_diagonal(S: FloatArray, row: int) -> NDArray[np.bool_]:
    found = S[row] != 0.0
    found[row] = False
    return found


def _depth(row: int, feeds: dict[int, int]) -> int:
    return 0 if row not in feeds else 1 + _depth(feeds[row], feeds)


def _reading(output: FloatArray, turn: ComplexArray) -> ComplexArray:
    """Return the rows with Re(row w) = output ξ."""
    if turn.shape == (1, 2):
        return output[:, 1:] - 1j * output[:, :1]
    return output / turn.diagonal()


def breakpoints(topology: Topology, drives: Drives, stop_s: float, step_s: float) -> FloatArray:
    """Return the instants in [0, stop] at which a gate or the law of a waveform changes, both ends included."""
    found = [np.array([0.0, stop_s])]
    found.append(drives.generator.events)
    for element in topology.network.elements:
        if isinstance(element, Switch):
            found.append(snap(_gate_edges(element.closed, stop_s), step_s))
    every = np.unique(np.concatenate(found))
    every = every[(every >= 0.0) & (every <= stop_s)]
    merged = every[np.concatenate([[True], np.diff(every) > tol.SAME_INSTANT * stop_s])]
    if len(merged) > 1:
        merged[-1] = stop_s
    return merged


def _gate_edges(gate: Gate | GateTimes, stop_s: float) -> FloatArray:
    if isinstance(gate, GateTimes):
        return gate.toggle_s
    if gate.on_s <= 0.0 or gate.on_s >= gate.period_s:
        return np.zeros(0)
    first = math.floor(-(gate.delay_s + gate.on_s) / gate.period_s)
    cycles = math.ceil((stop_s - gate.delay_s) / gate.period_s) - first + 1
    if cycles > tol.MAXIMUM_BREAKPOINTS:
        raise InvalidRequest.at(
            "stop_s",
            f"{stop_s!r} s holds {cycles} periods of a gate of {gate.period_s!r} s; the limit is "
            f"{tol.MAXIMUM_BREAKPOINTS}; shorten the run or ask for the periodic response",
        )
    start = gate.delay_s + gate.period_s * (first + np.arange(cycles))
    return np.concatenate([start, start + gate.on_s])


def closed_at(gate: Gate | GateTimes, time_s: float) -> bool:
    """Whether a gate holds its switch closed at an instant inside an interval."""
    if isinstance(gate, Gate):
        return gate.on_s >= gate.period_s or (time_s - gate.delay_s) % gate.period_s < gate.on_s
    return gate.initially_closed ^ bool(int(np.searchsorted(gate.toggle_s, time_s, side="right")) % 2)
