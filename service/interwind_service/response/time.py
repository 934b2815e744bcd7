"""Time response: exact for linear networks, whatever the output step."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest
from interwind.model.network import Network
from interwind.model.observables import Observable
from interwind.model.recording import Recording
from interwind.model.response import Initial, TimeResponse
from interwind_service import tolerances as tol
from interwind_service.network.kind import Kind
from interwind_service.response.drive.generator import Generator, generator_of
from interwind_service.response.equations.state_space import StateSpace
from interwind_service.response.equations.time_model import model_of
from interwind_service.response.linear.flow import flow_of
from interwind_service.response.linear.initial import start_of
from interwind_service.response.linear.ledger import ledger_of
from interwind_service.response.linear.linear_evidence import evidence_of_run, require_run
from interwind_service.response.linear.linear_run import run_linear
from interwind_service.response.linear.readout import Readout, readout_of
from interwind_service.response.linear.time_stress import stress_of
from interwind_service.response.request.admit import admit
from interwind_service.response.request.cautions import cautions_of
from interwind_service.response.request.output_grid import steps_of
from interwind_service.response.request.recording import Recorder
from interwind_service.response.request.stated import stated_of
from interwind_service.response.sinusoidal.observe import resolve
from interwind_service.response.switched.handover import window_held
from interwind_service.response.switching import time_response_switching
from interwind_service.rows import RowSink, offer

FloatArray = NDArray[np.float64]

_SWITCHED = (Kind.SWITCH, Kind.DIODE, Kind.ARRESTER, Kind.SATURABLE)


def time_response(
    network: Network,
    stop_s: float,
    step_s: float,
    observe: Sequence[Observable] | None = None,
    initial: Initial = None,
    tolerance: float = tol.DEFAULT_TOLERANCE,
    *,
    sink: RowSink | None = None,
    recording: Recording | None = None,
) -> TimeResponse:
    """Compute the response from 0 to ``stop_s``, sampled every ``step_s``.

    x' = A x + B u, u and the response exact at every sample: ``step_s`` is the output grid only.

    Parameters
    ----------
    network : its sources by ``waveform``.
    stop_s, step_s : s; the stop is a multiple of the step to 1e-6 of a step.
    observe : observables; None = all node voltages and winding currents.
    initial : stated values, the rest 0; or `SteadyStart`. None = all 0.
    tolerance : largest energy error and residual at which the response is returned.
    sink : takes (step of the first sample, samples (any, observables)) as they are made; the response then holds none.
    recording : the window, decimation and envelope of what is kept, and that figures are wanted.

    Returns
    -------
    TimeResponse : samples at k step_s, limits from the right, with the energy ledger and the evidence.

    Raises
    ------
    InvalidRequest : a grid, an initial value or an observable that does not fit, before memory is taken.
    InvalidWindings : a winding set cannot exist.
    InvalidNetwork : the network has no unique solution.
    AccuracyNotReached : the energy ledger does not close to ``tolerance``, or the equations are not met to it.
    """
    steps = steps_of(stop_s, step_s)
    if not (np.isfinite(tolerance) and tolerance > 0.0):
        raise InvalidRequest.at("tolerance", f"{tolerance!r} found; a finite number above 0 is expected")
    topology = admit(network)
    asked = resolve(topology, observe)
    stated = stated_of(topology, initial)
    if sink is None and recording is None:
        sink = offer(asked, steps + 1)
    if topology.of_kind(*_SWITCHED).size:
        return time_response_switching(
            network, stop_s, step_s, asked, initial, tolerance, sink=sink, recording=recording
        )
    window = window_held(recording, step_s, steps, len(asked), streamed=sink is not None)
    generator = generator_of(topology, stop_s, step_s, unit=recording is not None)
    space = model_of(topology, _centre(generator, stop_s, step_s))
    if topology.controls:
        _refuse_growth(space, stop_s)
    start = start_of(space, stated, generator.U @ generator.state(np.zeros(1))[0])
    readout = readout_of(topology, asked)
    flow = flow_of(space, generator)
    begin = flow.start(start.x, generator.state(np.zeros(1))[0])
    recorder = Recorder(window, len(asked), envelope=recording is not None and recording.envelope, keep=sink is None)

    def take(first: int, piece: FloatArray) -> None:
        rows = readout.finish(piece)
        recorder.take(first, rows)
        if sink is not None:
            sink(first, rows)

    own_rows = readout.rows @ flow.signals
    run = run_linear(flow, generator, begin, own_rows, take, step_s=step_s, steps=steps, window=window)
    recorder.require_numbers()
    ledger = ledger_of(space, flow, generator, start, run.gramian, run.end)
    peak = max(start.stored_before_j, start.stored_after_j, run.peak_energy(flow.energy, steps * step_s))
    evidence = evidence_of_run(
        "structural reduction, resolvent blocks, exact propagation", space, flow, run, ledger, peak
    )
    require_run(evidence, tolerance)
    figures = None
    if recording is not None:
        exact = window_moments(own_rows, readout, run.window_gramian, generator, step_s * (window.last - window.first))
        figures = recorder.figures(step_s, *exact)
    return TimeResponse(
        asked,
        recorder.samples,
        time_s=step_s * (window.first + window.every * np.arange(len(recorder.samples))),
        ledger=ledger,
        figures=figures,
        lowest=recorder.lowest,
        highest=recorder.highest,
        findings=(*topology.findings, *start.findings),
        cautions=cautions_of(topology, stress_of(topology, flow, generator, run.states, asked, recorder.peaks)),
        evidence=evidence,
    )


def window_moments(
    rows: FloatArray, readout: Readout, gramian: FloatArray, generator: Generator, span_s: float
) -> tuple[FloatArray, FloatArray]:
    """Return the exact mean and mean square of each observable over a window, NaN for products of two signals."""
    mean, square = np.full(len(readout.linear), np.nan), np.full(len(readout.linear), np.nan)
    unit = len(gramian) - len(generator.S) + generator.unit
    for column, row in enumerate(readout.linear):
        if row >= 0:
            mean[column] = rows[row] @ gramian[:, unit] / span_s
            square[column] = rows[row] @ gramian @ rows[row] / span_s
    return mean, square


def _refuse_growth(space: StateSpace, stop_s: float) -> None:
    """Refuse a run in which an unstable mode, which controlled sources can make, would leave the range of numbers."""
    rate = float(np.linalg.eigvals(space.A).real.max(initial=0.0))
    if rate * stop_s > tol.LARGEST_GROWTH:
        raise InvalidRequest.at(
            "stop_s",
            f"{stop_s!r} s found, but the network is unstable: a mode grows by e in {1.0 / rate:.3g} s and leaves the "
            f"range of numbers; stop before {tol.LARGEST_GROWTH / rate:.3g} s or mend the feedback",
            reason="UNSTABLE_NETWORK",
        )


def _centre(generator: Generator, stop_s: float, step_s: float) -> float:
    """Choose s0, 1/s: between the step and the run, or at the fastest drive while slow modes still keep their phase."""
    fastest = float(generator.rate.max(initial=0.0))
    centre = max(1.0 / float(np.sqrt(step_s) * np.sqrt(stop_s)), min(fastest, tol.SLOW_PHASE / stop_s))
    return float(np.clip(centre, 1.0 / tol.LARGEST_RATE, tol.LARGEST_RATE))
