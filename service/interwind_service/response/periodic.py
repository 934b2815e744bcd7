"""The periodic steady state, found directly: x = P(x), then one recorded period and its figures.

(I − Φ) x = q where switching is known (Aprille & Trick 1972); Newton's method on the cycle map with diodes
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.errors import AccuracyNotReached, InvalidNetwork
from interwind.model.finding import Evidence, Finding, Severity
from interwind.model.network import Network
from interwind.model.observables import Observable
from interwind.model.periodic import PeriodicResponse
from interwind_service import tolerances as tol
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.response.admit import admit
from interwind_service.response.cautions import cautions_of
from interwind_service.response.commensurate import require_commensurate
from interwind_service.response.cycle_map import CycleMap, FixedPoint, fixed_point
from interwind_service.response.device import TimedSwitch, is_smooth
from interwind_service.response.energy import energy_of
from interwind_service.response.figures import figures_of
from interwind_service.response.observe import resolve
from interwind_service.response.observed_stress import observed_stress
from interwind_service.response.output_grid import steps_of
from interwind_service.response.periodic_linear import periodic_response_linear
from interwind_service.response.readings import readings_of
from interwind_service.response.start import residual_state
from interwind_service.response.switched_network import switched_network
from interwind_service.response.switching import events_of, evidence_of, require_accuracy, sample, undefined_findings
from interwind_service.response.trajectory import Trajectory

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


def periodic_response(
    network: Network,
    period_s: float,
    step_s: float,
    observe: Sequence[Observable] | None = None,
    tolerance: float = tol.DEFAULT_TOLERANCE,
    progress: Callable[[int, int], None] | None = None,
) -> PeriodicResponse:
    """Find one period of the steady state without waiting for it.

    Raises
    ------
    InvalidRequest : a period in which some drive does not repeat, or a step that does not divide it.
    AccuracyNotReached : no periodic state was found (reason NOT_PERIODIC, with how it behaves instead), or the energy
        ledger misses ``tolerance``.
    """
    time_s = step_s * np.arange(steps_of(period_s, step_s, "period_s") + 1)
    require_commensurate(network, period_s)
    topology = admit(network)
    observables = resolve(topology, observe)
    if not topology.of_kind(Kind.SWITCH, Kind.DIODE, Kind.ARRESTER, Kind.SATURABLE).size:
        return periodic_response_linear(topology, period_s, step_s, observables, tolerance)
    _refuse_smooth(topology)
    prepared = switched_network(topology, period_s, step_s, period_s)
    start = residual_state(prepared.tableau)
    cycle = CycleMap(prepared, prepared.start_mode(start))
    affine = all(isinstance(device, TimedSwitch) for device in prepared.tableau.devices)
    found = fixed_point(cycle, start, affine=affine, warm_up=tol.WARM_UP_PERIODS, rounds=tol.BURSTS)
    if not found.found:
        raise _not_periodic(found, period_s, cycle.periods)
    findings = _stability(found) + _other_start(cycle, found, affine)
    x = _without_offset(cycle, found)
    record = Trajectory()
    passage = prepared.run(x, cycle.mode, record=record, progress=progress)
    cycle.periods += 1
    energy = energy_of(prepared.tableau, record, x, passage.x, passage.peak_j)
    method = "; ".join(
        (
            f"Newton's method on the cycle map, residual {found.residual:.1e}"
            if not affine
            else "direct, (I - Phi) x = q",
            *found.means,
            f"ideal elements as {tol.IDEAL_EPSILON:g} Z",
        )
    )
    evidence = evidence_of(prepared, energy, record, method, cycle.periods)
    require_accuracy(evidence, energy.ledger, tolerance)
    readings = {piece.number: readings_of(prepared.tableau, piece.mode, observables) for piece in record.distinct()}
    figures = figures_of(record, readings, period_s, tol.HARMONICS, tol.SETTLE_SHARE * step_s)
    names = [element.name for element in network.elements]
    samples = sample(record, readings, time_s, step_s)
    return PeriodicResponse(
        observables,
        samples,
        period_s=period_s,
        time_s=time_s,
        means=figures.mean,
        rmses=figures.rms,
        peaks=figures.peak,
        peak_times_s=figures.peak_time_s,
        harmonic_values=figures.harmonic,
        multipliers=multipliers_of(found),
        mean_power_w=dict(zip(names, (energy.absorbed_j / period_s).tolist(), strict=True)),
        events=events_of(prepared, record),
        ledger=energy.ledger,
        findings=(*topology.findings, *findings, *undefined_findings(observables, readings)),
        cautions=cautions_of(topology, observed_stress(topology, observables, samples, figures.peak)),
        evidence=evidence,
    )


def _refuse_smooth(topology: Topology) -> None:
    for branch in topology.of_kind(Kind.DIODE, Kind.ARRESTER).tolist():
        if is_smooth(topology, branch):
            raise InvalidNetwork.at(
                f"elements[{topology.element[branch]}]",
                f"{topology.names[branch]!r} follows a smooth law, for which no periodic response is offered; "
                "run it in time, or state the diode by its forward voltage and resistance",
                reason="NOT_OFFERED",
            )


def _without_offset(cycle: CycleMap, found: FixedPoint) -> FloatArray:
    """Return the state with the free offsets chosen so that their means over the period vanish."""
    free = found.undetermined
    if not free.shape[1]:
        return found.x
    record = Trajectory()
    cycle.network.run(found.x, cycle.mode, record=record)
    cycle.periods += 1
    mean = record.state_integral(cycle.network.tableau) / float(cycle.network.breakpoint_s[-1])
    return found.x - free @ (free.T @ mean)


def multipliers_of(found: FixedPoint) -> ComplexArray:
    """Return the Floquet multipliers, largest first."""
    mu = np.linalg.eigvals(found.jacobian).astype(complex) if len(found.x) else np.zeros(0, complex)
    return mu[np.argsort(-np.abs(mu), kind="stable")]


def _stability(found: FixedPoint) -> tuple[Finding, ...]:
    mu = multipliers_of(found)
    largest = float(np.abs(mu[0])) if len(mu) else 0.0
    said = []
    offsets = found.undetermined.shape[1]
    if offsets:
        said.append(
            Finding("OFFSET_UNDETERMINED", Severity.WARNING, field="elements", measured=largest, limit=1.0,
                    message=f"{found.undetermined} lossless direction(s) keep any constant current or voltage; "
                    "the offset shown is the smallest; give the loop its resistance")
        )  # fmt: skip
    elif largest > 1.0 + tol.UNSTABLE_MARGIN:
        said.append(
            Finding("UNSTABLE_PERIODIC_STATE", Severity.WARNING, field="elements", measured=largest, limit=1.0,
                    message=f"a Floquet multiplier of magnitude {largest:.6g} drives the network away from this state; "
                    "a run in time will not stay here")
        )  # fmt: skip
    elif largest > tol.SLOW_WARNING:
        said.append(
            Finding("NEARLY_UNDAMPED", Severity.INFO, field="elements", measured=largest, limit=tol.SLOW_WARNING,
                    message=f"the slowest disturbance keeps {largest:.9g} of itself over a period")
        )  # fmt: skip
    doubling = float(np.min(mu.real[np.abs(mu.imag) <= tol.REAL_MULTIPLIER * np.abs(mu)], initial=0.0))
    if doubling < tol.DOUBLING_WARNING:
        said.append(
            Finding("NEAR_PERIOD_DOUBLING", Severity.WARNING, field="elements", measured=doubling, limit=-1.0,
                    message=f"a Floquet multiplier of {doubling:.6g} is close to -1, where the period doubles")
        )  # fmt: skip
    return tuple(said)


def _other_start(cycle: CycleMap, found: FixedPoint, affine: bool) -> tuple[Finding, ...]:
    """Search once more from a distant start; a different answer is said."""
    if affine or not len(found.x):
        return ()
    cycle.limit = cycle.periods + tol.OTHER_START_PERIODS
    other = fixed_point(cycle, tol.OTHER_START * found.x, affine=True, warm_up=0, rounds=0)
    apart = float(np.linalg.norm(other.x - found.x)) / cycle.size if cycle.size > 0.0 else 0.0
    if not other.found or apart <= tol.SAME_SOLUTION:
        return ()
    return (
        Finding("SEVERAL_PERIODIC_STATES", Severity.WARNING, field="period_s",
                measured=apart, limit=tol.SAME_SOLUTION,
                message="another start led to a different periodic state; the one reached from rest is shown"),
    )  # fmt: skip


def _not_periodic(found: FixedPoint, period_s: float, periods: int) -> AccuracyNotReached:
    evidence = Evidence(method="; ".join(found.means), periods_propagated=periods)
    if found.repeats_after:
        longer = found.repeats_after * period_s
        text = f"it repeats only after {found.repeats_after} periods; ask for period_s = {longer!r} s"
    else:
        text = (
            f"the closest state misses itself by {found.residual:.3g} after a period; it may be aperiodic; "
            "look at a time response instead"
        )
    return AccuracyNotReached(
        f"no state that repeats every {period_s!r} s was found in {periods} periods: {text}",
        reason="NOT_PERIODIC",
        evidence=evidence,
    )
