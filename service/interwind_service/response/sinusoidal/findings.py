"""Findings of a frequency response: where it is singular, and what it leaves undetermined."""

from __future__ import annotations

from interwind.model.finding import Finding, Severity
from interwind_service.network.topology import Topology
from interwind_service.response.equations.undetermined import Undetermined, node_list


def open_end_findings(topology: Topology, found: Undetermined) -> list[Finding]:
    """Say which node voltages and which currents nothing determines."""
    findings = []
    if found.nodes.size:
        findings.append(
            Finding(
                "UNDEFINED_POTENTIAL",
                Severity.WARNING,
                field="elements",
                message=f"nodes {node_list(topology, found.nodes)} are cut off by open switches; their voltages are "
                "NaN",
            )
        )
    if found.currents.size:
        findings.append(
            Finding(
                "UNDETERMINED_CURRENT",
                Severity.WARNING,
                field="elements",
                message=f"the current shared by {_names(topology, found)} is undetermined, for they close a loop "
                "without resistance; their currents are NaN; give one of them the resistance it has",
            )
        )
    return findings


def singular_finding(topology: Topology, frequency_hz: float, found: Undetermined, suspected: str) -> Finding:
    """Name the frequency, and the nodes and elements at fault; ``suspected`` are those of the null vector."""
    if found.nothing:
        what = f"{suspected} carry a resonance without loss or a current that nothing determines"
    elif found.contradiction:
        what = found.contradiction
    elif found.nodes.size:
        what = f"nodes {node_list(topology, found.nodes)} hang on capacitors or open switches alone"
    else:
        what = f"{_names(topology, found)} close a loop without resistance"
    return Finding(
        "SINGULAR_AT_FREQUENCY",
        Severity.WARNING,
        field="frequency_hz",
        message=f"at {frequency_hz:.9g} Hz the network has no unique solution: {what}",
        measured=frequency_hz,
    )


def _names(topology: Topology, found: Undetermined) -> str:
    return ", ".join(repr(name) for name in dict.fromkeys(topology.names[k] for k in found.currents))
