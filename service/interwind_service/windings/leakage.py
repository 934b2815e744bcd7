"""Leakage inductance: what stays of an inductance when other windings are short-circuited.

    pair, others open     ℓ_ij = L_ii − L_ij² / L_jj = L_ii (1 − k_ij²)      i driven, j shorted
    all others shorted    ℓ_i  = L_ii − L_iS L_SS⁻¹ L_Si = 1 / (L⁻¹)_ii

Both are Schur complements of L, so an error of an entry is magnified 1 / (1 − k²). One standard deviation follows to
first order (JCGM 100, section 5.1), the stated entries taken as independent.
"""

from __future__ import annotations

import numpy as np

from interwind.model.frozen import FloatArray
from interwind.model.windings import WindingSet
from interwind_service.windings.margin import stated_band
from interwind_service.windings.spectrum import Spectrum


def pair_leakage(coils: WindingSet) -> FloatArray:
    """Return ℓ (n, n), H: row driven, column shorted, the others open; 0 on the diagonal, NaN for an unknown pair."""
    k = coils.coupling
    leakage = coils.self_inductance_h[:, None] * ((1.0 - k) * (1.0 + k))
    np.fill_diagonal(leakage, 0.0)
    return leakage


def all_shorted_leakage(coils: WindingSet, spectrum: Spectrum) -> FloatArray:
    """Return ℓ (n,), H: each winding driven, all others shorted; NaN throughout for a set that cannot exist.

    1 / (K⁻¹)_ii = 1 / Σ v_im² / λ_m; a winding that takes part in a perfectly coupled mode has none.
    """
    if spectrum.values[0] < -spectrum.rounding:
        return np.full(coils.size, np.nan)
    perfect = spectrum.values <= spectrum.rounding
    share = spectrum.vectors**2
    with np.errstate(divide="ignore"):
        inverse = np.where(perfect, np.where(share > spectrum.rounding, np.inf, 0.0), share / spectrum.values)
    return coils.self_inductance_h / inverse.sum(axis=1)


def coupling_deviation(coils: WindingSet) -> FloatArray | None:
    """Return one standard deviation of every coupling (n, n), or None where none was stated.

    Printed digits count as a uniform distribution, half-width / √3 (JCGM 100, section 4.3.7).
    """
    band = stated_band(coils)
    if not band.stated:
        return None
    return np.where(np.isnan(band.deviation), band.half_width / np.sqrt(3.0), band.deviation)


def leakage_deviation(coils: WindingSet, leakage_h: FloatArray) -> FloatArray:
    """Return one standard deviation of the pair leakages (n, n), H; NaN where no uncertainty was stated.

    dℓ = uᵀ dL u with u_i = 1, u_j = −L_ij / L_jj the currents for 1 A in the driven winding i.
    """
    entries, own = _stated(coils)
    k_squared = coils.coupling**2
    e2 = entries**2
    variance = e2.diagonal()[:, None] + 4.0 * k_squared * e2 + k_squared**2 * e2.diagonal()[None, :]
    result = np.hypot(coils.self_inductance_h[:, None] * np.sqrt(variance), leakage_h * own[:, None])
    np.fill_diagonal(result, 0.0)
    return result


def all_shorted_deviation(coils: WindingSet, leakage_h: FloatArray, inverse: FloatArray) -> FloatArray:
    """Return one standard deviation of the all-shorted leakages (n,), H; NaN where no uncertainty was stated.

    dℓ_i = uᵀ dL u with u the currents for 1 A in winding i, the others shorted. ``inverse``: shape (n, n), K⁻¹.
    """
    entries, own = _stated(coils)
    squares = (inverse / inverse.diagonal()) ** 2
    e2 = entries**2
    # Off the diagonal dL_ab = dL_ba counts twice: (2 u_a u_b σ_ab)² once a pair = 2 u_a² u_b² σ_ab² once an entry.
    off = e2 - np.diag(e2.diagonal())
    variance = 2.0 * np.einsum("ai,ai->i", squares, off @ squares) + e2.diagonal() @ squares**2
    return np.hypot(coils.self_inductance_h * np.sqrt(variance), leakage_h * own)


def _stated(coils: WindingSet) -> tuple[FloatArray, FloatArray]:
    """One standard deviation of L_ij / sqrt(L_ii L_jj) (n, n), and of ln L_ii (n,) where k was stated apart from it."""
    n = coils.size
    entries = coupling_deviation(coils)
    if entries is None:
        return np.full((n, n), np.nan), np.zeros(n)
    if coils.coupling_uncertainty is None and coils.coupling_decimals is None:
        return entries, np.zeros(n)
    entries = np.where(np.eye(n, dtype=bool), 0.0, entries)
    if coils.inductance_uncertainty_h is None:
        return entries, np.zeros(n)
    return entries, np.broadcast_to(coils.inductance_uncertainty_h, (n, n)).diagonal() / coils.self_inductance_h
