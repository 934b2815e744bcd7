"""The feasible interval of every pair: which values of one coupling, all others held, keep the matrix semidefinite.

With C the other windings, the interval of pair (i, j) is a_iᵀ K_CC⁻¹ a_j ± sqrt(s_i s_j), s the Schur complements. It
is not empty exactly when K without winding i and K without winding j are both semidefinite, the pattern with one
missing pair being chordal (Grone, Johnson, Sá & Wolkowicz 1984). All pairs follow from one inverse: with P = K⁻¹ and
σ = sqrt(P_ii P_jj) the ends are K_ij − 1/(P_ij + σ) and K_ij − 1/(P_ij − σ), both for a definite K and for one with a
single negative eigenvalue; there P_ii ≤ 0 says that K without winding i is semidefinite (inertia of the Schur
complement). Two negative eigenvalues cannot be lifted by one pair (Cauchy interlacing).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind.model.frozen import FloatArray
from interwind_service.tolerances import PARALLEL_SINE_SQUARED
from interwind_service.windings.spectrum import Spectrum


def feasible_intervals(spectrum: Spectrum) -> tuple[FloatArray, FloatArray]:
    """Return the lowest and the highest feasible value of every coupling, the others held.

    Returns
    -------
    low, high : shape (n, n), symmetric, 1 on the diagonal, NaN where no value makes the matrix semidefinite.
    """
    n = len(spectrum.values)
    if spectrum.negative > 1:
        low, high = np.full((n, n), np.nan), np.full((n, n), np.nan)
    else:
        null = np.abs(spectrum.values) <= spectrum.rounding
        P, determinant = _inverse(spectrum, ~null)
        low, high = _ends(spectrum, P, determinant)
        if np.any(null):
            _respect_null_space(spectrum, null, P, low, high)
    for end in (low, high):
        np.clip(end, -1.0, 1.0, out=end)
        np.fill_diagonal(end, 1.0)
    return low, high


def cured_without(spectrum: Spectrum) -> NDArray[np.bool_]:
    """Tell for every winding, shape (n,), whether the others alone are semidefinite.

    P_ii = Σ v_i² / λ over the eigenvalues that are not zero has the sign of det K without winding i over det K; with
    one negative eigenvalue the rest is semidefinite when P_ii ≤ 0, to within what rounding does to it, ε ‖P e_i‖².
    """
    if spectrum.negative != 1:
        return np.full(len(spectrum.values), spectrum.negative == 0)
    kept = np.abs(spectrum.values) > spectrum.rounding
    shares = spectrum.vectors[:, kept] ** 2
    own, square = shares @ (1.0 / spectrum.values[kept]), shares @ spectrum.values[kept] ** -2.0
    return np.asarray(own <= spectrum.rounding * square)


def _inverse(spectrum: Spectrum, kept: NDArray[np.bool_]) -> tuple[FloatArray, FloatArray]:
    """Return P, the inverse on the eigenvectors kept, and Δ_ij = P_ii P_jj − P_ij², both (n, n).

    The smallest eigenvalue stands apart, P = g gᵀ / λ + A, so that Δ holds 1/λ once and nothing of its size cancels.
    """
    places = np.flatnonzero(kept)
    soft = places[np.argmin(np.abs(spectrum.values[places]))]
    rest = places[places != soft]
    g, V = spectrum.vectors[:, soft], spectrum.vectors[:, rest]
    A = (V / spectrum.values[rest]) @ V.T
    A = 0.5 * (A + A.T)
    a = A.diagonal().copy()
    gg = np.outer(g, g)
    cross = np.outer(g * g, a)
    determinant = cross + cross.T
    determinant -= 2.0 * gg * A
    determinant /= spectrum.values[soft]
    determinant += np.outer(a, a) - A * A
    gg /= spectrum.values[soft]
    gg += A
    return gg, determinant


def _ends(spectrum: Spectrum, P: FloatArray, determinant: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Ends K − 1/(P ± σ); the one of the two sums that cancels is taken from their product, −Δ."""
    own = P.diagonal().copy()
    stuck = ~cured_without(spectrum)
    if spectrum.negative:
        own[np.abs(own) <= spectrum.rounding * np.einsum("ij,ij->j", P, P)] = 0.0
    root = np.sqrt(np.abs(own))
    sign = np.where(P >= 0, 1.0, -1.0)
    far = np.abs(P)
    far += np.outer(root, root)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        near = far / np.abs(determinant)
        far = np.divide(sign, far, out=far)
    near *= -sign if spectrum.negative else sign
    one, other = spectrum.matrix - far, spectrum.matrix + near
    low, high = np.minimum(one, other), np.maximum(one, other)
    for end in (low, high):
        end[stuck, :] = np.nan
        end[:, stuck] = np.nan
    return low, high


def _respect_null_space(
    spectrum: Spectrum, null: NDArray[np.bool_], P: FloatArray, low: FloatArray, high: FloatArray
) -> None:
    """Narrow the ends, in place, to the moves that the null vectors of a singular matrix allow.

    With z_i the rows of a basis of the null space: rows that are both zero allow what P allows; parallel rows,
    z_j = ± c z_i, allow moves of the sign ± up to 2 / (c P_ii + P_jj / c ∓ 2 P_ij); all others allow none. A matrix
    with a negative eigenvalue as well is cured only where both rows are zero.
    """
    Z = spectrum.vectors[:, null]
    gap = float(np.abs(spectrum.values[~null]).min())
    length = np.linalg.norm(Z, axis=1)
    touched = length > spectrum.rounding / gap
    length = np.where(touched, length, 0.0)
    fixed = touched[:, None] | touched[None, :]
    if spectrum.negative:
        low[fixed] = high[fixed] = np.nan
        return
    low[fixed] = high[fixed] = spectrum.matrix[fixed]
    G = Z @ Z.T
    i, j = np.nonzero(
        np.outer(touched, touched) & (np.outer(length, length) ** 2 * (1 - PARALLEL_SINE_SQUARED) < G * G)
    )
    c, sign = length[j] / length[i], np.sign(G[i, j])
    with np.errstate(divide="ignore"):
        reach = 2.0 / np.maximum(c * P[i, i] + P[j, j] / c - 2.0 * sign * P[i, j], 0.0)
    low[i, j] = np.where(sign < 0, spectrum.matrix[i, j] - reach, spectrum.matrix[i, j])
    high[i, j] = np.where(sign > 0, spectrum.matrix[i, j] + reach, spectrum.matrix[i, j])
