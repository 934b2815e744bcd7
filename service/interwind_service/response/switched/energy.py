"""The energy ledger: every element's energy as an exact integral of the modal sums, and what is left over.

    supplied = Σ dissipated + Δ stored + lost in jumps + numerical

What is dissipated in the stand-ins of ideal elements (ε Z, ε / Z) is what the ideal network loses in its jumps.
The stored energy is taken from the states, the rest from ∫ v i dt, so the ledger closes only if both are right.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.model.response import EnergyLedger
from interwind_service import tolerances as tol
from interwind_service.network.kind import Kind
from interwind_service.response.switched.device import SaturableBranch
from interwind_service.response.switched.piece import Piece
from interwind_service.response.switched.tableau import Tableau
from interwind_service.response.switched.trajectory import Rows, Trajectory, product_integrals

FloatArray = NDArray[np.float64]

ABSORBED, SUPPLIED, DISSIPATED, JUMP = range(4)


@dataclass(frozen=True, slots=True, eq=False)
class PowerTerms:
    """Products of two rows, each an energy rate: ``account`` and ``element`` (-1: none) of each."""

    one: Rows
    other: Rows
    account: NDArray[np.int64]
    element: NDArray[np.int64]


def power_terms(tableau: Tableau, mode: tuple[int, ...]) -> PowerTerms:
    """Return all power products of one combination of device modes."""
    topology, limit = tableau.topology, tableau.limit
    width = tableau.unknowns + tableau.states
    terms: list[tuple[FloatArray, float, FloatArray, int, int]] = []
    ideal, offset = {}, {}
    for device, own in zip(tableau.devices, mode, strict=True):
        ideal[device.branch] = device.ideal_in(own)
        offset[device.branch] = device.heat_offset(own)

    def current(branch: int) -> FloatArray:
        row = np.zeros(width)
        row[tableau.column_of_current[branch]] = 1.0
        return row

    def voltage(branch: int) -> FloatArray:
        row = np.zeros(width)
        row[: tableau.unknowns] = tableau.branch_voltage_row(branch)
        return row

    for branch in range(len(topology.kind)):
        kind, element = topology.kind[branch], int(topology.element[branch])
        i = current(branch)
        terms.append((voltage(branch), 0.0, i, ABSORBED, element))
        if kind in (Kind.VOLTAGE_SOURCE, Kind.CURRENT_SOURCE, Kind.CONTROLLED_VOLTAGE, Kind.CONTROLLED_CURRENT):
            terms.append((-voltage(branch), 0.0, i, SUPPLIED, element))
        elif kind == Kind.RESISTOR:
            account = DISSIPATED if topology.value[branch] > 0.0 else JUMP
            terms.append((voltage(branch), 0.0, i, account, element))
        elif kind == Kind.INDUCTOR and topology.value[branch] == 0.0:
            terms.append((voltage(branch), 0.0, i, JUMP, element))
        elif kind in (Kind.SWITCH, Kind.DIODE, Kind.ARRESTER):
            if ideal.get(branch, False):
                terms.append((voltage(branch), -offset[branch], i, JUMP, element))
                terms.append((np.zeros(width), offset[branch], i, DISSIPATED, element))
            else:
                terms.append((voltage(branch), 0.0, i, DISSIPATED, element))
        if limit.series_ohm[branch] > 0.0:
            terms.append((limit.series_ohm[branch] * i, 0.0, i, JUMP, element))
    for group in topology.groups:
        used = limit.winding_resistance(group)
        for k, branch in enumerate(group.branches):
            drop = sum(used[k, j] * current(int(other)) for j, other in enumerate(group.branches) if used[k, j])
            if np.any(drop):
                account = DISSIPATED if group.resistance_ohm[k, k] > 0.0 else JUMP
                terms.append((drop, 0.0, current(int(branch)), account, group.position))
    for node, leak_s in limit.leaks:
        row = np.zeros(width)
        row[tableau.column_of_node[node]] = 1.0
        terms.append((leak_s * row, 0.0, row, JUMP, -1))
    one, constant, other, account, element = zip(*terms, strict=True)
    return PowerTerms(
        Rows(np.array(one), np.array(constant)),
        Rows(np.array(other), np.zeros(len(other))),
        np.array(account),
        np.array(element),
    )


@dataclass(frozen=True, slots=True, eq=False)
class Energy:
    """``ledger``, its ``error`` over the larger of supply and peak stored energy, ``absorbed_j`` (elements,)."""

    ledger: EnergyLedger
    error: float
    absorbed_j: FloatArray


def stored_j(tableau: Tableau, x: FloatArray) -> float:
    """Return the stored energy of a state."""
    total = 0.5 * float(x @ x)
    for device in tableau.devices:
        if isinstance(device, SaturableBranch):
            own = x[device.state]
            total += float(device.energy_j(np.array([device.root * own]))[0]) - 0.5 * float(own**2)
    return total


def energy_of(tableau: Tableau, run: Trajectory, start: FloatArray, end: FloatArray, peak_j: float) -> Energy:
    """Return the energy ledger of a run from state ``start`` to ``end``; ``peak_j`` is the largest energy met."""
    topology = tableau.topology
    elements = len(topology.network.elements)
    absorbed, heat = np.zeros(elements), np.zeros(elements)
    supplied = jump = gross = 0.0
    known: dict[int, PowerTerms] = {}
    for group in run.groups():
        piece: Piece = group.piece
        terms = known.setdefault(piece.number, power_terms(tableau, piece.mode))
        one = terms.one.coefficients(piece, group.kappa, group.w)
        other = terms.other.coefficients(piece, group.kappa, group.w)
        per_segment = product_integrals(piece, group.span_s, one, other)
        total = per_segment.sum(axis=0)
        np.add.at(absorbed, terms.element[terms.account == ABSORBED], total[terms.account == ABSORBED])
        np.add.at(heat, terms.element[terms.account == DISSIPATED], total[terms.account == DISSIPATED])
        supplied += float(total[terms.account == SUPPLIED].sum())
        gross += float(np.abs(per_segment[:, terms.account == SUPPLIED]).sum())
        jump += float(total[terms.account == JUMP].sum())
    change = stored_j(tableau, end) - stored_j(tableau, start)
    numerical = supplied - float(heat.sum()) - change - jump
    names = [element.name for element in topology.network.elements]
    ledger = EnergyLedger(
        supplied, float(heat.sum()), change, jump, numerical,
        {name: float(own) for name, own in zip(names, heat, strict=True) if own != 0.0},
    )  # fmt: skip
    scale = max(abs(supplied), peak_j)
    if abs(numerical) > tol.LEDGER_NOTICED * scale:  # the ends of the segments may miss the peak: look inside
        scale = max(scale, run.peak_energy(tableau))
    return Energy(ledger, abs(numerical) / scale if scale > 0.0 else 0.0, absorbed)
