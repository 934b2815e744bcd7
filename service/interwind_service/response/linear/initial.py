"""Where a run starts: stated capacitor voltages and winding currents, made consistent; or the point of rest."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind.model.finding import Finding
from interwind.model.response import SteadyStart
from interwind_service.response.equations.reduction import StateBasis
from interwind_service.response.equations.state_space import StateSpace
from interwind_service.response.request.stated import Stated, inconsistent_start
from interwind_service.tolerances import INCONSISTENT_START, REST_RESIDUAL

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Start:
    """``x`` (n,) just after 0; energies before, after and lost in the jump, J; INCONSISTENT_START when it jumped."""

    x: FloatArray
    stored_before_j: float
    stored_after_j: float
    lost_j: float
    findings: tuple[Finding, ...]


def start_of(space: StateSpace, given: Stated, u: FloatArray) -> Start:
    """Return the consistent start for inputs u(0+), shape (inputs,).

    Stated values keep their charges and fluxes: q = XᵀE e. What does not fit is an impulse at 0; the energy that goes
    with it, ½ (e − e₊)ᵀE(e − e₊), is lost.

    Raises
    ------
    InvalidNetwork : `SteadyStart` where the sources at 0 leave no point of rest.
    """
    basis = space.basis
    if isinstance(given, SteadyStart):
        x = _rest(space, u)
        after = _stored(basis, basis.X @ (space.V @ x) + basis.P @ u)
        return Start(x, after, after, 0.0, ())
    stated = _values(basis, given)
    q = basis.coordinates(stated[:, None])[:, 0]
    consistent = basis.X @ q + basis.P @ u
    before, after = _stored(basis, stated), _stored(basis, consistent)
    lost = _stored(basis, stated - consistent)
    findings: tuple[Finding, ...] = ()
    if lost > INCONSISTENT_START * max(before, after) and lost > 0.0:
        findings = (_jump(basis, stated, consistent, lost, max(before, after)),)
    return Start(space.W @ q, before, after, lost, findings)


def _rest(space: StateSpace, u: FloatArray) -> FloatArray:
    """Solve A x + B u = 0; modes that are at rest anywhere (a charge on an island, a circulating current) stay at 0."""
    drive = space.B @ u
    x = np.zeros(space.states)
    first = 0
    for size in space.blocks:
        rows = slice(first, first + size)
        A, b = space.A[rows, rows], drive[rows]
        x[rows] = np.linalg.lstsq(A, -b, rcond=REST_RESIDUAL)[0]
        gap = np.abs(A @ x[rows] + b).max(initial=0.0)
        if gap > np.sqrt(REST_RESIDUAL) * np.abs(b).max(initial=0.0):
            raise InvalidNetwork.at(
                "initial",
                "SteadyStart found, but the sources at 0 leave no point of rest: a voltage stands across inductors "
                "alone or a current flows into capacitors alone; state the initial values instead",
                reason="NO_POINT_OF_REST",
            )
        first += size
    return x


def _stored(basis: StateBasis, values: FloatArray) -> float:
    return 0.5 * float(values @ basis.storage.weigh(values[:, None])[:, 0])


def _values(basis: StateBasis, given: dict[int, float]) -> FloatArray:
    """Return the stated values in the coordinates of the storage, the rest 0."""
    storage = basis.storage
    topology = storage.topology
    by_branch = np.zeros(len(topology.kind))
    by_branch[list(given)] = list(given.values())
    values = np.zeros(storage.size)
    values[storage.capacitor_rows] = by_branch[storage.capacitors]
    values[storage.inductor_rows] = by_branch[storage.inductors]
    for group, rows, own in zip(topology.groups, storage.groups, storage.coordinates, strict=True):
        values[rows] = np.linalg.solve(own.N, by_branch[group.branches])[: own.rank]
    return values


def _jump(basis: StateBasis, stated: FloatArray, consistent: FloatArray, lost: float, peak: float) -> Finding:
    storage = basis.storage
    topology = storage.topology
    gap = consistent - stated
    energy = np.abs(gap * storage.weigh(gap[:, None])[:, 0])
    names = [topology.names[k] for k in (*storage.capacitors, *storage.inductors)]
    units = ["V"] * len(storage.capacitors) + ["A"] * len(storage.inductors)
    moved = [
        f"{names[k]} from {stated[k]:.6g} to {consistent[k]:.6g} {units[k]}"
        for k in np.argsort(-energy[: len(names)])[:4]
        if energy[k] > INCONSISTENT_START * peak
    ]
    groups = [
        group.name
        for group, rows in zip(topology.groups, storage.groups, strict=True)
        if energy[rows].sum() > INCONSISTENT_START * peak
    ]
    return inconsistent_start(moved + [f"the currents of {name}" for name in groups], lost)
