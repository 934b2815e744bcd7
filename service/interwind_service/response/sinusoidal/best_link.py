"""The best link between transmitters and receivers: most efficiency, and the drives and loads that give it.

With Z the impedance matrix of the ports concerned, all others open, and i their currents, the receivers give off
iᴴ A i, A = −(E Z + Zᴴ E)/2, E picking their rows, while iᴴ Q i, Q = (Z + Zᴴ)/2, is lost. The best currents are the
eigenvector of the largest ρ of A i = ρ Q i, and η = ρ/(1 + ρ). For one transmitter and one receiver ρ solves
ρ (1 + ρ) = (kQ)²/4, so that η = x/(1 + √(1 + x))², x = (kQ)².

References: Kurs et al. 2007 (the pair); Parlett 1980, chapter 15 (the pencil of two Hermitian matrices).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class BestLink:
    """``efficiency`` (F,); ``load_ohm`` (F, receivers); ``drive`` (F, transmitters), norm 1, the first one real."""

    efficiency: FloatArray
    load_ohm: ComplexArray
    drive: ComplexArray


def best_link(impedance_ohm: ComplexArray, transmitters: list[int], receivers: list[int]) -> BestLink:
    """Find the best link at every frequency; NaN where Z does not exist or loses nothing for some current.

    Parameters
    ----------
    impedance_ohm : shape (F, P, P)
    transmitters, receivers : positions of ports, all different.
    """
    chosen = [*transmitters, *receivers]
    sending = len(transmitters)
    Z = impedance_ohm[:, chosen][:, :, chosen]
    found = BestLink(
        np.full(len(Z), np.nan),
        np.full((len(Z), len(receivers)), np.nan, dtype=np.complex128),
        np.full((len(Z), sending), np.nan, dtype=np.complex128),
    )
    loss = 0.5 * (Z + Z.conj().transpose(0, 2, 1))
    sound = np.flatnonzero(np.isfinite(Z).all(axis=(1, 2)))
    scale = np.sqrt(np.abs(np.einsum("fii->fi", Z[sound])))
    scale[scale == 0.0] = 1.0
    least = np.linalg.eigvalsh(loss[sound] / scale[:, :, None] / scale[:, None, :])[:, 0]
    sound = sound[least > tol.LINK_LOSS_FLOOR]
    if not sound.size:
        return found
    Z, loss = Z[sound], loss[sound]
    taken = Z.copy()
    taken[:, :sending] = 0.0
    given = -0.5 * (taken + taken.conj().transpose(0, 2, 1))
    inverse = np.linalg.inv(np.linalg.cholesky(loss))
    rho, vectors = np.linalg.eigh(inverse @ given @ inverse.conj().transpose(0, 2, 1))
    best = rho[:, -1]
    current = (inverse.conj().transpose(0, 2, 1) @ vectors[:, :, -1:])[:, :, 0]
    voltage = (Z @ current[:, :, None])[:, :, 0]
    linked = best > tol.LINK_COUPLING_FLOOR
    found.efficiency[sound] = np.where(linked, best / (1.0 + best), 0.0)
    some = sound[linked]
    found.load_ohm[some] = (-voltage[:, sending:] / current[:, sending:])[linked]
    drive = current[linked, :sending]
    first = drive[:, :1]
    phase = np.where(np.abs(first) > 0.0, np.abs(first), 1.0) / np.where(np.abs(first) > 0.0, first, 1.0)
    found.drive[some] = drive * phase / np.linalg.norm(drive, axis=1, keepdims=True)
    return found
