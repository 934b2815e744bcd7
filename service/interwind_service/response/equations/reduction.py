"""Structural index reduction: which storage values a network leaves free, decided on incidence and turns ratios only.

In the voltages of a spanning tree that takes capacitors first, and the coordinates of the winding groups, the equations
E x' + F x = B u have E and F + Fᵀ positive semidefinite, so their index is at most 2 and two explicit deflations
suffice. The first is the kernel of the part of F that has no storage, a matter of incidence alone (loops of capacitors
and voltage sources, cutsets of inductors and current sources, perfectly coupled windings); it says which combinations
of storage values are bound: −F_bᵀ z = B_b u. What is left free is given a basis that is orthonormal in energy.

References: Bryant 1962; Kuh & Rohrer 1965; Estévez Schwarz & Tischendorf 2000 (topology of the index); Mehl, Mehrmann &
Wojtylak 2018 (index of dissipative Hamiltonian pencils).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.linalg as sl
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind_service.network.elimination import Elimination, eliminate
from interwind_service.network.forest import path_matrix, spanning_forest
from interwind_service.network.kind import Kind
from interwind_service.response.equations.roles import Role, Roles
from interwind_service.response.equations.storage import Storage
from interwind_service.tolerances import STRUCTURAL_MEMBER, STRUCTURAL_ROUNDING

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class StateBasis:
    """The consistent storage values e = X q + P u of a network.

    ``X`` (storage, n), XᵀEX = I, so that q is in √J and stored energy is ½ |q|² + ½ uᵀ (PᵀEP) u; ``P`` (storage,
    inputs), XᵀEP = 0. ``voltage_impulse``, ``current_impulse`` (branches, inputs): what a unit step of an input passes
    through a branch in no time, Vs and As; between steps these times du/dt are part of its voltage and current.
    ``dual`` (storage, n) replaces X where q is read, in networks with controlled sources.
    """

    storage: Storage
    X: FloatArray
    P: FloatArray
    voltage_impulse: FloatArray
    current_impulse: FloatArray
    dual: FloatArray | None = None

    def coordinates(self, values: FloatArray) -> FloatArray:
        """Return q of storage values (storage, k), consistent or not: charge and flux are kept, XᵀE e."""
        return (self.X if self.dual is None else self.dual).T @ self.storage.weigh(values)


def reduce(storage: Storage, roles: Roles) -> StateBasis:
    """Find the free storage values of a network of R, L, C, windings, ideal transformers and independent sources.

    Raises
    ------
    InvalidNetwork : the network is singular; the elements of the undetermined loop or cutset are named.
    """
    parts = _Partition(storage, roles)
    first = eliminate(parts.without_storage())
    T = first.kernel
    o, y0 = parts.plain, parts.kernel_columns
    v_part, y_part, i_part = T[: len(o)], T[len(o) : len(o) + y0], T[len(o) + y0 :]
    F_b = np.vstack(
        (
            parts.M_W[:, parts.charged].T @ (parts.N0 @ y_part) + parts.M_V[:, parts.charged].T @ i_part,
            -parts.N1.T @ (parts.M_W[:, o] @ v_part),
        )
    )
    F_b[np.abs(F_b) < STRUCTURAL_ROUNDING * max(1.0, np.abs(F_b).max(initial=0.0))] = 0.0
    B_b = -v_part.T @ parts.M_I[:, o].T @ parts.current_inputs - i_part.T @ parts.voltage_inputs
    E11 = parts.energy()
    second = eliminate(F_b.T, -B_b, preference=E11.diagonal())
    if second.rank < F_b.shape[1]:
        raise _singular(parts, T @ second.left_kernel[:, 0])
    X, P = _orthonormal(E11, second)
    z_b = -np.linalg.solve(F_b[second.pivots], (E11 @ P)[second.pivots]) if second.rank else np.zeros((0, P.shape[1]))
    return _basis(storage, parts, X, P, T @ z_b)


def _orthonormal(E11: FloatArray, second: Elimination) -> tuple[FloatArray, FloatArray]:
    Z = second.kernel
    particular = second.particular
    if not Z.shape[1]:
        return Z, particular
    E = Z.T @ E11 @ Z
    scale = 1.0 / np.sqrt(E.diagonal())
    U = sl.cholesky(E * np.outer(scale, scale), check_finite=False)
    X = sl.solve_triangular(U, (Z * scale).T, trans="T", check_finite=False).T
    return X, particular - X @ (X.T @ (E11 @ particular))


def _basis(storage: Storage, parts: _Partition, X: FloatArray, P: FloatArray, z2: FloatArray) -> StateBasis:
    def values(z1: FloatArray) -> FloatArray:
        tree = len(parts.charged)
        return np.vstack((parts.M_C[:, parts.charged] @ z1[:tree], z1[tree:]))

    plain = len(parts.plain)
    voltage = parts.M[:, parts.plain] @ z2[:plain]
    voltage[storage.capacitors] = 0.0
    current = np.zeros_like(voltage)
    current[parts.wound] = parts.N0 @ z2[plain : plain + parts.kernel_columns]
    own = z2[plain + parts.kernel_columns :]
    current[parts.imposed] = own[: len(parts.imposed)]
    for k, transformer in enumerate(storage.topology.transformers):
        current[transformer.first] = own[len(parts.imposed) + k]
        current[transformer.second] = -transformer.ratio * own[len(parts.imposed) + k]
    rest = values(P)
    charge = storage.topology.value[storage.capacitors][:, None] * rest[storage.capacitor_rows]
    current[storage.capacitors] = charge
    return StateBasis(storage, values(X), rest, voltage, current)


class _Partition:
    """Tree voltages, winding coordinates and imposed currents, those with storage apart from those without."""

    def __init__(self, storage: Storage, roles: Roles) -> None:
        topology = storage.topology
        self.storage, self.topology, self.roles = storage, topology, roles
        role, kind, nodes = roles.role, topology.kind, len(topology.nodes)
        tree = spanning_forest(nodes, topology.start, topology.finish, _order(storage, roles))
        paths = path_matrix(nodes, topology.start, topology.finish, tree)
        self.tree = tree
        self.M = paths[topology.start] - paths[topology.finish]
        is_capacitor = np.isin(tree, storage.capacitors)
        self.charged, self.plain = np.flatnonzero(is_capacitor), np.flatnonzero(~is_capacitor)
        self.M_C = self.M[storage.capacitors]
        self.resistors = np.flatnonzero((role == Role.ADMITTANCE) & (roles.conductance > 0.0))
        self.imposed = np.flatnonzero(role == Role.VOLTAGE)
        self.wound = np.concatenate([storage.inductors, *(group.branches for group in topology.groups)], dtype=np.int64)
        self.M_W = self.M[self.wound]
        ratios = [self.M[t.first] - t.ratio * self.M[t.second] for t in topology.transformers]
        self.M_V = np.vstack((self.M[self.imposed], *ratios)) if ratios else self.M[self.imposed]
        self.N1, self.N0, self.lossy = _winding_columns(storage)
        sources = topology.input_branch
        self.M_I = self.M[sources[kind[sources] == Kind.CURRENT_SOURCE]]
        self.current_inputs = np.eye(len(sources))[kind[sources] == Kind.CURRENT_SOURCE]
        self.voltage_inputs = np.zeros((len(self.M_V), len(sources)))
        for column, branch in enumerate(sources.tolist()):
            if kind[branch] == Kind.VOLTAGE_SOURCE:
                self.voltage_inputs[int(np.flatnonzero(self.imposed == branch)[0]), column] = 1.0

    @property
    def kernel_columns(self) -> int:
        """Number of winding coordinates without energy."""
        return self.N0.shape[1]

    def without_storage(self) -> FloatArray:
        """The scale-free stack whose kernel is that of F22: conductances and resistances by their place only."""
        o, y, i = self.plain, self.kernel_columns, len(self.M_V)
        M_Wo, M_Vo, M_Ro = self.M_W[:, o], self.M_V[:, o], self.M[np.ix_(self.resistors, o)]
        cut = self.N0.T @ M_Wo
        return np.vstack(
            (
                np.hstack((M_Ro, np.zeros((len(M_Ro), y + i)))),
                np.hstack((np.zeros((len(self.lossy), len(o))), self.lossy, np.zeros((len(self.lossy), i)))),
                np.hstack((np.zeros((len(o), len(o))), cut.T, M_Vo.T)),
                np.hstack((cut, np.zeros((y, y + i)))),
                np.hstack((M_Vo, np.zeros((i, y + i)))),
            )
        )

    def energy(self) -> FloatArray:
        """E of z1 = (voltages of tree capacitors, coordinates with energy)."""
        storage = self.storage
        incidence = self.M_C[:, self.charged]
        capacitance = (incidence.T * self.topology.value[storage.capacitors]) @ incidence
        blocks = [own.S[: own.rank, : own.rank] for own in storage.coordinates]
        return sl.block_diag(capacitance, np.diag(self.topology.value[storage.inductors]), *blocks)


def _winding_columns(storage: Storage) -> tuple[FloatArray, FloatArray, FloatArray]:
    """N1, N0: currents of inductors and windings from the coordinates with and without energy; N0 by rows with loss."""
    inductors = len(storage.inductors)
    N1 = sl.block_diag(np.eye(inductors), *(own.N[:, : own.rank] for own in storage.coordinates))
    kernels = []
    lossy = []
    for group, own in zip(storage.topology.groups, storage.coordinates, strict=True):
        N0 = own.N[:, own.rank :]
        N0 = N0 / np.abs(N0).max(axis=0, initial=0.0) if N0.shape[1] else N0
        kernels.append(N0)
        R = group.resistance_ohm
        diagonal = np.array_equal(R, np.diag(R.diagonal()))
        loss = N0[R.diagonal() > 0.0] if diagonal else (R / max(np.abs(R).max(), np.finfo(float).tiny)) @ N0
        lossy.append(loss)
    N0 = sl.block_diag(np.zeros((inductors, 0)), *kernels)
    return N1, N0, sl.block_diag(np.zeros((0, 0)), *lossy)


def _order(storage: Storage, roles: Roles) -> list[int]:
    """Capacitors, largest first; imposed voltages; resistors, smallest first; inductors and windings; transformers."""
    role, topology = roles.role, storage.topology
    rank = np.full(len(role), 9)
    size = np.zeros(len(role))
    rank[role == Role.TRANSFORMER] = 5
    rank[role == Role.WINDING] = 4
    rank[storage.inductors] = 4
    resistive = (role == Role.ADMITTANCE) & (roles.conductance > 0.0)
    rank[resistive], size[resistive] = 3, -roles.conductance[resistive]
    rank[role == Role.VOLTAGE] = 2
    rank[storage.capacitors], size[storage.capacitors] = 1, -topology.value[storage.capacitors]
    return [int(k) for k in np.lexsort((size, rank)) if rank[k] < 9]


def _singular(parts: _Partition, vector: FloatArray) -> InvalidNetwork:
    """Name the elements of an undetermined circulating current or floating voltage."""
    topology = parts.topology
    plain = len(parts.plain)
    voltage = parts.M[:, parts.plain] @ vector[:plain]
    current = np.zeros(len(topology.kind))
    current[parts.wound] = parts.N0 @ vector[plain : plain + parts.kernel_columns]
    current[parts.imposed] = vector[plain + parts.kernel_columns :][: len(parts.imposed)]
    for k, transformer in enumerate(topology.transformers):
        current[[transformer.first, transformer.second]] = vector[plain + parts.kernel_columns + len(parts.imposed) + k]
    size = np.abs(current if np.abs(current).max() > 0.0 else voltage)
    members = np.flatnonzero(size > STRUCTURAL_MEMBER * size.max())
    names = list(dict.fromkeys(topology.names[k] for k in members))
    nodes = list(dict.fromkeys(topology.nodes[n] for k in members for n in (topology.start[k], topology.finish[k])))
    what = (
        "their loop has nothing that limits its current" if np.abs(current).max() > 0.0 else "their cut leaves it free"
    )
    return InvalidNetwork.at(
        f"elements[{topology.element[members[0]]}]",
        f"no unique solution: {', '.join(names[:8])} at nodes {', '.join(nodes[:8])}: {what}; "
        "put a resistance in series with one of them, or in parallel to one",
        reason="SINGULAR_NETWORK",
    )
