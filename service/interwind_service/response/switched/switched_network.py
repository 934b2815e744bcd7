"""A network of switches, piecewise-linear diodes and saturable branches, run from event to event."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork, InvalidRequest
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.response.drive.drives import breakpoints, closed_at, drives_of
from interwind_service.response.switched.complementarity import consistent_modes
from interwind_service.response.switched.device import SaturableBranch, TimedSwitch
from interwind_service.response.switched.events import first_event
from interwind_service.response.switched.faults import refuse_short, refuse_stranded
from interwind_service.response.switched.ideal_limit import ideal_limit_of
from interwind_service.response.switched.piece import Piece, Pieces
from interwind_service.response.switched.tableau import Mode, Tableau, tableau_of
from interwind_service.response.switched.trajectory import Trajectory

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(slots=True, eq=False)
class Passage:
    """Where a run stands: state, device modes, ∂x/∂x(start) if asked for, and the largest |x|²/2 met, J."""

    x: FloatArray
    mode: Mode
    jacobian: FloatArray | None = None
    peak_j: float = 0.0


@dataclass(slots=True, eq=False)
class SwitchedNetwork:
    """A numbered network with its pieces, and the instants in [0, stop] at which a gate or waveform sets it anew."""

    tableau: Tableau
    pieces: Pieces
    breakpoint_s: FloatArray

    def start_mode(self, x: FloatArray) -> Mode:
        """Return blocking diodes, open switches and the pieces that hold the residual fluxes."""
        return tuple(
            device.mode_at(device.root * x[device.state]) if isinstance(device, SaturableBranch) else 0
            for device in self.tableau.devices
        )

    def mode_at(self, mode: Mode, start: float, stop: float) -> Mode:
        """Return the modes with the switches as they stand from ``start`` to ``stop``."""
        inside = 0.5 * (start + stop)
        return tuple(
            int(closed_at(device.gate, inside)) if isinstance(device, TimedSwitch) else own
            for device, own in zip(self.tableau.devices, mode, strict=True)
        )

    def consistent(self, mode: Mode, x: FloatArray, w: ComplexArray) -> Mode:
        """Return the modes with the diodes in the one combination that x and w allow."""
        return consistent_modes(self.pieces, mode, x, w)

    def run(
        self,
        x: FloatArray,
        mode: Mode,
        *,
        record: Trajectory | None = None,
        monodromy: bool = False,
        progress: Callable[[int, int], None] | None = None,
    ) -> Passage:
        """Run from x over all intervals; with ``monodromy`` also Φ = ∂x(end)/∂x(start)."""
        passage = Passage(x, mode, np.eye(self.tableau.states) if monodromy else None, 0.5 * float(x @ x))
        intervals = len(self.breakpoint_s) - 1
        for k in range(intervals):
            self._interval(passage, float(self.breakpoint_s[k]), float(self.breakpoint_s[k + 1]), record)
            if progress is not None:
                progress(k + 1, intervals)
        return passage

    def _interval(self, passage: Passage, start: float, stop: float, record: Trajectory | None) -> None:
        """Run from one change of the drives to the next."""
        x, phi = passage.x, passage.jacobian
        inside = 0.5 * (start + stop)
        w_inside = self.tableau.drives.state(inside)
        w = self.tableau.drives.moved(w_inside, start - inside)
        mode = self.consistent(self.mode_at(passage.mode, start, stop), x, w)
        if record is not None:
            pairs = enumerate(zip(passage.mode, mode, strict=True))
            record.changes += [(start, device, new) for device, (old, new) in pairs if old != new]
        now, fresh, events, ties, slack, tie_s = start, -1, 0, 0, 1.0, tol.TIE * stop
        steady, kept = self.tableau.drives.steady, w.tobytes()
        while now < stop:
            bound = self.pieces.driven(mode, w, kept) if steady else self.pieces.piece(mode).driven(w)
            piece, modes = bound.piece, bound.piece.modes
            kappa = modes.left @ (x - bound.particular)
            span, change = first_event(bound, kappa, stop - now, fresh, tie_s, slack)
            if (piece.shorted or piece.stranded) and span > tol.FAULT_SPAN * (stop - start):
                self._require_possible(piece, self.tableau.drives.moved(w, 0.5 * span), now)
            growth = piece.growth(span)
            homogeneous, forced = growth[: len(kappa)], growth[len(kappa) :]
            if record is not None:
                record.add(piece, now, span, kappa, w)
            V = modes.state_signal
            if phi is not None:
                phi = ((V * homogeneous) @ modes.left).real @ phi
            x = (V @ (homogeneous * kappa) + bound.state @ forced).real
            now = stop if span >= stop - now else now + span
            if not steady:
                w = self.tableau.drives.moved(w_inside, now - inside)
            fresh = -1
            if change is not None:
                fresh = change.device
                mode = (*mode[:fresh], change.then, *mode[fresh + 1 :])
                events += 1
                ties = ties + 1 if span <= tie_s else 0
                if ties == 0:
                    slack = 1.0
                elif ties > tol.TIES_PER_DEVICE * len(mode):  # the same devices flip without end: let rounding be
                    ties, slack = 1, slack * tol.TIE_SLACK
                if record is not None:
                    record.changes.append((now, fresh, change.then))
                if events > tol.EVENTS_PER_INTERVAL:
                    self._chattering(record, start, stop)
            passage.peak_j = max(passage.peak_j, 0.5 * float(x @ x))
        passage.x, passage.mode, passage.jacobian = x, mode, phi

    def _require_possible(self, piece: Piece, w: ComplexArray, time_s: float) -> None:
        """Refuse a source that is not zero while ideal devices short it or leave it no path."""
        position = self.tableau.topology.input_branch.tolist()
        drive = (self.tableau.drives.U @ w).real
        for branches, refuse in ((piece.shorted, refuse_short), (piece.stranded, refuse_stranded)):
            for branch in branches:
                if drive[position.index(branch)] != 0.0:
                    refuse(self.tableau, piece.mode, branch, time_s)

    def _chattering(self, record: Trajectory | None, start: float, stop: float) -> None:
        last = record.changes[-tol.CHATTER_WINDOW :] if record is not None else []
        names = sorted({self.tableau.devices[device].name for _, device, _ in last})
        raise InvalidNetwork.at(
            "elements",
            f"more than {tol.EVENTS_PER_INTERVAL} changes between {start:.9g} s and {stop:.9g} s; "
            f"{', '.join(names) or 'the diodes'} chatter; give them a resistance or a capacitance",
        )


def switched_network(
    topology: Topology, stop_s: float, step_s: float, period_s: float | None = None
) -> SwitchedNetwork:
    """Prepare a network for a run over [0, stop], which for a periodic state is one period."""
    drives = drives_of(topology, stop_s, step_s)
    at = breakpoints(topology, drives, stop_s, step_s)
    if period_s is not None and len(at) > tol.PERIOD_BREAKPOINTS:
        raise InvalidRequest.at(
            "period_s",
            f"{period_s!r} s holds {len(at)} changes of gates and waveforms; at most {tol.PERIOD_BREAKPOINTS} are "
            "searched: ask for the shortest time in which all of them repeat",
        )
    longest = float(np.diff(at).max())
    scale = period_s if period_s is not None else longest
    tableau = tableau_of(topology, drives, ideal_limit_of(topology, scale))
    return SwitchedNetwork(tableau, Pieces(tableau, 1.0 / scale, longest), at)
