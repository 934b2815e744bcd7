"""Frequency response: complex peak values of any observable at each frequency, sources by their phasors."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind.model.elements import CurrentSource, VoltageSource
from interwind.model.network import Network
from interwind.model.observables import Observable
from interwind.model.response import FrequencyResponse
from interwind_service.network.kind import Kind
from interwind_service.network.topology import Topology, with_current_sources
from interwind_service.response.equations.frequency_tree import Drive
from interwind_service.response.equations.roles import roles_of
from interwind_service.response.equations.undetermined import left_open, refuse
from interwind_service.response.request.admit import admit
from interwind_service.response.request.cautions import cautions_of
from interwind_service.response.sinusoidal.evidence import gather, judge, require
from interwind_service.response.sinusoidal.findings import open_end_findings, singular_finding
from interwind_service.response.sinusoidal.observe import evaluate, resolve
from interwind_service.response.sinusoidal.phasors import Phasors
from interwind_service.response.sinusoidal.solutions import solutions
from interwind_service.response.sinusoidal.spectrum import checked_frequencies
from interwind_service.response.sinusoidal.stress import StressGauge
from interwind_service.response.sinusoidal.swept_state import Recorder

ComplexArray = NDArray[np.complex128]


def frequency_response(
    network: Network, frequency_hz: object, observe: Sequence[Observable] | None = None
) -> FrequencyResponse:
    """Compute the sinusoidal steady state at each frequency.

    M(jω) z + J u = 0 in the voltages of a tree chosen at ω (`frequency_tree`), u the phasors of the sources.

    Parameters
    ----------
    network : Network
        Its sources by ``phasor``; a switch stands as at t = 0.
    frequency_hz : array_like, shape (F,)
        Hz, from 0 on.
    observe : sequence of Observable, optional
        None = all node voltages and winding currents.

    Returns
    -------
    FrequencyResponse
        Complex (F,) per observable; a NaN row and a finding where the network is singular.

    Raises
    ------
    InvalidNetwork
        Sources contradict each other, or the network is singular at every frequency asked for.
    AccuracyNotReached
        Residual, reciprocity or passivity beyond its limit.
    """
    f = checked_frequencies(frequency_hz)
    topology = _with_port_drives(admit(network))
    asked = resolve(topology, observe)
    drives, u = drives_of(topology)
    samples = np.full((len(asked), len(f)), np.nan, dtype=np.complex128)
    findings, judged, methods, gauge = list(topology.findings), [], {}, StressGauge(topology)
    moving = left_open(topology, roles_of(topology, at_zero=False), drives, u)
    standing = left_open(topology, roles_of(topology, at_zero=True), drives, u) if not f.all() else moving
    if f.any():
        refuse(moving)
        findings += open_end_findings(topology, moving)
    for found in solutions(topology, f, drives, u, sweepable=moving.nothing, rows=_rows(topology, asked)):
        open_ends = moving if found.omega[0] else standing
        singular = found.singular if found.omega[0] or standing.nothing else np.ones_like(found.singular)
        findings += [
            singular_finding(topology, float(f[found.index[k]]), open_ends, found.suspects(int(k)))
            for k in np.flatnonzero(singular)
        ]
        phasors = Phasors(found.state, open_ends)
        for row, item in zip(samples, asked, strict=True):
            row[found.index] = evaluate(phasors, item)
        samples[:, found.index[singular]] = np.nan
        if not singular.any():
            gauge.take_voltages(phasors)
            gauge.take_fields(Phasors(found.loudest, open_ends))
        judged.append(judge(found, drives_alone=open_ends.nothing))
        methods[found.method] = None
    singular_rows = [x for x in findings if x.code == "SINGULAR_AT_FREQUENCY"]
    if len(singular_rows) == len(f):
        raise InvalidNetwork.at(
            "elements", f"no solution at any frequency asked for; {singular_rows[0].message}", reason="SINGULAR"
        )
    evidence = gather("; ".join(methods), judged)
    require(evidence)
    return FrequencyResponse(
        asked,
        samples.T,
        frequency_hz=f,
        findings=tuple(findings),
        cautions=cautions_of(topology, gauge.stress()),
        evidence=evidence,
    )


def _rows(topology: Topology, asked: tuple[Observable, ...]) -> tuple[int, ...]:
    """The signals that the observables need."""
    recorder = Recorder(topology)
    for item in asked:
        evaluate(recorder, item)
    return tuple(recorder.rows)


def _with_port_drives(topology: Topology) -> Topology:
    """Give each port within one part a current source of 0 A, so that the evidence covers ports as well as sources."""
    network = topology.network
    added = []
    for position, port in enumerate(network.ports):
        a, b = port_nodes(topology, position)
        if topology.parts.of_node[a] == topology.parts.of_node[b] and a != b:
            added.append(CurrentSource(unused_name(network, f"port {port.name}"), port.b, port.a))
    return with_current_sources(topology, added) if added else topology


def unused_name(network: Network, name: str) -> str:
    """Return a name that no element has, made from ``name``."""
    while any(element.name == name for element in network.elements):
        name += " "
    return name


def drives_of(topology: Topology) -> tuple[tuple[Drive, ...], ComplexArray]:
    """Return the drives of a network, its sources and then its ports, and their phasors (0 for a port)."""
    drives, phasors = [], []
    for branch in topology.input_branch.tolist():
        source = topology.network.elements[topology.element[branch]]
        if topology.kind[branch] == Kind.CURRENT_SOURCE:
            drives.append(Drive(branch, int(topology.start[branch]), int(topology.finish[branch])))
        else:
            drives.append(Drive(branch))
        given = source.phasor if isinstance(source, VoltageSource | CurrentSource) else None
        phasors.append(0j if given is None else given)
    for position in range(len(topology.network.ports)):
        a, b = port_nodes(topology, position)
        if topology.parts.of_node[a] == topology.parts.of_node[b]:
            drives.append(Drive(-1, out_of=b, into=a))
            phasors.append(0j)
    return tuple(drives), np.array(phasors, dtype=np.complex128)


def port_nodes(topology: Topology, position: int) -> tuple[int, int]:
    """Return the node numbers of a port; an unknown node is refused by its path."""
    port = topology.network.ports[position]
    for field in ("a", "b"):
        if topology.node(getattr(port, field)) < 0:
            raise InvalidNetwork.at(
                f"ports[{position}].{field}", f"{getattr(port, field)!r} found; no element touches that node"
            )
    return topology.node(port.a), topology.node(port.b)
