"""Time response of networks with switches, piecewise-linear diodes and saturable branches."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.model.network import Network
from interwind.model.observables import Observable
from interwind.model.recording import RecordFigures, Recording
from interwind.model.response import Initial, TimeResponse
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.response.request.admit import admit
from interwind_service.response.request.cautions import cautions_of
from interwind_service.response.request.output_grid import steps_of
from interwind_service.response.request.recording import Window
from interwind_service.response.sinusoidal.observe import resolve
from interwind_service.response.smooth.nonlinear import NonlinearRun
from interwind_service.response.switched.device import has_smooth
from interwind_service.response.switched.energy import energy_of
from interwind_service.response.switched.figures import figures_of
from interwind_service.response.switched.handover import Handover, window_held
from interwind_service.response.switched.outcome import (
    events_of,
    evidence_of,
    require_accuracy,
    sample,
    undefined_findings,
)
from interwind_service.response.switched.readings import readings_of
from interwind_service.response.switched.start import start_state
from interwind_service.response.switched.start_jump import start_findings
from interwind_service.response.switched.switched_network import switched_network
from interwind_service.response.switched.trajectory import Trajectory
from interwind_service.rows import RowSink

FloatArray = NDArray[np.float64]


def time_response_switching(
    network: Network,
    stop_s: float,
    step_s: float,
    observe: Sequence[Observable] | None = None,
    initial: Initial = None,
    tolerance: float = tol.DEFAULT_TOLERANCE,
    *,
    sink: RowSink | None = None,
    recording: Recording | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> TimeResponse:
    """Run a network with piecewise-linear devices from event to event and sample it on a grid.

        x(t) = Re V (κ ∘ e^{λt}) + particular solution,    between events, no time step

    Parameters
    ----------
    sink : takes (step of the first sample, samples) piece by piece once the ledger has closed; nothing is held then.
    recording : what is kept; its figures, the peaks too, are those of the exact solution.

    Returns
    -------
    TimeResponse : samples, limits from the right; events; the energy ledger.

    Raises
    ------
    InvalidRequest, InvalidNetwork, InvalidWindings : bad input, by its path.
    AccuracyNotReached : the energy ledger misses ``tolerance``.
    """
    steps = steps_of(stop_s, step_s)
    topology = admit(network)
    observables = resolve(topology, observe)
    streamed = sink is not None and not has_smooth(topology)
    window = window_held(recording, step_s, steps, len(observables), streamed=streamed)
    envelope = recording is not None and recording.envelope
    if has_smooth(topology):
        return time_response_smooth(
            topology, step_s, steps, observables, initial, tolerance, window,
            envelope=envelope, figures=recording is not None, sink=sink, progress=progress,
        )  # fmt: skip
    prepared = switched_network(topology, steps * step_s, step_s)
    x = start_state(prepared, initial)
    record = Trajectory()
    passage = prepared.run(x, prepared.start_mode(x), record=record, progress=progress)
    energy = energy_of(prepared.tableau, record, x, passage.x, passage.peak_j)
    evidence = evidence_of(
        prepared, energy, record, f"modal sums between events, ideal elements as {tol.IDEAL_EPSILON:g} Z"
    )
    readings = {piece.number: readings_of(prepared.tableau, piece.mode, observables) for piece in record.distinct()}
    require_accuracy(evidence, energy.ledger, tolerance)
    out = Handover(topology, observables, window, envelope=envelope, sink=sink)
    for first in range(0, steps + 1, tol.STEPS_HANDED_OVER):
        own = np.arange(first, min(first + tol.STEPS_HANDED_OVER, steps + 1))
        out.take(first, sample(record, readings, step_s * own, step_s))
    figures = None
    if recording is not None:
        ends = step_s * window.first, step_s * window.last
        inside = record.between(prepared.tableau.drives, *ends)
        met = {piece.number: readings[piece.number] for piece in inside.distinct()}
        exact = figures_of(inside, met, ends[1] - ends[0], 0, tol.SETTLE_SHARE * step_s)
        figures = RecordFigures(exact.mean, exact.rms, exact.peak, exact.peak_time_s)
    return TimeResponse(
        observables,
        out.recorder.samples,
        time_s=out.time_s(step_s),
        events=events_of(prepared, record),
        ledger=energy.ledger,
        figures=figures,
        lowest=out.recorder.lowest,
        highest=out.recorder.highest,
        findings=(
            *topology.findings,
            *start_findings(prepared.tableau, record, x, tol.SETTLE_SHARE * step_s),
            *undefined_findings(observables, readings),
        ),
        cautions=cautions_of(topology, out.stress),
        evidence=evidence,
    )


def time_response_smooth(
    topology: Topology,
    step_s: float,
    steps: int,
    observables: tuple[Observable, ...],
    initial: Initial,
    tolerance: float,
    window: Window,
    *,
    envelope: bool,
    figures: bool,
    sink: RowSink | None,
    progress: Callable[[int, int], None] | None,
) -> TimeResponse:
    """Run a network with smooth laws; what is recorded is held until the ledger closes, and handed over then."""
    local = tol.STEP_SHARE * tolerance
    for _ in range(tol.FINER_RUNS + 1):  # the ledger is the judge: finer steps while it does not close
        out = Handover(topology, observables, window, envelope=envelope)
        run = NonlinearRun(topology, step_s, steps, out, initial, local, figures=figures, progress=progress)
        if run.evidence.energy_error <= tolerance and run.evidence.residual <= tolerance:
            break
        local *= tol.STEP_SHARE
    require_accuracy(run.evidence, run.energy.ledger, tolerance)
    samples, time_s = out.recorder.samples, out.time_s(step_s)
    if sink is not None:
        sink(0, samples)
        samples, time_s = samples[:0], time_s[:0]
    return TimeResponse(
        observables,
        samples,
        time_s=time_s,
        events=run.record.events,
        ledger=run.energy.ledger,
        figures=run.figures,
        lowest=out.recorder.lowest,
        highest=out.recorder.highest,
        findings=(*topology.findings, *undefined_findings(observables, run.record.undefined)),
        cautions=cautions_of(topology, out.stress),
        evidence=run.evidence,
    )
