"""One piece of a piecewise-linear network: its modes, its guards, and the instants at which to look at them."""

from __future__ import annotations

import math
from collections import OrderedDict
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.switched.faults import shorted_sources, stranded_sources
from interwind_service.response.switched.modal import Instant, Modes, instant_of, modes_of
from interwind_service.response.switched.tableau import Mode, Tableau

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class GuardRows:
    """The guards of one piece: ``device``, ``then`` (g,); rows over s (g, m), over x (g, n), the constant (g,)."""

    device: NDArray[np.int64]
    then: NDArray[np.int64]
    over_s: FloatArray
    over_x: FloatArray
    offset: FloatArray


def guard_rows(tableau: Tableau, mode: Mode) -> GuardRows:
    """Return the guards of all devices in their modes as rows over the signals."""
    device, then, over_s, over_x, offset = [], [], [], [], []
    for position, (item, own) in enumerate(zip(tableau.devices, mode, strict=True)):
        for guard in item.guards(own):
            row = guard.voltage * tableau.branch_voltage_row(item.branch)
            row[tableau.column_of_current[item.branch]] += guard.current
            states = np.zeros(tableau.states)
            if item.state >= 0:
                states[item.state] = guard.state
            device.append(position)
            then.append(guard.then)
            over_s.append(row)
            over_x.append(states)
            offset.append(guard.offset)
    return GuardRows(
        np.array(device, dtype=np.int64),
        np.array(then, dtype=np.int64),
        np.array(over_s).reshape(len(device), tableau.unknowns),
        np.array(over_x).reshape(len(device), tableau.states),
        np.array(offset, dtype=np.float64),
    )


@dataclass(frozen=True, slots=True, eq=False)
class AtInstant:
    """Guards straight from states and drives: g = GX x + Re GU w, with the sums of magnitudes for their rounding."""

    rows: GuardRows
    GX: FloatArray
    GU: FloatArray

    def values(self, x: FloatArray, w: ComplexArray) -> tuple[FloatArray, FloatArray]:
        """Return the guards and the scale their rounding counts from."""
        value = self.GX @ x + (self.GU @ w).real
        scale = np.abs(self.GX) @ np.abs(x) + np.abs(self.GU) @ np.abs(w)
        return value, scale


@dataclass(frozen=True, slots=True, eq=False)
class Piece:
    """Modes and guards of one combination of device states.

    ``guard`` (g, h), ``guard_forced`` (g, b, k); ``look`` (T,) instants from 0; ``table`` (T, 2(h + b)) the real and
    imaginary parts of the basis there; ``rise`` (b, b) differentiates the forced basis; ``speed`` (h,) = |λ|.
    """

    number: int
    mode: Mode
    modes: Modes
    rows: GuardRows
    guard: ComplexArray
    guard_forced: ComplexArray
    look: FloatArray
    table: FloatArray
    rise: ComplexArray
    speed: FloatArray
    drive_speed: float
    rates: ComplexArray
    order: NDArray[np.int64]
    powers: FloatArray | None
    weights: FloatArray
    jump: NDArray[np.bool_]
    shorted: tuple[int, ...]
    stranded: tuple[int, ...]

    def growth(self, time_s: float) -> ComplexArray:
        """Return e^{λt} and t^q e^{st} / q! at one instant, shape (h + b,)."""
        found = np.exp(self.rates * time_s)
        if self.powers is not None:
            found *= time_s**self.powers * self.weights
        return found

    def basis(self, time_s: FloatArray) -> ComplexArray:
        """Return e^{λt} and t^q e^{st} / q! at instants, shape (T, h + b)."""
        t = np.asarray(time_s)[:, None]
        found = np.exp(self.rates * t)
        if self.powers is not None:
            found *= t**self.powers * self.weights
        return found

    def panels(self, span_s: float, widest_s: float) -> FloatArray:
        """Return the edges of panels over a segment, short against every living mode and at most ``widest_s`` wide."""
        edges = np.append(self.look[self.look < span_s], span_s)
        pieces = np.maximum(1, np.ceil(np.diff(edges) / widest_s).astype(int))
        inner = [np.linspace(a, b, n + 1)[:-1] for a, b, n in zip(edges[:-1], edges[1:], pieces, strict=True)]
        return np.append(np.concatenate(inner) if inner else np.zeros(0), span_s)

    def driven(self, w: ComplexArray) -> Driven:
        """Return the piece under the drives w at its start."""
        guard = self.guard_forced @ w
        return Driven(
            self,
            w,
            (self.modes.particular @ w).real,
            self.modes.state_forced @ w,
            guard,
            guard @ self.rise,
            np.abs(guard[:, self.modes.power == 0]).sum(axis=1),
        )


