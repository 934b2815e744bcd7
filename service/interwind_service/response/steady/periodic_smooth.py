"""The periodic state of a network with smooth laws: Newton's method on the cycle map of its Rosenbrock runs.

    x ← x + (I − Φ)⁻¹ (P(x) − x),    Φ from the variational equation (Aprille & Trick 1972)

A state found is run once more with finer steps; how far that would move it is the measure of its error.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.errors import AccuracyNotReached
from interwind.model.finding import Evidence
from interwind.model.observables import Observable
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.response.request.recording import Window
from interwind_service.response.smooth.nonlinear import FigureRecord, NonlinearRecord
from interwind_service.response.smooth.nonlinear_figures import NonlinearFigures
from interwind_service.response.smooth.smooth_network import smooth_network
from interwind_service.response.steady.cycle_map import CycleMap, FixedPoint, fixed_point, full_step
from interwind_service.response.steady.periodic_search import Period, not_periodic, other_start, stability
from interwind_service.response.switched.handover import Handover
from interwind_service.response.switched.outcome import require_accuracy, undefined_findings
from interwind_service.response.switched.rest import residual_state
from interwind_service.response.switched.switched_network import Passage

FloatArray = NDArray[np.float64]


def smooth_period(
    topology: Topology,
    observables: Sequence[Observable],
    period_s: float,
    step_s: float,
    time_s: FloatArray,
    tolerance: float,
    progress: Callable[[int, int], None] | None,
) -> Period:
    """Find the period of a network with smooth laws, with finer steps until finer ones change it no more.

    Raises
    ------
    AccuracyNotReached : no periodic state was found (NOT_PERIODIC), finer steps still move it, or the energy ledger
        misses ``tolerance``.
    """
    network = smooth_network(topology, period_s, step_s, tol.STEP_SHARE * tolerance, period_s)
    x = residual_state(network.tableau)
    cycle, means, warm_up, rounds = CycleMap(network, network.start_mode(x)), [], tol.WARM_UP_PERIODS, tol.SMOOTH_BURSTS
    for _ in range(tol.FINER_RUNS + 1):
        cycle.resolution = network.tolerance
        found = fixed_point(cycle, x, affine=False, warm_up=warm_up, rounds=rounds)
        means += found.means
        if not found.found:
            raise not_periodic(found, period_s, cycle.periods)
        network.tolerance *= tol.STEP_SHARE
        out = Handover(topology, observables, Window(0, len(time_s) - 1, 1))
        sums = NonlinearFigures(len(observables), 0.0, period_s, tol.HARMONICS)
        record = FigureRecord(network, step_s, len(time_s) - 1, out, sums)
        passage = network.run(found.x, cycle.mode, record=record, monodromy=True, progress=progress)
        cycle.periods += 1
        found, moved_by = _finer(cycle, found, passage)
        energy = record.energy(found.x, passage.x, passage.peak_j)
        evidence = _evidence(record, energy.error, found, moved_by, means, cycle.periods)
        if max(moved_by, energy.error, record.residual) <= tolerance:
            break
        x, warm_up, rounds = found.x + full_step(found.jacobian, passage.x - found.x), 0, 0
    require_accuracy(evidence, energy.ledger, tolerance)
    if moved_by > tolerance:
        raise AccuracyNotReached(
            f"finer steps still move the periodic state by {moved_by:.3g} of its size; the tolerance is {tolerance:g}; "
            "the network settles too slowly for it; state a larger tolerance",
            evidence=evidence,
        )
    findings = stability(found) + other_start(cycle, found, affine=False)
    undefined = np.any([own.undefined for own in record.undefined.values()], axis=0)
    figures = record.sums.figures(undefined)
    findings += undefined_findings(observables, record.undefined)
    return Period(found, out.recorder.samples, figures, energy, record.events, findings, evidence)


def _finer(cycle: CycleMap, found: FixedPoint, passage: Passage) -> tuple[FixedPoint, float]:
    """Return the state with its residual and Φ at finer steps, and how far Newton's method would still move it."""
    jacobian = found.jacobian if passage.jacobian is None else passage.jacobian
    cycle.peak_j = passage.peak_j
    finer = FixedPoint(found.x, cycle.distance(passage.x, found.x), True, jacobian, found.means)
    step = full_step(jacobian, passage.x - found.x)
    return finer, cycle.distance(found.x + step, found.x)


def _evidence(
    record: NonlinearRecord, energy_error: float, found: FixedPoint, moved_by: float, means: list[str], periods: int
) -> Evidence:
    said = (
        f"Newton's method on the cycle map, residual {found.residual:.1e}",
        *dict.fromkeys(means),
        f"{record.method}; finer steps move the state by {moved_by:.1e}",
    )
    return Evidence(
        method="; ".join(said), residual=record.residual, energy_error=energy_error, periods_propagated=periods
    )
