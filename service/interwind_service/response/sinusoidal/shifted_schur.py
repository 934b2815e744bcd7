"""One Schur form, any number of shifts: (I + σ K) x = r for every σ by back-substitution alone.

With K = U T Uᴴ, T upper triangular, each x = U t solves (I + σ T) t = Uᴴ r. All shifts go through the rows of T
together: the products with T are matrix products over blocks of rows, so BLAS does the work.

Reference: Laub 1981 (one Hessenberg form for many frequencies); here the Schur form, whose back-substitution blocks.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.linalg as sl
from numpy.typing import NDArray

from interwind_service import tolerances as tol

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class ShiftedSchur:
    """K = U T Uᴴ, shapes (n, n): U unitary, T upper triangular."""

    T: ComplexArray
    U: ComplexArray

    def solve(self, r: ComplexArray, shift: ComplexArray) -> ComplexArray:
        """Return t (n, f, m) with (I + σ T) t = Uᴴ r for every σ of ``shift`` (f,), r being (n, m) or (n, f, m)."""
        n, f, m = len(self.T), len(shift), r.shape[-1]
        columns = m if r.ndim == 2 else f * m
        right = (self.U.conj().T @ r.reshape(n, columns)).reshape(n, columns // m if m else f, m)
        sigma, reciprocal = shift[:, None], self._reciprocal(shift)[:, :, None]
        t = np.empty((n, f * m), dtype=np.complex128)
        for stop in range(n, 0, -tol.SCHUR_BLOCK):
            start = max(0, stop - tol.SCHUR_BLOCK)
            beyond = self.T[start:stop, stop:] @ t[stop:]
            for row in range(stop - 1, start - 1, -1):
                known = beyond[row - start]
                known += self.T[row, row + 1 : stop] @ t[row + 1 : stop]
                known = known.reshape(f, m)
                known *= sigma
                np.subtract(right[row], known, out=known)
                np.multiply(known, reciprocal[row], out=t[row].reshape(f, m))
        return t.reshape(n, f, m)

    def _reciprocal(self, shift: ComplexArray) -> ComplexArray:
        """1 / (1 + σ μ), (n, f), by conjugates: a complex division costs three times as much."""
        denominator = self.T.diagonal()[:, None] * shift
        denominator += 1.0
        weight = np.abs(denominator)
        weight *= weight
        np.divide(1.0, weight, out=weight)
        np.conjugate(denominator, out=denominator)
        denominator *= weight
        return denominator

    def near(self, shift: ComplexArray, distance: float) -> NDArray[np.bool_]:
        """Return where |1 + σ μ| < distance (1 + |σ μ|) for an eigenvalue μ of K, (f,): I + σ K is nearly singular.

        |1 + σ μ| = |μ* + |μ|² σ| / |μ| is at least the real part of that, so that few μ need a look at every σ.
        """
        poles = self.T.diagonal()
        size = np.abs(poles)
        inward = poles.real[:, None] + (size**2)[:, None] * np.array([shift.real.min(), shift.real.max()])
        least = np.where(inward[:, 0] * inward[:, 1] > 0.0, np.abs(inward).min(axis=1), 0.0)
        poles = poles[least < distance * (1.0 + size * np.abs(shift).max()) * size]
        apart = np.abs(1.0 + poles[:, None] * shift)
        apart /= 1.0 + np.abs(poles)[:, None] * np.abs(shift)
        return (apart < distance).any(axis=0)


def shifted_schur(K: FloatArray) -> ShiftedSchur:
    """Return the complex Schur form of a real matrix, by way of the real one, which costs a third."""
    T, U = sl.schur(K, output="real", check_finite=False)
    return ShiftedSchur(*_complex_form(T, U))


def _complex_form(T: FloatArray, U: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Turn the 2 x 2 blocks of a real Schur form, LAPACK's [[a, b], [c, a]] with b c < 0, into triangles, all at once.

    The eigenvector of a + jw, w = sqrt(−b c), is (b, jw); the unitary [[b, jw], [jw, b]] / |(b, w)| makes it the first.
    """
    first = np.flatnonzero(T.diagonal(-1) != 0.0)
    T_c, U_c = T.astype(np.complex128), U.astype(np.complex128)
    if not first.size:
        return T_c, U_c
    second = first + 1
    b, c = T[first, second], T[second, first]
    w = np.sqrt(-b * c)
    size = np.hypot(b, w)
    p, q = b / size, 1j * w / size
    for matrix in (T_c, U_c):
        left, right = matrix[:, first].copy(), matrix[:, second].copy()
        matrix[:, first], matrix[:, second] = left * p + right * q, left * q + right * p
    up, down = T_c[first].copy(), T_c[second].copy()
    T_c[first] = p[:, None] * up + q.conj()[:, None] * down
    T_c[second] = q.conj()[:, None] * up + p[:, None] * down
    T_c[second, first] = 0.0
    return np.ascontiguousarray(T_c), np.ascontiguousarray(U_c)