@dataclass(frozen=True, slots=True, eq=False)
class Driven:
    """A piece with its drives: particular states (n,), forced states (n, b), forced guards and their slopes (g, b)."""

    piece: Piece
    w: ComplexArray
    particular: FloatArray
    state: ComplexArray
    guard: ComplexArray
    guard_slope: ComplexArray
    guard_scale: FloatArray


def look_out(modes: Modes, span_s: float) -> FloatArray:
    """Return the instants at which guards are looked at: dense as the fastest living mode asks, growing geometrically.

    The step is at most ``GRID_RATIO`` of the time, a ``1/GRID_COARSEST`` of the span, and ``GRID_RADIANS`` of every
    oscillation that has not decayed; the whole is cut at ``GRID_POINTS``, after which a new piece of the run begins.
    """
    rates = np.concatenate([modes.eigenvalue, modes.exponent])
    rates = rates[np.abs(rates) > 0.0]
    coarsest = span_s / tol.GRID_COARSEST
    first = min(coarsest, tol.GRID_FIRST / np.abs(rates).max(initial=1.0 / span_s))
    wave = np.abs(rates.imag)
    with np.errstate(divide="ignore"):
        alive = np.where(wave > 0.0, tol.GRID_ALIVE / np.abs(rates.real), 0.0)
    turns = np.unique(np.concatenate([alive[(alive > first) & (alive < span_s)], [span_s]]))
    points = [np.array([0.0, first])]
    now, count = first, 2
    for turn in turns:
        living = wave[alive >= turn]
        cap = min(coarsest, tol.GRID_RADIANS / living.max(initial=tol.GRID_RADIANS / coarsest))
        growing = int(np.ceil(np.log(max(1.0, min(turn, cap / tol.GRID_RATIO) / now)) / np.log1p(tol.GRID_RATIO)))
        if growing > 0:
            grown = now * (1.0 + tol.GRID_RATIO) ** np.arange(1, growing + 1)
            grown = grown[grown < turn]
            points.append(grown)
            now = float(grown[-1]) if grown.size else now
            count += len(grown)
        steps = int(np.ceil((turn - now) / cap)) if turn > now else 0
        steps = min(steps, tol.GRID_POINTS - count)
        if steps > 0:
            even = now + cap * np.arange(1, steps + 1)
            points.append(np.minimum(even, turn))
            now = float(points[-1][-1])
            count += steps
        if count >= tol.GRID_POINTS:
            break
    return np.concatenate(points)


