"""What the graph alone leaves undetermined or forbids: loops of imposed voltages, parts without a path to any zero."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind_service import tolerances as tol
from interwind_service.response.factor import equilibrate
from interwind_service.response.frequency_tree import FrequencyTree

ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class Undetermined:
    """``currents``: branches whose current a loop of imposed voltages leaves open. ``nodes``: without a path to a zero.

    ``contradiction``: why the drives cannot be met, "" when they can.
    """

    currents: IntArray
    nodes: IntArray
    contradiction: str

    @property
    def nothing(self) -> bool:
        """Whether everything is determined."""
        return not (self.currents.size or self.nodes.size or self.contradiction)


def undetermined(tree: FrequencyTree, u: ComplexArray) -> Undetermined:
    """Look for loops of imposed voltages and for parts without a zero, the drives being ``u`` (drives,)."""
    topology = tree.topology
    currents: set[int] = set()
    contradictions = []
    imposed = np.zeros(len(tree.tree), dtype=np.complex128)
    imposed[tree.known] = tree.imposed @ u
    scale = np.abs(u).max(initial=0.0)
    for chord in tree.loops.tolist():
        members = [chord, *tree.tree[np.flatnonzero(tree.Q[:, chord])].tolist()]
        currents.update(members)
        own = sum((u[k] for k, drive in enumerate(tree.drives) if drive.branch == chord and drive.out_of < 0), 0j)
        gap = abs(own - tree.Q[:, chord] @ imposed)
        if gap > tol.CONTRADICTION * scale:
            contradictions.append(
                f"the loop of ideal voltages {_elements(tree, members)} adds up to {gap:.6g} V instead of 0; "
                "put the resistance that is there in series, or make the voltages agree"
            )
    zero = tree.component[topology.parts.reference]
    floating = np.flatnonzero(~np.isin(tree.component, zero))
    for part in np.unique(tree.component):
        nodes = np.flatnonzero(tree.component == part)
        net, total, names = 0j, 0.0, []
        for value, drive in zip(u, tree.drives, strict=True):
            if drive.out_of >= 0 and (tree.component[drive.out_of] == part) != (tree.component[drive.into] == part):
                net += value if tree.component[drive.into] == part else -value
                total += abs(value)
                names.append(topology.names[drive.branch] if drive.branch >= 0 else "a port")
        if abs(net) > tol.CONTRADICTION * total:
            contradictions.append(
                f"{', '.join(names)} force {abs(net):.6g} A into nodes {node_list(tree, nodes)}, from which no current "
                "returns; give it a path"
            )
    return Undetermined(np.array(sorted(currents), dtype=np.int64), floating, "; ".join(contradictions))


def refuse(found: Undetermined) -> None:
    """Raise InvalidNetwork when the drives contradict each other."""
    if found.contradiction:
        raise InvalidNetwork.at("elements", found.contradiction, reason="CONTRADICTORY_SOURCES")


def node_list(tree: FrequencyTree, nodes: IntArray) -> str:
    """Name nodes for a message."""
    names = [repr(tree.topology.nodes[k]) for k in nodes]
    return ", ".join(names[:8]) + (" ..." if len(names) > 8 else "")


def _elements(tree: FrequencyTree, branches: list[int]) -> str:
    return ", ".join(repr(name) for name in dict.fromkeys(tree.topology.names[k] for k in branches))


def suspects(tree: FrequencyTree, s: complex) -> str:
    """Name the nodes and elements that the null vector of a singular matrix is made of."""
    unknown = tree.unknown
    M = tree.matrix(np.array([s]))[:, :, unknown]
    scaled, _, columns = equilibrate(M)
    null = np.linalg.svd(scaled[0])[2][-1].conj()
    large = np.abs(null) > tol.NULL_VECTOR_SHARE * np.abs(null).max()
    T = len(tree.tree)
    branches = [int(tree.columns[k]) for k in unknown[large]]
    voltage = np.zeros(T, dtype=np.complex128)
    voltage[unknown[unknown < T]] = (null * columns[0])[unknown < T]
    e = np.abs(tree.paths @ voltage)
    nodes = np.flatnonzero(e > tol.NULL_VECTOR_SHARE * e.max()) if e.max(initial=0.0) > 0.0 else np.zeros(0, np.int64)
    parts = [f"elements {_elements(tree, branches)}"]
    if nodes.size:
        parts.insert(0, f"nodes {node_list(tree, nodes)}")
    return " and ".join(parts)
