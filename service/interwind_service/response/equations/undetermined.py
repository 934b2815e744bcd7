"""What the graph alone leaves undetermined or forbids: loops of imposed voltages, parts without a path to any zero."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind_service import tolerances as tol
from interwind_service.network.forest import Rooted, components, spanning_forest
from interwind_service.network.topology import Topology
from interwind_service.response.equations.factor import equilibrate
from interwind_service.response.equations.frequency_tree import Drive, FrequencyTree
from interwind_service.response.equations.roles import Role, Roles

ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class Undetermined:
    """``currents``: branches whose current a loop of imposed voltages leaves open. ``nodes``: without a path to a zero.

    ``component`` (nodes,): what hangs together. ``contradiction``: why the drives cannot be met, "" when they can.
    """

    currents: IntArray
    nodes: IntArray
    component: IntArray
    contradiction: str

    @property
    def nothing(self) -> bool:
        """Whether everything is determined."""
        return not (self.currents.size or self.nodes.size or self.contradiction)


def undetermined(tree: FrequencyTree, u: ComplexArray) -> Undetermined:
    """Look at the graph behind a tree, the drives being ``u`` (drives,)."""
    return left_open(tree.topology, tree.roles, tree.drives, u)


def left_open(topology: Topology, roles: Roles, drives: tuple[Drive, ...], u: ComplexArray) -> Undetermined:
    """Look for loops of imposed voltages and for parts without a zero, the drives being ``u`` (drives,)."""
    role, start, finish = roles.role, topology.start, topology.finish
    voltages = np.flatnonzero(role == Role.VOLTAGE)
    kept = spanning_forest(len(topology.nodes), start, finish, voltages.tolist())
    chords = np.setdiff1d(voltages, kept)
    volt = {drive.branch: value for drive, value in zip(drives, u, strict=True) if drive.out_of < 0}
    scale = np.abs(u).max(initial=0.0)
    forest = Rooted(len(topology.nodes), start, finish, kept) if chords.size else None
    currents: set[int] = set()
    contradictions = []
    for chord in chords.tolist():
        loop = forest.between(int(start[chord]), int(finish[chord])) if forest else []
        currents.update([chord, *(k for k, _ in loop)])
        gap = abs(volt.get(chord, 0j) - sum((sign * volt.get(k, 0j) for k, sign in loop), 0j))
        if gap > tol.CONTRADICTION * scale:
            contradictions.append(
                f"the loop of ideal voltages {_elements(topology, [chord, *(k for k, _ in loop)])} adds up to "
                f"{gap:.6g} V instead of 0; put the resistance that is there in series, or make the voltages agree"
            )
    conducting = np.flatnonzero((role != Role.CURRENT) & (role != Role.OPEN))
    component = components(len(topology.nodes), start[conducting], finish[conducting])
    floating = np.flatnonzero(~np.isin(component, component[topology.parts.reference]))
    contradictions += _without_return(topology, component, drives, u)
    return Undetermined(np.array(sorted(currents), dtype=np.int64), floating, component, "; ".join(contradictions))


def _without_return(topology: Topology, component: IntArray, drives: tuple[Drive, ...], u: ComplexArray) -> list[str]:
    """Say where currents enter a part that they cannot leave."""
    net = np.zeros(int(component.max()) + 1, dtype=np.complex128)
    total = np.zeros(len(net))
    names: dict[int, list[str]] = {}
    for value, drive in zip(u, drives, strict=True):
        if drive.out_of < 0 or component[drive.out_of] == component[drive.into]:
            continue
        for part, sign in ((int(component[drive.into]), 1), (int(component[drive.out_of]), -1)):
            net[part] += sign * value
            total[part] += abs(value)
            names.setdefault(part, []).append(topology.names[drive.branch] if drive.branch >= 0 else "a port")
    return [
        f"{', '.join(names[part])} force {abs(net[part]):.6g} A into nodes "
        f"{node_list(topology, np.flatnonzero(component == part))}, from which no current returns; give it a path"
        for part in np.flatnonzero(np.abs(net) > tol.CONTRADICTION * total).tolist()
    ]


def refuse(found: Undetermined) -> None:
    """Raise InvalidNetwork when the drives contradict each other."""
    if found.contradiction:
        raise InvalidNetwork.at("elements", found.contradiction, reason="CONTRADICTORY_SOURCES")


def node_list(topology: Topology, nodes: IntArray) -> str:
    """Name nodes for a message."""
    names = [repr(topology.nodes[k]) for k in nodes]
    return ", ".join(names[:8]) + (" ..." if len(names) > 8 else "")


def _elements(topology: Topology, branches: list[int]) -> str:
    return ", ".join(repr(name) for name in dict.fromkeys(topology.names[k] for k in branches))


def suspects(tree: FrequencyTree, s: complex) -> str:
    """Name the nodes and elements that the null vector of a singular matrix is made of."""
    unknown = tree.unknown
    if not unknown.size:
        return "no element"
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
    parts = [f"elements {_elements(tree.topology, branches)}"]
    if nodes.size:
        parts.insert(0, f"nodes {node_list(tree.topology, nodes)}")
    return " and ".join(parts)
