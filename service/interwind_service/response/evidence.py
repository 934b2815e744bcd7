"""The numbers that vouch for a frequency response, and the refusal of a response they do not vouch for."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.errors import AccuracyNotReached
from interwind.model.finding import Evidence
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.response.spectrum import Band

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


def terminal_matrix(band: Band) -> ComplexArray:
    """Return the hybrid matrix H (f, d, d) of the drives: current into the network per volt, port voltage per ampere.

    Over voltage drives alone it is the admittance matrix, over current drives alone the impedance matrix. Mixed, rows
    and columns are scaled so that both kinds weigh alike.
    """
    tree = band.tree
    rows = np.zeros((len(tree.drives), band.Z.shape[1]))
    voltage = np.zeros(len(tree.drives), dtype=bool)
    for k, drive in enumerate(tree.drives):
        if drive.out_of < 0:
            voltage[k] = True
            rows[k, tree.current[drive.branch]] = -1.0
        else:
            rows[k, : len(tree.tree)] = tree.paths[drive.into] - tree.paths[drive.out_of]
    H = rows @ band.Z
    if voltage.any() and not voltage.all():
        scale = np.ones(H.shape[:2])
        for kind in (voltage, ~voltage):
            size = np.abs(H[:, kind][:, :, kind]).max(axis=(1, 2))
            scale[:, kind] = np.where(size > 0.0, 1.0 / np.sqrt(np.where(size > 0.0, size, 1.0)), 1.0)[:, None]
        H = H * scale[:, :, None] * scale[:, None, :]
    return H


def reciprocity_and_passivity(H: ComplexArray, voltage: NDArray[np.bool_]) -> tuple[float, float]:
    """Return max |H − H'| / max |H| and min eig (H + Hᴴ)/2 over |H|, worst over frequency; H' is Hᵀ, mixed blocks negated."""
    H = H[np.isfinite(H).all(axis=(1, 2))]
    if not H.size:
        return math.nan, math.nan
    largest = np.abs(H).max(axis=(1, 2))
    H, largest = H[largest > 0.0], largest[largest > 0.0]
    if not H.size:
        return 0.0, 0.0
    sign = np.where(voltage[:, None] == voltage[None, :], 1.0, -1.0)
    gap = np.abs(H - sign * H.transpose(0, 2, 1)).max(axis=(1, 2)) / largest
    hermitian = 0.5 * (H + H.conj().transpose(0, 2, 1))
    lowest = np.linalg.eigvalsh(hermitian)[:, 0] / np.linalg.norm(H, ord=2, axis=(1, 2))
    return float(gap.max()), float(lowest.min())


def gather(topology: Topology, method: str, bands: Sequence[Band], *, drives_alone: bool) -> Evidence:
    """Gather the evidence of solved bands; ``drives_alone`` = each drive was solved for by itself."""
    residual = np.concatenate([band.residual for band in bands])
    condition = np.concatenate([band.condition for band in bands])
    finite = np.isfinite(condition)
    reciprocity, passivity = math.nan, math.nan
    if drives_alone and bands and bands[0].tree.drives and not topology.controls:
        voltage = np.array([drive.out_of < 0 for drive in bands[0].tree.drives])
        pairs = [reciprocity_and_passivity(terminal_matrix(band), voltage) for band in bands]
        reciprocity = max((p[0] for p in pairs if p[0] == p[0]), default=math.nan)
        passivity = min((p[1] for p in pairs if p[1] == p[1]), default=math.nan)
    return Evidence(
        method=method,
        residual=float(residual[finite].max(initial=0.0)),
        condition=float(condition[finite].max(initial=1.0)),
        reciprocity_error=reciprocity,
        passivity_margin=passivity,
    )


def require(evidence: Evidence) -> None:
    """Refuse a response whose evidence is beyond its tolerance.

    Raises
    ------
    AccuracyNotReached : residual, reciprocity or passivity beyond its limit; the evidence goes with it.
    """
    beyond = []
    if not evidence.residual <= tol.RESIDUAL_LIMIT:
        beyond.append(f"residual {evidence.residual:.3g} above {tol.RESIDUAL_LIMIT:g}")
    if evidence.reciprocity_error > tol.RECIPROCITY_LIMIT:
        beyond.append(f"reciprocity_error {evidence.reciprocity_error:.3g} above {tol.RECIPROCITY_LIMIT:g}")
    if evidence.passivity_margin < tol.PASSIVITY_LIMIT:
        beyond.append(f"passivity_margin {evidence.passivity_margin:.3g} below {tol.PASSIVITY_LIMIT:g}")
    if beyond:
        raise AccuracyNotReached(
            f"evidence: {'; '.join(beyond)}; condition {evidence.condition:.3g}; leave out the frequencies next to a "
            "lossless resonance, or give the elements the losses they have",
            evidence=evidence,
        )
