"""The energy ledger of a run, from the exact integral of the products of all states: no sample enters it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind.model.response import EnergyLedger
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology
from interwind_service.response.drive.generator import Generator
from interwind_service.response.equations.state_space import StateSpace
from interwind_service.response.linear.flow import Flow
from interwind_service.response.linear.initial import Start
from interwind_service.response.linear.readout import Signals

FloatArray = NDArray[np.float64]

_SOURCES = (Kind.VOLTAGE_SOURCE, Kind.CURRENT_SOURCE, Kind.CONTROLLED_VOLTAGE, Kind.CONTROLLED_CURRENT)


def ledger_of(
    space: StateSpace, flow: Flow, generator: Generator, start: Start, gramian: FloatArray, end: FloatArray
) -> EnergyLedger:
    """Close the books: supplied = dissipated + Δstored + lost in jumps + numerical.

    With y = (x, ξ) every voltage and current is a row on y, so ∫ v i dt = v G iᵀ, G = ∫ y yᵀ dt (`Gramian`).

    Parameters
    ----------
    gramian : G, shape (n + g, n + g).
    end : y at the end, shape (n + g,).
    """
    topology = space.basis.storage.topology
    signals = Signals(topology)
    voltage, current = flow.signals[: signals.branches], flow.signals[signals.branches : 2 * signals.branches]
    dissipated = _dissipated(topology, voltage, current, gramian)
    sources = topology.of_kind(*_SOURCES)
    supplied = -float(np.sum((voltage[sources] @ gramian) * current[sources]))
    from_jumps, lost = _jumps(space, generator)
    from_start = start.stored_after_j - start.stored_before_j + start.lost_j
    stored_end = stored(space, flow.energy @ end, generator.U @ end[flow.states :])
    supplied += from_jumps + from_start
    change = stored_end - start.stored_before_j
    lost += start.lost_j
    total = sum(dissipated.values())
    return EnergyLedger(
        supplied_j=supplied,
        dissipated_j=total,
        stored_change_j=change,
        lost_in_jumps_j=lost,
        numerical_j=supplied - total - change - lost,
        dissipated_by_element_j=dissipated,
    )


def stored(space: StateSpace, q: FloatArray, u: FloatArray) -> float:
    """Return the stored energy ½ eᵀ E e of the storage values e = X q + P u, J."""
    basis = space.basis
    values = basis.X @ q + basis.P @ u
    return 0.5 * float(values @ basis.storage.weigh(values[:, None])[:, 0])


def _dissipated(topology: Topology, voltage: FloatArray, current: FloatArray, gramian: FloatArray) -> dict[str, float]:
    answer: dict[str, float] = {}
    resistors = np.flatnonzero((topology.kind == Kind.RESISTOR) & (topology.value > 0.0))
    v = voltage[resistors]
    power = np.sum((v @ gramian) * v, axis=1) / topology.value[resistors]
    for branch, joule in zip(resistors.tolist(), power.tolist(), strict=True):
        answer[topology.names[branch]] = joule
    for group in topology.groups:
        if np.any(group.resistance_ohm):
            i = current[group.branches]
            answer[group.name] = float(np.sum(group.resistance_ohm * (i @ gramian @ i.T)))
    return answer


def _jumps(space: StateSpace, generator: Generator) -> tuple[float, float]:
    """Supplied and lost energy where sources jump: what is tied to them follows at once, and half of it is lost.

    A source across capacitors alone (or a current source through inductors alone) that jumps by Δu passes an impulse at
    its new value: supplied u₊ᵀ (PᵀEP) Δu, lost ½ Δuᵀ (PᵀEP) Δu.
    """
    P = space.basis.P
    tied = P.T @ space.basis.storage.weigh(P)
    if not np.any(tied) or not len(generator.events):
        return 0.0, 0.0
    after = generator.state(generator.events) @ generator.U.T
    jump = after - generator.before(generator.events) @ generator.U.T
    force = jump @ tied
    return float(np.sum(after * force)), 0.5 * float(np.sum(jump * force))
