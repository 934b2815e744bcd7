"""The search for a periodic state, and what is said of the state found: its multipliers, its rivals, or none at all."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import AccuracyNotReached
from interwind.model.finding import Evidence, Finding, Severity
from interwind.model.response import Event
from interwind_service import tolerances as tol
from interwind_service.response.steady.cycle_map import CycleMap, FixedPoint, fixed_point
from interwind_service.response.switched.device import SaturableBranch
from interwind_service.response.switched.energy import Energy
from interwind_service.response.switched.figures import Figures

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Period:
    """One period of a state found: what was asked of it, its energies, and what vouches for it."""

    found: FixedPoint
    samples: FloatArray
    figures: Figures
    energy: Energy
    events: tuple[Event, ...]
    findings: tuple[Finding, ...]
    evidence: Evidence


def stability(found: FixedPoint) -> tuple[Finding, ...]:
    """Say what the multipliers tell: a free offset, growth, slow decay, a period about to double."""
    mu = found.multipliers
    largest = float(np.abs(mu[0])) if len(mu) else 0.0
    said = []
    offsets = found.undetermined.shape[1]
    if offsets:
        said.append(
            Finding("OFFSET_UNDETERMINED", Severity.WARNING, field="elements", measured=largest, limit=1.0,
                    message=f"{offsets} lossless direction(s) keep any constant current or voltage; "
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


def other_start(cycle: CycleMap, found: FixedPoint, *, affine: bool) -> tuple[Finding, ...]:
    """Search again from distant starts; a different answer is said.

    One start is the state found, enlarged; where a branch saturates, the other begins with its core saturated, for a
    resonance with it has two steady states (ferroresonance: Bethenod 1907, from memory).
    """
    if affine or not len(found.x) or found.undetermined.shape[1]:
        return ()
    starts = [(tol.OTHER_START * found.x, 0, tol.OTHER_START_PERIODS)]
    saturated = found.x.copy()
    for device in cycle.network.tableau.devices:
        if isinstance(device, SaturableBranch):
            saturated[device.state] = tol.SATURATED_START * device.flux_wb[-1] / device.root
    if not np.array_equal(saturated, found.x):
        starts.append((saturated, tol.WARM_UP_PERIODS, tol.SATURATED_START_PERIODS))
    for x, warm_up, periods in starts:
        cycle.limit = cycle.periods + periods
        other = fixed_point(cycle, x, affine=False, warm_up=warm_up, rounds=0)
        apart = cycle.distance(other.x, found.x)
        if other.found and apart > tol.SAME_SOLUTION + other.uncertainty + found.uncertainty:
            return (
                Finding("SEVERAL_PERIODIC_STATES", Severity.WARNING, field="period_s",
                        measured=apart, limit=tol.SAME_SOLUTION,
                        message="another start led to a different periodic state; the one reached from rest is shown"),
            )  # fmt: skip
    return ()


def not_periodic(found: FixedPoint, period_s: float, periods: int) -> AccuracyNotReached:
    """Return the refusal of a network that has no such period, with how it behaves instead."""
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
