"""Cautions that a network calls for by what it is, whatever is computed from it. No option removes them."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind.model import elements as el
from interwind.model.finding import Caution
from interwind.model.waveform import DoubleExponential, ImpulseShape, StandardImpulse
from interwind_service import tolerances as tol
from interwind_service.network.forest import components
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology

STANDING = Caution(
    "ENGINEERING_ESTIMATE",
    "These numbers are an engineering estimate under the assumptions stated. Standards, local codes and licensed "
    "practice decide what is built, energised and touched.",
)
_SURGES = {
    ImpulseShape.LIGHTNING_1_2_50,
    ImpulseShape.SWITCHING_250_2500,
    ImpulseShape.SURGE_10_1000,
    ImpulseShape.RING_100_KHZ,
}


def hazards(topology: Topology) -> tuple[Caution, ...]:
    """Return the standing statement and what the network itself calls for."""
    return (STANDING, *_barrier(topology), *_impulses(topology), *_open_current_transformers(topology))


def _barrier(topology: Topology) -> list[Caution]:
    parts = topology.parts
    names = [
        group.name for group in topology.groups if len(np.unique(parts.of_node[topology.start[group.branches]])) > 1
    ]
    names += [
        topology.names[t.first]
        for t in topology.transformers
        if parts.of_node[topology.start[t.first]] != parts.of_node[topology.start[t.second]]
    ]
    if not names:
        return []
    return [
        Caution(
            "ISOLATION_BARRIER",
            f"{', '.join(names)} couple parts that no conductor joins. Nothing here verifies insulation, creepage, "
            "clearance or touch current across that barrier; the safety standard of the equipment and its tests do.",
            measured=float(parts.count),
            threshold=1.0,
        )
    ]


def _impulses(topology: Topology) -> list[Caution]:
    peaks = {}
    for element in topology.network.elements:
        if isinstance(element, el.VoltageSource):
            wave = element.waveform
            if isinstance(wave, DoubleExponential):
                peaks[element.name] = abs(wave.amplitude)
            elif isinstance(wave, StandardImpulse) and wave.shape in _SURGES:
                peaks[element.name] = abs(wave.peak)
    if not peaks:
        return []
    return [
        Caution(
            "IMPULSE_VOLTAGE",
            f"An impulse voltage is applied by {', '.join(map(repr, peaks))}. Impulse generators kill and stay charged "
            "after a shot; test only in an interlocked, earthed bay under IEC 60060-1 with trained staff. Insulation "
            "coordination is not decided here.",
            measured=max(peaks.values()),
        )
    ]


def _open_current_transformers(topology: Topology) -> list[Caution]:
    cautions: list[Caution] = []
    forced = {int(k) for b in topology.of_kind(Kind.CURRENT_SOURCE) for k in (topology.start[b], topology.finish[b])}
    if not forced:
        return cautions
    low = _low_impedance(topology)
    for group in topology.groups:
        members = group.branches
        driven = np.array([{int(a), int(b)} & forced != set() for a, b in zip(
            topology.start[members].tolist(), topology.finish[members].tolist(), strict=True)])  # fmt: skip
        ratio = np.outer(group.root, 1.0 / group.root)
        stepped = driven & (ratio >= tol.CURRENT_TRANSFORMER_RATIO)
        stepped &= np.abs(group.coupling) >= tol.CURRENT_TRANSFORMER_COUPLING
        for i in np.flatnonzero(stepped.any(axis=1)).tolist():
            if _closed(topology, low, int(members[i])):
                continue
            j = int(np.flatnonzero(stepped[i])[0])
            cautions.append(
                Caution(
                    "OPEN_CURRENT_TRANSFORMER_SECONDARY",
                    f"Winding {group.labels[i]} of {group.name} stands open, or can be opened, while the current of "
                    f"{group.labels[j]} is forced. Never open the secondary of an energised current transformer: it "
                    "answers with lethal voltage and may explode. Short it first (IEC 61869-1).",
                    measured=float(ratio[i, j]),
                    threshold=tol.CURRENT_TRANSFORMER_RATIO,
                )
            )
    return cautions


def _closed(topology: Topology, low: NDArray[np.bool_], branch: int) -> bool:
    """Whether a burden closes a winding."""
    keep = low & (np.arange(len(low)) != branch)
    ends = components(len(topology.nodes), topology.start[keep], topology.finish[keep])
    return bool(ends[topology.start[branch]] == ends[topology.finish[branch]])


def _low_impedance(topology: Topology) -> NDArray[np.bool_]:
    """Branches that close a secondary: all but capacitors, current sources, switches and large resistors."""
    open_kinds = (Kind.CAPACITOR, Kind.CURRENT_SOURCE, Kind.SWITCH, Kind.CONTROLLED_CURRENT, Kind.DIODE, Kind.ARRESTER)
    low = ~np.isin(topology.kind, [int(kind) for kind in open_kinds])
    large = (topology.kind == Kind.RESISTOR) & ~(topology.value < tol.CURRENT_TRANSFORMER_BURDEN_OHM)
    return low & ~large
