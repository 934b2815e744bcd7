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
from interwind_service.network.topology import Topology
from interwind_service.response.admit import admit
from interwind_service.response.cautions import cautions_of
from interwind_service.response.evidence import gather, judge, require
from interwind_service.response.findings import open_end_findings, singular_finding
from interwind_service.response.frequency_tree import Drive
from interwind_service.response.observe import evaluate, resolve
from interwind_service.response.phasors import Phasors, StressGauge
from interwind_service.response.spectrum import checked_frequencies, spectrum
from interwind_service.response.undetermined import refuse, undetermined

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
    topology = admit(network)
    asked = resolve(topology, observe)
    drives, u = drives_of(topology)
    samples = np.full((len(f), len(asked)), np.nan, dtype=np.complex128)
    findings, judged, gauge = list(topology.findings), [], StressGauge(topology)
    for band in spectrum(topology, f, drives):
        open_ends = undetermined(band.tree, u)
        singular = ~np.isfinite(band.condition)
        if band.s[0] != 0.0:
            refuse(open_ends)
            findings += [x for x in open_end_findings(band.tree, open_ends) if x not in findings]
        elif not open_ends.nothing:
            singular[:] = True
        findings += [
            singular_finding(band.tree, float(f[k]), complex(s), open_ends)
            for k, s in zip(band.index[singular], band.s[singular], strict=True)
        ]
        phasors = Phasors(band, u, open_ends)
        for column, item in enumerate(asked):
            samples[band.index, column] = evaluate(phasors, item)
        samples[band.index[singular]] = np.nan
        if not singular.any():
            gauge.take(phasors)
        judged.append(judge(band, drives_alone=open_ends.nothing))
    found = [x for x in findings if x.code == "SINGULAR_AT_FREQUENCY"]
    if len(found) == len(f):
        raise InvalidNetwork.at(
            "elements", f"no solution at any frequency asked for; {found[0].message}", reason="SINGULAR"
        )
    evidence = gather("frequency tree, LU, one refinement", judged)
    require(evidence)
    return FrequencyResponse(
        asked,
        samples,
        frequency_hz=f,
        findings=tuple(findings),
        cautions=cautions_of(topology, gauge.stress()),
        evidence=evidence,
    )


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
