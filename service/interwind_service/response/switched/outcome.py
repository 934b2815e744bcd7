"""What is told of a switched run: its samples, its events, and the numbers that vouch for it."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.errors import AccuracyNotReached
from interwind.model.finding import Evidence, Finding, Severity
from interwind.model.observables import Observable
from interwind.model.response import EnergyLedger, Event
from interwind_service import tolerances as tol
from interwind_service.response.switched.energy import Energy
from interwind_service.response.switched.readings import Readings
from interwind_service.response.switched.switched_network import SwitchedNetwork
from interwind_service.response.switched.trajectory import Rows, Trajectory

FloatArray = NDArray[np.float64]


def sample(record: Trajectory, readings: dict[int, Readings], time_s: FloatArray, step_s: float) -> FloatArray:
    """Return the observables at instants, shape (T, observables); NaN where nothing defines them."""
    rows: dict[int, Rows] = {number: own.rows for number, own in readings.items()}

    def finish(number: int, sampled: FloatArray) -> FloatArray:
        value = readings[number].values(sampled)
        value[:, readings[number].undefined] = np.nan
        return value

    return record.samples(rows, time_s, tol.SETTLE_SHARE * step_s, finish)


def events_of(network: SwitchedNetwork, record: Trajectory) -> tuple[Event, ...]:
    """Return the changes of switches and diodes in order; a saturable branch has none."""
    found = []
    for time_s, position, mode in record.changes:
        device = network.tableau.devices[position]
        if mode in device.words:
            found.append(Event(float(time_s), device.name, device.words[mode]))
    return tuple(found)


def evidence_of(
    network: SwitchedNetwork, energy: Energy, record: Trajectory, method: str, periods: int = 0
) -> Evidence:
    """Gather what vouches for a switched run."""
    return Evidence(
        method=method,
        residual=record.residual(network.tableau),
        condition=network.pieces.worst_condition,
        energy_error=energy.error,
        periods_propagated=periods,
    )


def require_accuracy(evidence: Evidence, ledger: EnergyLedger, tolerance: float) -> None:
    """Refuse numbers whose energy ledger or equations miss the tolerance."""
    for name, value in (("energy_error", evidence.energy_error), ("residual", evidence.residual)):
        if not (math.isfinite(value) and value <= tolerance):
            raise AccuracyNotReached(
                f"{name} is {value:.3g}; the tolerance is {tolerance:g}; {ledger.numerical_j:.3g} J of "
                f"{ledger.supplied_j:.6g} J supplied are unaccounted for; check for loops without resistance, "
                "or state a larger tolerance",
                evidence=evidence,
            )


def undefined_findings(observables: Sequence[Observable], readings: dict[int, Readings]) -> tuple[Finding, ...]:
    """Say which observables had no path that defines them for a stretch."""
    ever = np.any([own.undefined for own in readings.values()], axis=0)
    return tuple(
        Finding(
            "UNDEFINED_POTENTIAL",
            Severity.WARNING,
            field="observe",
            message=f"{observables[k]!r} is NaN while ideal open switches and blocking diodes leave it without a path",
        )
        for k in np.flatnonzero(ever)
    )
