"""The periodic steady state, found directly: x = P(x), then one recorded period and its figures.

(I − Φ) x = q where switching is known (Aprille & Trick 1972); Newton's method on the cycle map with diodes
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.model.network import Network
from interwind.model.observables import Observable
from interwind.model.periodic import PeriodicResponse
from interwind_service import tolerances as tol
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.response.drive.commensurate import require_commensurate
from interwind_service.response.request.admit import admit
from interwind_service.response.request.cautions import cautions_of
from interwind_service.response.request.output_grid import steps_of
from interwind_service.response.sinusoidal.observe import resolve
from interwind_service.response.steady.cycle_map import CycleMap, FixedPoint, fixed_point
from interwind_service.response.steady.periodic_linear import periodic_response_linear
from interwind_service.response.steady.periodic_search import Period, not_periodic, other_start, stability
from interwind_service.response.steady.periodic_smooth import smooth_period
from interwind_service.response.switched.device import TimedSwitch, has_smooth
from interwind_service.response.switched.energy import energy_of
from interwind_service.response.switched.figures import figures_of
from interwind_service.response.switched.observed_stress import observed_stress
from interwind_service.response.switched.outcome import (
    events_of,
    evidence_of,
    require_accuracy,
    sample,
    undefined_findings,
)
from interwind_service.response.switched.readings import readings_of
from interwind_service.response.switched.rest import residual_state
from interwind_service.response.switched.switched_network import switched_network
from interwind_service.response.switched.trajectory import Trajectory

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
    find = smooth_period if has_smooth(topology) else _switched_period
    period = find(topology, observables, period_s, step_s, time_s, tolerance, progress)
    names = [element.name for element in network.elements]
    figures, energy = period.figures, period.energy
    return PeriodicResponse(
        observables,
        period.samples,
        period_s=period_s,
        time_s=time_s,
        means=figures.mean,
        rmses=figures.rms,
        peaks=figures.peak,
        peak_times_s=figures.peak_time_s,
        harmonic_values=figures.harmonic,
        multipliers=period.found.multipliers,
        mean_power_w=dict(zip(names, (energy.absorbed_j / period_s).tolist(), strict=True)),
        events=period.events,
        ledger=energy.ledger,
        findings=(*topology.findings, *period.findings),
        cautions=cautions_of(topology, observed_stress(topology, observables, period.samples, figures.peak)),
        evidence=period.evidence,
    )


def _switched_period(
    topology: Topology,
    observables: Sequence[Observable],
    period_s: float,
    step_s: float,
    time_s: FloatArray,
    tolerance: float,
    progress: Callable[[int, int], None] | None,
) -> Period:
    """Find the period of switches, straight pieces and linear elements."""
    prepared = switched_network(topology, period_s, step_s, period_s)
    start = residual_state(prepared.tableau)
    cycle = CycleMap(prepared, prepared.start_mode(start))
    affine = all(isinstance(device, TimedSwitch) for device in prepared.tableau.devices)
    found = fixed_point(cycle, start, affine=affine, warm_up=tol.WARM_UP_PERIODS, rounds=tol.BURSTS)
    if not found.found:
        raise not_periodic(found, period_s, cycle.periods)
    findings = stability(found) + other_start(cycle, found, affine=affine)
    x = _without_offset(cycle, found)
    record = Trajectory()
    passage = prepared.run(x, cycle.start(x), record=record, progress=progress)
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
    samples = sample(record, readings, time_s, step_s)
    findings += undefined_findings(observables, readings)
    return Period(found, samples, figures, energy, events_of(prepared, record), findings, evidence)


def _without_offset(cycle: CycleMap, found: FixedPoint) -> FloatArray:
    """Return the state with the free offsets chosen so that their means over the period vanish."""
    free = found.undetermined
    if not free.shape[1]:
        return found.x
    record = Trajectory()
    cycle.network.run(found.x, cycle.start(found.x), record=record)
    cycle.periods += 1
    mean = record.state_integral(cycle.network.tableau) / float(cycle.network.breakpoint_s[-1])
    return found.x - free @ (free.T @ mean)
