"""Poles, residues, zeros and the energy of each mode, from the state equations of a network.

    x' = A x + B u,   y = C x + D u + Y_1 u',   A w = p w

A residue is (C w)(v B u) with v w = 1; a zero is an s at which y and some state can go on with y = 0, a generalized
eigenvalue of [[A, B u], [C, D u + s Y_1 u]]. Energy coordinates q = V x make the share of a storage in a mode a sum of
squares.

References: Emami-Naeini & Van Dooren 1982 (zeros); Verghese, Pérez-Arriaga & Schweppe 1982 (participation).
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

import numpy as np
import scipy.linalg as sl
from numpy.typing import NDArray

from interwind.errors import AccuracyNotReached, InvalidNetwork, InvalidRequest
from interwind.model.finding import Evidence, Finding, Severity
from interwind.model.network import Network
from interwind.model.observables import Observable
from interwind.model.poles import PoleReport
from interwind_service import tolerances as tol
from interwind_service.network.hazards import hazards
from interwind_service.network.topology import Topology
from interwind_service.response.equations.state_space import StateSpace
from interwind_service.response.equations.time_model import model_of
from interwind_service.response.frequency import drives_of
from interwind_service.response.linear.readout import readout_of
from interwind_service.response.request.admit import admit
from interwind_service.response.sinusoidal.observe import resolve

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def poles(network: Network, observe: Sequence[Observable] | None = None, around_hz: float | None = None) -> PoleReport:
    """Find the natural modes of a linear network.

    Parameters
    ----------
    network : its sources by ``phasor``.
    observe : observables that are voltages, currents or flux linkages; None = all node voltages and winding currents.
    around_hz : Hz, where most accuracy is wanted; None = the geometric centre of the modes.

    Returns
    -------
    PoleReport : one entry a real pole or conjugate pair, slowest first.

    Raises
    ------
    InvalidNetwork : no unique solution, too many states, or an observable that is a product.
    """
    topology = admit(network)
    asked = resolve(topology, observe)
    space = model_at(topology, around_hz)
    rows = linear_rows(topology, asked)
    _, phasors = drives_of(topology)
    u = phasors[: len(topology.inputs)]
    if not (np.isfinite(space.A).all() and np.isfinite(space.B).all() and np.isfinite(space.C).all()):
        raise AccuracyNotReached(
            "the state equations leave the range of numbers; state around_hz near the modes, or check the units of the "
            "elements"
        )
    values, left, right = sl.eig(space.A, left=True, right=True)
    keep = np.flatnonzero(values.imag >= 0.0)
    keep = keep[np.argsort(np.abs(values[keep]), kind="stable")]
    p, w, v = values[keep], right[:, keep], left[:, keep]
    norm = np.einsum("ij,ij->j", v.conj(), w)
    with np.errstate(divide="ignore", invalid="ignore"):
        residue = ((rows @ space.C) @ w) * ((v.conj().T @ (space.B @ u)) / norm)
        quality = np.where(p.real != 0.0, np.abs(p) / (2.0 * np.abs(p.real)), np.inf)
    participants, participation = _participation(topology, space, w)
    return PoleReport(
        pole_per_s=p,
        frequency_hz=p.imag / (2.0 * np.pi),
        quality_factor=quality,
        observables=asked,
        residue=residue.T,
        zero_per_s=tuple(_zeros(space, row, u) for row in rows),
        participants=participants,
        participation=participation,
        findings=(*topology.findings, *close_poles(p)),
        cautions=hazards(topology),
        evidence=Evidence(
            method="eigenvalues of the state equations in energy coordinates",
            residual=_residual(space.A, p, w),
            condition=float(np.linalg.cond(right)) if len(right) else 1.0,
        ),
    )


def model_at(topology: Topology, around_hz: float | None) -> StateSpace:
    """Return the state equations centred where the modes are, or at ``around_hz``."""
    states = sum(group.size for group in topology.groups) + int(np.isfinite(topology.value).sum())
    if states > tol.MODAL_STATES:
        raise InvalidNetwork.at(
            "elements",
            f"up to {states} states found; modes are computed up to {tol.MODAL_STATES}; ask for a list of frequencies",
        )
    if around_hz is not None:
        low, high = tol.MODAL_LEAST_HZ, tol.MODAL_MOST_HZ
        if not low <= around_hz <= high:
            raise InvalidRequest.at("around_hz", f"{around_hz!r} Hz found; {low:g} to {high:g} Hz is expected")
        return model_of(topology, 2.0 * np.pi * around_hz)
    space = model_of(topology, tol.MODAL_FIRST_SHIFT)
    speed = np.abs(np.linalg.eigvals(space.A))
    speed = speed[speed > 0.0]
    return model_of(topology, float(np.exp(np.log(speed).mean()))) if speed.size else space


def linear_rows(topology: Topology, asked: Sequence[Observable]) -> FloatArray:
    """Return the rows (observables, signals) of observables that are linear; a power or an energy is refused."""
    readout = readout_of(topology, asked)
    for position, place in enumerate(readout.linear):
        if place < 0:
            raise InvalidNetwork.at(
                f"observe[{position}]", "a power or an energy has no poles of its own; ask for voltages and currents"
            )
    return readout.rows[list(readout.linear)] if asked else np.zeros((0, readout.rows.shape[1]))


def close_poles(p: ComplexArray) -> list[Finding]:
    """Say which oscillating modes lie closer together than their own bandwidth: one peak may show two of them."""
    ringing = p[p.imag > 0.0]
    ringing = ringing[np.argsort(ringing.imag)]
    found = []
    for one, other in pairwise(ringing):
        gap, width = other.imag - one.imag, 2.0 * max(-one.real, -other.real)
        if gap < width:
            found.append(
                Finding(
                    "MODES_WITHIN_BANDWIDTH", Severity.INFO, field="elements",
                    message=f"the modes at {one.imag / (2 * np.pi):.6g} Hz and {other.imag / (2 * np.pi):.6g} Hz lie "
                    "closer than their own bandwidth; one peak may show both",
                    measured=float(gap / (2 * np.pi)), limit=float(width / (2 * np.pi)),
                )
            )  # fmt: skip
    return found


def _zeros(space: StateSpace, row: FloatArray, u: ComplexArray) -> ComplexArray:
    """Return the zeros of one observable for the drive u; none where the observable is 0 throughout."""
    if not space.states:
        return np.zeros(0, dtype=np.complex128)
    b, c = space.B @ u, row @ space.C
    y1 = row @ space.Y1 @ u
    d = row @ space.gain_at_shift @ u - c @ np.linalg.solve(space.shift * np.eye(space.states) - space.A, b)
    size = float(np.abs(space.A).max()) or 1.0
    scale_b, scale_c = float(np.abs(b).max(initial=0.0)), float(np.abs(c).max(initial=0.0))
    if scale_b == 0.0 or scale_c == 0.0:
        return np.zeros(0, dtype=np.complex128)
    # Unit entries: s in units of |A|, b and c by their largest, so that infinite zeros stand apart from finite ones.
    top = np.hstack((space.A / size, (b / scale_b)[:, None]))
    bottom = np.append(c / scale_c, d * size / (scale_b * scale_c))
    pencil = np.vstack((top, bottom[None]))
    shift = np.eye(space.states + 1, dtype=np.complex128)
    shift[-1, -1] = -y1 * size * size / (scale_b * scale_c)
    alpha, beta = sl.eig(pencil, shift, right=False, homogeneous_eigvals=True)
    finite = np.abs(beta) > tol.INFINITE_ZERO * np.abs(alpha)
    found = size * alpha[finite] / beta[finite]
    found = found[found.imag >= 0.0] if not np.iscomplexobj(u) or not u.imag.any() else found
    return found[np.argsort(np.abs(found), kind="stable")]


def _participation(
    topology: Topology, space: StateSpace, w: ComplexArray
) -> tuple[tuple[tuple[str, str], ...], FloatArray]:
    """Return who stores energy, and the share (modes, participants) of each; a winding's is Re(i* λ) over the sum."""
    storage = space.basis.storage
    e = space.basis.X @ (space.V @ w)
    weighed = storage.weigh(e.real) + 1j * storage.weigh(e.imag)
    names, shares = [], []
    for rows, branches in ((storage.capacitor_rows, storage.capacitors), (storage.inductor_rows, storage.inductors)):
        shares.append((e[rows].conj() * weighed[rows]).real)
        names += [(topology.names[k], "") for k in branches]
    for group, rows, own in zip(topology.groups, storage.groups, storage.coordinates, strict=True):
        current = own.N[:, : own.rank] @ e[rows]
        shares.append((current.conj() * (group.inductance_h @ current)).real)
        names += [(group.name, label) for label in group.labels]
    share = np.vstack(shares) if shares else np.zeros((0, w.shape[1]))
    total = share.sum(axis=0)
    return tuple(names), np.divide(share, total, out=np.full_like(share, np.nan), where=total > 0.0).T


def _residual(A: FloatArray, p: ComplexArray, w: ComplexArray) -> float:
    if not p.size:
        return 0.0
    gap = np.abs(A @ w - w * p).max()
    size = np.abs(A).sum(axis=1).max() * np.abs(w).max()
    return float(gap / size) if size > 0.0 else float(gap)