@dataclass(slots=True, eq=False)
class Pieces:
    """All pieces of one network, made when first met and kept for the run (the least recently used leave)."""

    tableau: Tableau
    rate_per_s: float
    span_s: float
    made: OrderedDict[Mode, Piece] = field(default_factory=OrderedDict)
    instants: OrderedDict[Mode, tuple[Instant, AtInstant]] = field(default_factory=OrderedDict)
    bound: OrderedDict[tuple[Mode, bytes], Driven] = field(default_factory=OrderedDict)
    count: int = 0
    worst_condition: float = 1.0

    def at_instant(self, mode: Mode) -> AtInstant:
        """Return the guards of a combination straight from states and drives."""
        return self._instant(mode)[1]

    def instant(self, mode: Mode) -> Instant:
        """Return the signals of a combination straight from states and drives."""
        return self._instant(mode)[0]

    def _instant(self, mode: Mode) -> tuple[Instant, AtInstant]:
        found = self.instants.get(mode)
        if found is None:
            solved = instant_of(self.tableau, mode)
            rows = guard_rows(self.tableau, mode)
            GU = rows.over_s @ solved.SU
            GU[:, 0] += rows.offset
            found = (solved, AtInstant(rows, rows.over_s @ solved.SX + rows.over_x, GU))
            self.instants[mode] = found
            if len(self.instants) > tol.PIECES_KEPT:
                self.instants.popitem(last=False)
        return found

    def driven(self, mode: Mode, w: ComplexArray, key: bytes) -> Driven:
        """Return a piece under drives that stand still, kept by ``key``, the bytes of w."""
        found = self.bound.get((mode, key))
        if found is None:
            found = self.bound[mode, key] = self.piece(mode).driven(w)
            if len(self.bound) > tol.PIECES_KEPT:
                self.bound.popitem(last=False)
        return found

    def piece(self, mode: Mode) -> Piece:
        """Return the piece of a combination of device states."""
        found = self.made.get(mode)
        if found is not None:
            self.made.move_to_end(mode)
            return found
        solved, at = self._instant(mode)
        modes = modes_of(self.tableau, mode, solved, self.rate_per_s, self.span_s)
        rows = np.hstack([at.rows.over_s, at.rows.over_x])
        guard = rows @ modes.signal
        forced = np.einsum("gm,mbk->gbk", rows, modes.forced)
        constant = int(np.flatnonzero((modes.exponent == 0.0) & (modes.power == 0))[0])
        forced[:, constant, 0] += at.rows.offset
        rise = np.diag(modes.exponent)
        for k in np.flatnonzero(modes.power):
            below = np.flatnonzero((modes.exponent == modes.exponent[k]) & (modes.power == modes.power[k] - 1))
            rise[k, below[0]] = 1.0
        order = np.concatenate([np.zeros(len(modes.eigenvalue), dtype=np.int64), modes.power])
        weights = 1.0 / np.array([math.factorial(int(q)) for q in order])
        rates = np.concatenate([modes.eigenvalue, modes.exponent])
        bare = Piece(
            self.count, mode, modes, at.rows, guard, forced, look_out(modes, self.span_s), np.empty((0, 0)), rise,
            np.abs(modes.eigenvalue), float(np.abs(modes.exponent).max(initial=0.0)), rates,
            order, order.astype(float) if order.any() else None, weights, _jump_modes(self.tableau, mode, modes),
            shorted_sources(self.tableau, mode),
            stranded_sources(self.tableau, mode),
        )  # fmt: skip
        basis = bare.basis(bare.look)
        found = replace(bare, table=np.ascontiguousarray(np.hstack([basis.real, -basis.imag])))
        self.count += 1
        self.worst_condition = max(self.worst_condition, modes.condition)
        self.made[mode] = found
        if len(self.made) > tol.PIECES_KEPT:
            self.made.popitem(last=False)
        return found


def _jump_modes(tableau: Tableau, mode: Mode, modes: Modes) -> NDArray[np.bool_]:
    """Return which modes are jumps of the ideal network: their energy goes mostly into stand-ins of ideal elements."""
    resistance, rows = tableau.stand_ins(mode)
    through = np.abs(rows @ modes.signal[: tableau.unknowns]) ** 2
    lost = resistance @ through if len(resistance) else np.zeros(len(modes.eigenvalue))
    energy = (np.abs(modes.state_signal) ** 2).sum(axis=0)
    return lost > tol.JUMP_SHARE * np.abs(modes.eigenvalue.real) * energy
