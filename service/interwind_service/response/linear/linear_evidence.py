"""The numbers that vouch for a linear run, and the refusal of a run they do not vouch for."""

from __future__ import annotations

from interwind.errors import AccuracyNotReached
from interwind.model.finding import Evidence
from interwind.model.response import EnergyLedger
from interwind_service.response.equations.state_space import StateSpace
from interwind_service.response.linear.flow import Flow
from interwind_service.response.linear.linear_run import LinearRun
from interwind_service.response.linear.real_axis import source_evidence
from interwind_service.response.linear.residual import equation_residual
from interwind_service.response.sinusoidal.evidence import beyond_passive


def evidence_of_run(
    method: str, space: StateSpace, flow: Flow, run: LinearRun, ledger: EnergyLedger, peak_j: float, *, periods: int = 0
) -> Evidence:
    """Gather the evidence; ``peak_j`` is the largest stored energy seen."""
    reciprocity, passivity = source_evidence(space)
    size = max(abs(ledger.supplied_j), peak_j)
    topology = space.basis.storage.topology
    return Evidence(
        method=method,
        residual=max(space.residual, equation_residual(topology, flow.signals, flow.M, run.states, space.shift)),
        condition=space.condition,
        reciprocity_error=reciprocity,
        passivity_margin=passivity,
        energy_error=0.0 if size == 0.0 else abs(ledger.numerical_j) / size,
        periods_propagated=periods,
    )


def require_run(evidence: Evidence, tolerance: float) -> None:
    """Refuse a run whose evidence is beyond its tolerance.

    Raises
    ------
    AccuracyNotReached : energy error or residual above ``tolerance``, or reciprocity or passivity beyond its limit.
    """
    beyond = [
        f"{name} {value:.3g} above {limit:g}"
        for name, value, limit in (
            ("energy_error", evidence.energy_error, tolerance),
            ("residual", evidence.residual, tolerance),
        )
        if not value <= limit
    ]
    beyond += beyond_passive(evidence)
    if beyond:
        raise AccuracyNotReached(
            f"evidence: {'; '.join(beyond)}; the response is not returned; choose a larger tolerance, a shorter run or "
            "element values closer together",
            evidence=evidence,
        )
