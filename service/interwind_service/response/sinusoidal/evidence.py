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
from interwind_service.response.sinusoidal.solutions import Solution

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


def weigh(H: ComplexArray, voltage: NDArray[np.bool_], noise: FloatArray) -> ComplexArray:
    """Divide the rows and columns of voltage and of current drives by the root of the largest entry of their kind.

    H (f, d, d) is the hybrid matrix of the drives: current into the network per volt, port voltage per ampere. Where no
    entry stands above ``noise`` (f or 1, d), noise takes its place. Over drives of one kind this is H over its largest
    entry, the admittance or the impedance matrix.
    """
    scale = np.ones(H.shape[:2])
    for kind in (voltage, ~voltage):
        if kind.any():
            size = np.abs(H[:, kind][:, :, kind]).max(axis=(1, 2))
            size = np.maximum(size, noise[:, kind].max(axis=1))
            scale[:, kind] = np.sqrt(np.divide(1.0, size, out=np.ones_like(size), where=size > 0.0))[:, None]
    return H * scale[:, :, None] * scale[:, None, :]


def asymmetry(H: ComplexArray, voltage: NDArray[np.bool_]) -> FloatArray:
    """Return max |H − H'| / max(|H|, 1), shape (f,); H' is Hᵀ, negated between voltage and current drives."""
    sign = np.where(voltage[:, None] == voltage[None, :], 1.0, -1.0)
    gap: FloatArray = np.abs(H - sign * H.transpose(0, 2, 1)).max(axis=(1, 2))
    return gap / np.maximum(np.abs(H).max(axis=(1, 2)), 1.0)


def passivity(H: ComplexArray) -> FloatArray:
    """Return the smallest eigenvalue of (H + Hᴴ)/2 over max(‖H‖₂, 1), shape (f,)."""
    if H.shape[1] == 1:
        return H[:, 0, 0].real / np.maximum(np.abs(H[:, 0, 0]), 1.0)
    hermitian = 0.5 * (H + H.conj().transpose(0, 2, 1))
    return np.linalg.eigvalsh(hermitian)[:, 0] / np.maximum(np.linalg.norm(H, ord=2, axis=(1, 2)), 1.0)


@dataclass(frozen=True, slots=True)
class Judgement:
    """The worst figures of one band; NaN where a figure does not apply. ``asymmetries`` (f,), NaN where singular."""

    residual: float
    condition: float
    asymmetries: FloatArray
    passivity: float


def judge(solution: Solution, *, drives_alone: bool) -> Judgement:
    """Judge a solution; ``drives_alone`` = each drive was solved for by itself, so that a terminal matrix exists."""
    solved = ~solution.singular
    asymmetries = np.full(len(solved), math.nan)
    if not (drives_alone and solved.any() and solution.drives) or solution.state.topology.controls:
        return Judgement(solution.residual, solution.condition, asymmetries, math.nan)
    voltage = np.array([drive.out_of < 0 for drive in solution.drives])
    H = weigh(solution.terminal(), voltage, solution.noise)[solved]
    asymmetries[solved] = asymmetry(H, voltage)
    return Judgement(solution.residual, solution.condition, asymmetries, float(passivity(H).min()))


def gather(method: str, judged: Sequence[Judgement]) -> Evidence:
    """Gather the judgements of all bands."""
    gaps = np.concatenate([x.asymmetries[~np.isnan(x.asymmetries)] for x in judged])
    margins = [x.passivity for x in judged if not math.isnan(x.passivity)]
    return Evidence(
        method=method,
        residual=max(x.residual for x in judged),
        condition=max(x.condition for x in judged),
        reciprocity_error=float(gaps.max()) if gaps.size else math.nan,
        passivity_margin=min(margins, default=math.nan),
    )


def beyond_passive(evidence: Evidence) -> list[str]:
    """Say where reciprocity and passivity miss their limits; NaN, where they do not apply, misses none."""
    beyond = []
    if evidence.reciprocity_error > tol.RECIPROCITY_LIMIT:
        beyond.append(f"reciprocity_error {evidence.reciprocity_error:.3g} above {tol.RECIPROCITY_LIMIT:g}")
    if evidence.passivity_margin < tol.PASSIVITY_LIMIT:
        beyond.append(f"passivity_margin {evidence.passivity_margin:.3g} below {tol.PASSIVITY_LIMIT:g}")
    return beyond


def require(evidence: Evidence) -> None:
    """Refuse a response whose evidence is beyond its tolerance.

    Raises
    ------
    AccuracyNotReached : residual, reciprocity or passivity beyond its limit; the evidence goes with it.
    """
    beyond = []
    if not evidence.residual <= tol.RESIDUAL_LIMIT:
        beyond.append(f"residual {evidence.residual:.3g} above {tol.RESIDUAL_LIMIT:g}")
    beyond += beyond_passive(evidence)
    if beyond:
        raise AccuracyNotReached(
            f"evidence: {'; '.join(beyond)}; condition {evidence.condition:.3g}; leave out the frequencies next to a "
            "lossless resonance, or give the elements the losses they have",
            evidence=evidence,
        )
