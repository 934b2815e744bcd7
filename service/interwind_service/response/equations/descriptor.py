"""Numerical reduction of networks with controlled sources, whose structure alone does not tell the index.

All storage values start as states. At a large s the resolvent times s is the projector on the finite modes, 0 on the
constraints; its invariant subspaces (real Schur form) separate the two, and what the constraints leave of the drives
must be a constant, which is checked at two s, else the index is above 2.

References: Van Dooren 1979 (deflating subspaces); Lamour, März & Tischendorf 2013 (projectors of differential-algebraic
equations).
"""

from __future__ import annotations

import numpy as np
import scipy.linalg as sl
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind_service import tolerances as tol
from interwind_service.response.equations.reduction import StateBasis
from interwind_service.response.equations.resolvent import Resolvent, resolvent
from interwind_service.response.equations.roles import Roles
from interwind_service.response.equations.storage import Storage

FloatArray = NDArray[np.float64]


def descriptor_basis(storage: Storage, roles: Roles, s0: float) -> StateBasis:
    """Find the finite modes of a network with controlled sources, centred on s0, 1/s.

    Raises
    ------
    InvalidNetwork : the equations are singular, or of index above 2.
    """
    everything = _all_values(storage, len(roles.role))
    states = everything.X.shape[1]
    high, count = _separation(everything, roles)
    K = high.s0 * high.K
    T, Q, found = sl.schur(K, sort=lambda re, im: np.hypot(re, im) > tol.FINITE_MODE)
    if found != count:
        raise _unclear()
    finite, left = Q[:, :count], Q[:, :count].T
    if 0 < count < states:
        left = left + sl.solve_sylvester(T[:count, :count], -T[count:, count:], T[:count, count:]) @ Q[:, count:].T
    solves = [resolvent(everything, roles, s) for s in (s0, s0 * tol.DESCRIPTOR_CHECK)]
    rests = [own.r - finite @ (left @ own.r) for own in solves]
    impulses = [-own.H @ rest for own, rest in zip(solves, rests, strict=True)]
    _agree(rests, solves[0].r)
    _agree(impulses, solves[0].y / s0)
    branches = len(roles.role)
    return StateBasis(
        storage,
        everything.X @ finite,
        everything.X @ rests[0],
        impulses[0][:branches],
        impulses[0][branches : 2 * branches],
        dual=everything.X @ left.T,
    )


def _all_values(storage: Storage, branches: int) -> StateBasis:
    """Take every storage value as a state, orthonormal in energy."""
    value = storage.topology.value
    single = np.concatenate((value[storage.capacitors], value[storage.inductors]))
    blocks = [np.diag(1.0 / np.sqrt(single))]
    for own in storage.coordinates:
        S = own.S[: own.rank, : own.rank]
        blocks.append(sl.solve_triangular(sl.cholesky(S, check_finite=False), np.eye(own.rank)))
    inputs = len(storage.topology.inputs)
    nothing = np.zeros((branches, inputs))
    return StateBasis(storage, sl.block_diag(*blocks), np.zeros((storage.size, inputs)), nothing, nothing)


def _separation(everything: StateBasis, roles: Roles) -> tuple[Resolvent, int]:
    """Return the resolvent at the largest s that separates finite modes (s μ near 1) from constraints (0), counted."""
    for shift in tol.DESCRIPTOR_SHIFTS:
        own = resolvent(everything, roles, shift)
        size = np.sort(np.abs(own.s0 * np.linalg.eigvals(own.K)))[::-1]
        count = int((size > tol.FINITE_MODE).sum())
        above = float(size[count - 1]) if count else 1.0
        below = float(size[count]) if count < len(size) else 0.0
        if above >= tol.DESCRIPTOR_GAP * below:
            return own, count
    raise _unclear()


def _agree(pair: list[FloatArray], scale: FloatArray) -> None:
    size = max(float(np.abs(pair[0]).max(initial=0.0)), float(np.abs(scale).max(initial=0.0)))
    if float(np.abs(pair[0] - pair[1]).max(initial=0.0)) > tol.DESCRIPTOR_ROUNDING * size:
        raise _unclear()


def _unclear() -> InvalidNetwork:
    return InvalidNetwork.at(
        "elements",
        "the controlled sources tie voltages or currents so that no order of the equations is certain (index above 2); "
        "put a small resistance in series with a controlled voltage source, or in parallel to a controlled current",
        reason="INDEX_UNCERTAIN",
    )
