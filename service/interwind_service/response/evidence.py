"""The numbers that vouch for a frequency response, and the refusal of a response they do not vouch for."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import AccuracyNotReached
from interwind.model.finding import Evidence
from interwind_service import tolerances as tol
from interwind_service.response.spectrum import Band

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


def terminal_matrix(band: Band) -> tuple[ComplexArray, NDArray[np.bool_]]:
    """Return the hybrid matrix H (f, d, d) of the drives, and which of them (d,) impose a voltage.

    H holds the current into the network per volt and the port voltage per ampere: over voltage drives alone the
    admittance matrix, over current drives alone the impedance matrix. The rows and columns of each kind are divided by
    the root of its largest entry, or of what stands well above rounding noise where no entry does.
    """
    tree = band.tree
    rows = np.zeros((len(tree.drives), band.Z.shape[1]))
    voltage = np.array([drive.out_of < 0 for drive in tree.drives])
    for k, drive in enumerate(tree.drives):
        if voltage[k]:
            rows[k, tree.current[drive.branch]] = -1.0
        else:
            rows[k, : len(tree.tree)] = tree.paths[drive.into] - tree.paths[drive.out_of]
    H = rows @ band.Z
    scale = np.ones(H.shape[:2])
    noise = tol.NOISE_SHARE * (band.scale @ np.abs(rows).T) * band.largest
    for kind in (voltage, ~voltage):
        if kind.any():
            size = np.abs(H[:, kind][:, :, kind]).max(axis=(1, 2))
            size = np.maximum(size, noise[:, kind].max(axis=1))
            scale[:, kind] = np.sqrt(np.divide(1.0, size, out=np.ones_like(size), where=size > 0.0))[:, None]
    return H * scale[:, :, None] * scale[:, None, :], voltage


def asymmetry(H: ComplexArray, voltage: NDArray[np.bool_]) -> FloatArray:
    """Return max |H − H'| / max(|H|, 1), shape (f,); H' is Hᵀ, negated between voltage and current drives."""
    sign = np.where(voltage[:, None] == voltage[None, :], 1.0, -1.0)
    gap: FloatArray = np.abs(H - sign * H.transpose(0, 2, 1)).max(axis=(1, 2))
    return gap / np.maximum(np.abs(H).max(axis=(1, 2)), 1.0)


def passivity(H: ComplexArray) -> FloatArray:
    """Return the smallest eigenvalue of (H + Hᴴ)/2 over max(‖H‖₂, 1), shape (f,)."""
    hermitian = 0.5 * (H + H.conj().transpose(0, 2, 1))
    return np.linalg.eigvalsh(hermitian)[:, 0] / np.maximum(np.linalg.norm(H, ord=2, axis=(1, 2)), 1.0)


@dataclass(frozen=True, slots=True)
class Judgement:
    """The worst figures of one band; NaN where a figure does not apply."""

    residual: float
    condition: float
    asymmetry: float
    passivity: float


def judge(band: Band, *, drives_alone: bool) -> Judgement:
    """Judge a solved band; ``drives_alone`` = each drive was solved for by itself, so that a terminal matrix exists."""
    solved = np.isfinite(band.condition)
    residual = float(band.residual[solved].max(initial=0.0))
    condition = float(band.condition[solved].max(initial=1.0))
    if not (drives_alone and solved.any() and band.tree.drives) or band.tree.topology.controls:
        return Judgement(residual, condition, math.nan, math.nan)
    H, voltage = terminal_matrix(band)
    H = H[solved]
    return Judgement(residual, condition, float(asymmetry(H, voltage).max()), float(passivity(H).min()))


def gather(method: str, judged: Sequence[Judgement]) -> Evidence:
    """Gather the judgements of all bands."""
    gaps = [x.asymmetry for x in judged if not math.isnan(x.asymmetry)]
    margins = [x.passivity for x in judged if not math.isnan(x.passivity)]
    return Evidence(
        method=method,
        residual=max(x.residual for x in judged),
        condition=max(x.condition for x in judged),
        reciprocity_error=max(gaps, default=math.nan),
        passivity_margin=min(margins, default=math.nan),
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
