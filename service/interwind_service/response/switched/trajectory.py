"""A trajectory: the segments of a run, each a modal sum, and whatever is read from it: samples, integrals, peaks."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.drive.drives import Drives
from interwind_service.response.switched.modal_integrals import gauss_points, products, transform
from interwind_service.response.switched.piece import Piece
from interwind_service.response.switched.tableau import Tableau

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class Rows:
    """Rows over the signals y = (s, x) with a constant: ``over`` (r, m + n), ``offset`` (r,)."""

    over: FloatArray
    offset: FloatArray

    def coefficients(self, piece: Piece, kappa: ComplexArray, w: ComplexArray) -> ComplexArray:
        """Return the rows as sums over the basis of each segment, shape (segments, r, h + b)."""
        modes = piece.modes
        free = (self.over @ modes.signal)[None] * kappa[:, None, :]
        forced = np.tensordot(self.over, modes.forced, axes=1)
        constant = int(np.flatnonzero((modes.exponent == 0.0) & (modes.power == 0))[0])
        forced[:, constant, 0] += self.offset
        return np.concatenate([free, np.tensordot(w, forced, axes=(1, 2))], axis=2)


def product_integrals(piece: Piece, span_s: FloatArray, one: ComplexArray, other: ComplexArray) -> FloatArray:
    """Return ∫ Re(one·f) Re(other·f) dt over segments of a piece, (segments, rows): in closed form, else by panels.

    Modes that almost coincide carry large amplitudes of opposite sign. Their sum is right, but in the integral of a
    product they cancel to the square of their condition; there the sums themselves are integrated by Gauss-Legendre.
    """
    if piece.modes.condition <= tol.CANCELLING_MODES:
        return products(piece.rates, piece.order, span_s, one, other)
    found = np.empty(one.shape[:2])
    for k, span in enumerate(span_s.tolist()):
        t, weight = gauss_points(piece.panels(span, span))
        basis = piece.basis(t)
        found[k] = weight @ ((basis @ one[k].T).real * (basis @ other[k].T).real)
    return found


@dataclass(frozen=True, slots=True, eq=False)
class Group:
    """All segments of one piece: positions in the run, starts, spans, amplitudes κ (S, h), drives w (S, k)."""

    piece: Piece
    position: IntArray
    start_s: FloatArray
    span_s: FloatArray
    kappa: ComplexArray
    w: ComplexArray

    def part(self, chosen: IntArray | slice) -> Group:
        """Return some of the segments."""
        return Group(
            self.piece, self.position[chosen], self.start_s[chosen], self.span_s[chosen], self.kappa[chosen],
            self.w[chosen],
        )  # fmt: skip


@dataclass(slots=True, eq=False)
class Trajectory:
    """Segments in order, and the changes of device modes (time, device, new mode)."""

    piece: list[Piece] = field(default_factory=list)
    start_s: list[float] = field(default_factory=list)
    span_s: list[float] = field(default_factory=list)
    kappa: list[ComplexArray] = field(default_factory=list)
    w: list[ComplexArray] = field(default_factory=list)
    changes: list[tuple[float, int, int]] = field(default_factory=list)

    def add(self, piece: Piece, start_s: float, span_s: float, kappa: ComplexArray, w: ComplexArray) -> None:
        """Append one segment."""
        self.piece.append(piece)
        self.start_s.append(start_s)
        self.span_s.append(span_s)
        self.kappa.append(kappa)
        self.w.append(w)

    def groups(self, low: int = 0, high: int | None = None) -> Iterator[Group]:
        """Yield segments ``low`` to before ``high`` (None: all) by piece, so many at once."""
        members: dict[int, list[int]] = {}
        for position, piece in enumerate(self.piece[low:high], start=low):
            members.setdefault(id(piece), []).append(position)
        for positions in members.values():
            for first in range(0, len(positions), tol.SEGMENTS_TOGETHER):
                own = np.array(positions[first : first + tol.SEGMENTS_TOGETHER])
                yield Group(
                    self.piece[own[0]],
                    own,
                    np.array([self.start_s[k] for k in own]),
                    np.array([self.span_s[k] for k in own]),
                    np.array([self.kappa[k] for k in own]),
                    np.array([self.w[k] for k in own]),
                )

    def between(self, drives: Drives, start_s: float, stop_s: float) -> Trajectory:
        """Return the segments from ``start_s`` to ``stop_s``, the first and the last cut there."""
        part = Trajectory()
        first = max(0, bisect_right(self.start_s, start_s) - 1)
        for k in range(first, bisect_left(self.start_s, stop_s)):
            piece, start, kappa, w = self.piece[k], self.start_s[k], self.kappa[k], self.w[k]
            begin, end = max(start, start_s), min(start + self.span_s[k], stop_s)
            if end <= begin and len(self.start_s) > 1:
                continue
            if begin > start:
                kappa, w = kappa * np.exp(piece.modes.eigenvalue * (begin - start)), drives.moved(w, begin - start)
            part.add(piece, begin, end - begin, kappa, w)
        return part

    def segment_of(self, time_s: FloatArray, settle_s: float) -> tuple[IntArray, NDArray[np.bool_]]:
        """Return the segment of each sample, and whether it stands at an event (then: the one after the jump)."""
        rounding = tol.SAME_INSTANT * self._ends(len(self.start_s) - 1)
        low = max(0, bisect_left(self.start_s, time_s.min(initial=np.inf) - rounding) - 1)
        start = np.array(self.start_s[low : bisect_right(self.start_s, time_s.max(initial=0.0) + rounding)])
        own = low + np.maximum(np.searchsorted(start, time_s + rounding, side="right") - 1, 0)
        at_event = np.abs(start[own - low] - time_s) <= rounding
        for k in np.flatnonzero(at_event):
            first = low + int(np.searchsorted(start, time_s[k] - rounding))
            while first < own[k] or (self._jumps(first, settle_s) and self._ends(first) < time_s[k] + settle_s):
                if first + 1 == len(self.start_s):
                    break
                first += 1
            own[k] = first
        return own, at_event

    def _ends(self, segment: int) -> float:
        return self.start_s[segment] + self.span_s[segment]

    def _jumps(self, segment: int, settle_s: float) -> bool:
        """Whether a jump of the ideal network is under way in a segment."""
        piece, kappa = self.piece[segment], self.kappa[segment]
        quick = piece.jump & (piece.speed * settle_s > tol.SETTLED)
        if not quick.any():
            return False
        weight = np.abs(kappa) * np.linalg.norm(piece.modes.state_signal, axis=0)
        return bool(weight[quick].max() > tol.JUMP_WEIGHT * weight.max())

    def distinct(self) -> list[Piece]:
        """Return the pieces met, each once."""
        return list({piece.number: piece for piece in self.piece}.values())

    def samples(
        self,
        rows_of: dict[int, Rows],
        time_s: FloatArray,
        settle_s: float,
        finish: Callable[[int, FloatArray], FloatArray],
    ) -> FloatArray:
        """Return quantities at instants, shape (T, r): limits from the right, a jump at an instant already made.

        ``rows_of`` the rows by piece number; ``finish`` turns sampled rows of a piece into the quantities.
        """
        segment, at_event = self.segment_of(time_s, settle_s)
        order = np.argsort(segment, kind="stable")
        ranked = segment[order]
        found: FloatArray | None = None
        for group in self.groups(int(segment.min(initial=0)), int(segment.max(initial=-1)) + 1):
            first = np.searchsorted(ranked, group.position, side="left")
            counts = np.searchsorted(ranked, group.position, side="right") - first
            if not counts.any():
                continue
            which = np.repeat(np.arange(len(counts)), counts)
            taken = order[np.concatenate([np.arange(a, a + n) for a, n in zip(first, counts, strict=True) if n])]
            coefficients = rows_of[group.piece.number].coefficients(group.piece, group.kappa, group.w)
            dead = np.flatnonzero(group.piece.jump & (group.piece.speed * settle_s > tol.SETTLED))
            for low in range(0, len(taken), tol.SAMPLES_TOGETHER):
                some, of = taken[low : low + tol.SAMPLES_TOGETHER], which[low : low + tol.SAMPLES_TOGETHER]
                basis = group.piece.basis(np.maximum(time_s[some] - group.start_s[of], 0.0))
                if dead.size:
                    basis[np.ix_(at_event[some], dead)] = 0.0
                value = finish(group.piece.number, np.einsum("tb,trb->tr", basis, coefficients[of]).real)
                if found is None:
                    found = np.empty((len(time_s), value.shape[1]))
                found[some] = value
        return found if found is not None else np.empty((len(time_s), 0))

    def state_integral(self, tableau: Tableau) -> FloatArray:
        """Return ∫ x dt over the run, shape (n,)."""
        width = tableau.unknowns + tableau.states
        rows = Rows(np.eye(width)[tableau.unknowns :], np.zeros(tableau.states))
        total = np.zeros(tableau.states)
        for group in self.groups():
            straight, turned = transform(group.piece.rates, group.piece.order, group.span_s, np.zeros(1))
            coefficients = rows.coefficients(group.piece, group.kappa, group.w)
            both = np.einsum("srb,sb->r", coefficients, straight[:, :, 0])
            both += np.einsum("srb,sb->r", coefficients.conj(), turned[:, :, 0])
            total += 0.5 * both.real
        return total

    def peak_energy(self, tableau: Tableau) -> float:
        """Return the largest |x|²/2 among some instants inside every segment, J."""
        width = tableau.unknowns + tableau.states
        rows = Rows(np.eye(width)[tableau.unknowns :], np.zeros(tableau.states))
        largest = 0.0
        for group in self.groups():
            coefficients = rows.coefficients(group.piece, group.kappa, group.w)
            for share in np.linspace(0.0, 1.0, tol.PEAK_LOOKS):
                x = np.einsum("srb,sb->sr", coefficients, group.piece.basis(share * group.span_s)).real
                largest = max(largest, 0.5 * float((x**2).sum(axis=1).max()))
        return largest

    def residual(self, tableau: Tableau) -> float:
        """Return max |b − A s|∞ / (|A|∞ |s|∞ + |b|∞) rows of A scaled to sum 1, numerator and
        denominator each the largest over the ends of some segments.
        """
        worst = largest = 0.0
        for group in self.groups():
            piece, size = group.piece, tableau.unknowns
            M, N, F = tableau.with_modes(piece.mode)
            chosen = slice(None, None, max(1, len(group.position) // tol.RESIDUAL_LOOKS))
            part = group.part(chosen)
            every = Rows(np.eye(size + tableau.states), np.zeros(size + tableau.states))
            y = np.einsum("srb,sb->sr", every.coefficients(piece, part.kappa, part.w), piece.basis(part.span_s)).real
            w = np.array([tableau.drives.moved(own, span) for own, span in zip(part.w, part.span_s, strict=True)])
            s, right = y[:, :size], y[:, size:] @ N.T + (w @ F.T).real
            scale = np.abs(M).sum(axis=1)
            worst = max(worst, float((np.abs(s @ M.T - right) / scale).max(initial=0.0)))
            largest = max(largest, float(np.abs(s).max(initial=0.0)) + float(np.abs(right / scale).max(initial=0.0)))
        return worst / largest if largest > 0.0 else 0.0
