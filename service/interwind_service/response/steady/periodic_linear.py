"""The periodic steady state of a linear network: one period from rest, one factorisation, one period of the answer.

    (I − Φ) z = q,   Φ = e^(A T),  q = the states after one period from z = 0

solved block by block with I − Φ = −(e^(A T) − I) formed without cancellation (Aprille & Trick 1972).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import AccuracyNotReached
from interwind.model.finding import Finding, Severity
from interwind.model.observables import Observable
from interwind.model.periodic import PeriodicResponse
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.response.drive.generator import Generator, generator_of
from interwind_service.response.equations.state_space import StateSpace
from interwind_service.response.equations.time_model import model_of
from interwind_service.response.linear.exponential import expm1
from interwind_service.response.linear.flow import Flow, flow_of
from interwind_service.response.linear.initial import Start
from interwind_service.response.linear.ledger import ledger_of, stored
from interwind_service.response.linear.linear_evidence import evidence_of_run, require_run
from interwind_service.response.linear.linear_run import LinearRun, run_linear
from interwind_service.response.linear.readout import Signals, readout_of
from interwind_service.response.linear.time_stress import stress_of
from interwind_service.response.request.cautions import cautions_of
from interwind_service.response.request.output_grid import steps_of
from interwind_service.response.request.recording import Window
from interwind_service.response.steady.periodic_figures import Figures, figures_over_period

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class SteadyState:
    """``z`` (n,): the states at 0+; ``free`` (n, k): directions that keep any value; ``multipliers`` (n,), falling."""

    z: FloatArray
    free: FloatArray
    multipliers: ComplexArray


def periodic_response_linear(
    topology: Topology, period_s: float, step_s: float, observables: Sequence[Observable], tolerance: float
) -> PeriodicResponse:
    """Find one period of the steady state of R, L, C, windings, sources and linear controlled sources.

    Raises
    ------
    InvalidRequest : a step that does not divide the period.
    AccuracyNotReached : an undamped mode resonates with a drive (NOT_PERIODIC), or the ledger misses ``tolerance``.
    """
    steps = steps_of(period_s, step_s, "period_s")
    share = -(-tol.PERIOD_SAMPLES // steps)
    fine_s, count = step_s / share, steps * share
    generator = generator_of(topology, period_s, fine_s, unit=True)
    fastest = float(generator.rate.max(initial=0.0))
    space = model_of(topology, max(1.0 / np.sqrt(fine_s * period_s), min(fastest, tol.SLOW_PHASE / period_s)))
    flow = flow_of(space, generator)
    found = _steady_state(flow, generator, space, period_s, fine_s, count)
    run, states = _period(flow, generator, found.z, fine_s, count)
    if found.free.shape[1]:
        mean = run.gramian[: flow.states, flow.states + generator.unit] / period_s
        run, states = _period(flow, generator, found.z - found.free @ (found.free.T @ mean), fine_s, count)
    u = generator.U @ states[0, flow.states :]
    energy = stored(space, flow.energy @ states[0], u)
    ledger = ledger_of(space, flow, generator, Start(found.z, energy, energy, 0.0, ()), run.gramian, run.end)
    evidence = evidence_of_run(
        "structural reduction, resolvent blocks, direct, (I - Phi) x = q",
        space, flow, run, ledger, run.peak_energy(flow.energy, period_s), periods=2 + bool(found.free.shape[1]),
    )  # fmt: skip
    require_run(evidence, tolerance)
    readout = readout_of(topology, observables)
    rows = readout.rows @ flow.signals
    figures: Figures = figures_over_period(flow, generator, readout, rows, states, run.gramian, period_s)
    return PeriodicResponse(
        tuple(observables),
        readout.finish(states[::share] @ rows.T),
        period_s=period_s,
        time_s=step_s * np.arange(steps + 1),
        means=figures.mean,
        rmses=figures.rms,
        peaks=figures.peak,
        peak_times_s=figures.peak_time_s,
        harmonic_values=figures.harmonic,
        multipliers=found.multipliers,
        mean_power_w=_mean_power(topology, flow, run.gramian / period_s),
        ledger=ledger,
        findings=(*topology.findings, *_findings(found)),
        cautions=cautions_of(topology, stress_of(topology, flow, generator, states, observables, figures.peak)),
        evidence=evidence,
    )


def _steady_state(
    flow: Flow, generator: Generator, space: StateSpace, period_s: float, step_s: float, steps: int
) -> SteadyState:
    n = flow.states
    window = Window(0, steps, 1)
    nothing = np.zeros((0, len(flow.M)))
    run = run_linear(
        flow, generator, np.zeros(n), nothing, lambda first, rows: None, step_s=step_s, steps=steps, window=window
    )
    after = run.end[:n]
    swing = float(np.sqrt(run.gramian.diagonal()[:n].max(initial=0.0) / period_s))
    z, free, multipliers = np.zeros(n), [], []
    first = 0
    for size in space.blocks:
        own = slice(first, first + size)
        first += size
        increment = expm1(flow.M[own, own] * period_s)
        left, singular, right = np.linalg.svd(-increment)
        kept = singular > tol.FREE_OFFSET * max(1.0, float(singular.max(initial=0.0)))
        along = left.T @ after[own]
        z[own] = right[kept].T @ (along[kept] / singular[kept])
        lost = float(np.abs(along[~kept]).max(initial=0.0))
        if lost > tol.RESONANT_GAIN * swing:
            raise AccuracyNotReached(
                "no periodic state: an undamped mode gains with every period, for a drive has a part at its own "
                "frequency, or a mean that nothing holds back; give the loop its resistance",
                reason="NOT_PERIODIC",
            )
        direction = np.zeros((n, int((~kept).sum())))
        direction[own] = right[~kept].T
        free.append(direction)
        multipliers.append(1.0 + np.linalg.eigvals(increment).astype(complex))
    values = np.concatenate(multipliers) if multipliers else np.zeros(0, complex)
    directions = np.hstack(free) if free else np.zeros((n, 0))
    return SteadyState(z, directions, values[np.argsort(-np.abs(values), kind="stable")])


def _period(flow: Flow, generator: Generator, z: FloatArray, step_s: float, steps: int) -> tuple[LinearRun, FloatArray]:
    """Run one period and keep y at every sample, shape (steps + 1, n + g)."""
    states = np.empty((steps + 1, len(flow.M)))

    def take(first: int, rows: FloatArray) -> None:
        states[first : first + len(rows)] = rows

    run = run_linear(
        flow, generator, z, np.eye(len(flow.M)), take, step_s=step_s, steps=steps, window=Window(0, steps, 1)
    )
    return run, states


def _mean_power(topology: Topology, flow: Flow, mean: FloatArray) -> dict[str, float]:
    """Mean power absorbed by every element, W."""
    signals = Signals(topology)
    voltage, current = flow.signals[: signals.branches], flow.signals[signals.branches : 2 * signals.branches]
    power = np.sum((voltage @ mean) * current, axis=1)
    answer = dict.fromkeys((element.name for element in topology.network.elements), 0.0)
    for name, watt in zip(topology.names, power.tolist(), strict=True):
        answer[name] += watt
    return answer


def _findings(found: SteadyState) -> tuple[Finding, ...]:
    largest = float(np.abs(found.multipliers[0])) if len(found.multipliers) else 0.0
    if found.free.shape[1]:
        return (
            Finding(
                code="OFFSET_UNDETERMINED",
                severity=Severity.WARNING,
                field="elements",
                message=f"{found.free.shape[1]} lossless direction(s) keep any constant current or voltage; the offset "
                "shown has the mean 0; give the loop its resistance",
                measured=largest,
                limit=1.0,
            ),
        )
    if largest > 1.0 + tol.UNSTABLE_MARGIN:
        return (
            Finding(
                code="UNSTABLE_PERIODIC_STATE",
                severity=Severity.WARNING,
                field="elements",
                message=f"a Floquet multiplier of magnitude {largest:.6g} drives the network away from this state; a "
                "run in time will not stay here",
                measured=largest,
                limit=1.0,
            ),
        )
    return ()
