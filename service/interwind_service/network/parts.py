"""Galvanic parts: what hangs together by conduction, and where each part has its zero.

Windings connect only their own terminals: coupling is no galvanic link. An independent current source is none either,
so a current it drives from one part into another has no return.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest
from interwind.model.finding import Finding, Severity
from interwind.model.network import Network
from interwind_service.network.forest import components
from interwind_service.network.kind import Kind

IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class Parts:
    """``of_node`` (nodes,) = part of each node, part 0 holding the reference; ``reference`` (parts,) = its zero node.

    ``forced`` (parts, inputs): net current that one ampere of each input drives into each part without a return.
    """

    of_node: IntArray
    reference: IntArray
    forced: IntArray

    @property
    def count(self) -> int:
        """Number of galvanic parts."""
        return len(self.reference)


def divide(
    network: Network,
    nodes: tuple[str, ...],
    start: IntArray,
    finish: IntArray,
    connecting: NDArray[np.bool_],
    kind: IntArray,
    input_branch: IntArray,
) -> tuple[Parts, tuple[Finding, ...]]:
    """Divide the nodes into parts; the zero of each is the reference, a stated one, else its first winding's finish."""
    of_node = components(len(nodes), start[connecting], finish[connecting])
    count = int(of_node.max()) + 1
    zero = np.full(count, -1, dtype=np.int64)
    zero[of_node[0]] = 0
    for position, name in enumerate(network.references):
        if name not in nodes:
            raise InvalidRequest.at(f"references[{position}]", f"{name!r} found; no element touches that node")
        node = nodes.index(name)
        if zero[of_node[node]] >= 0:
            other = nodes[zero[of_node[node]]]
            raise InvalidRequest.at(
                f"references[{position}]",
                f"{name!r} hangs together with {other!r}, which is its zero already; leave it out",
            )
        zero[of_node[node]] = node
    findings = []
    for part in range(count):
        if part == of_node[0]:
            continue
        stated = zero[part] >= 0
        if not stated:
            first = np.flatnonzero((kind == Kind.WINDING) & (of_node[finish] == part))
            zero[part] = finish[first[0]] if first.size else np.flatnonzero(of_node == part)[0]
        name = nodes[zero[part]]
        members = [nodes[k] for k in np.flatnonzero(of_node == part)]
        shown = ", ".join(members[:8]) + (" ..." if len(members) > 8 else "")
        findings.append(
            Finding(
                code="ISOLATED_PART",
                severity=Severity.INFO,
                field="references" if stated else "reference",
                message=f"nodes {shown} have no conducting path to {network.reference!r}; their voltages count from "
                f"{name!r}{'' if stated else '; name another zero in references if you mean one'}",
            )
        )
    forced = np.zeros((count, len(input_branch)), dtype=np.int64)
    for column, branch in enumerate(input_branch):
        if kind[branch] == Kind.CURRENT_SOURCE:
            forced[of_node[finish[branch]], column] += 1
            forced[of_node[start[branch]], column] -= 1
    return Parts(of_node, zero, forced), tuple(findings)
