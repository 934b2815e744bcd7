"""The eigenvalues of the unit-diagonal coupling matrix, and the witness: a current whose stored energy is negative."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from interwind.model.frozen import FloatArray

EPSILON = float(np.finfo(np.float64).eps)


@dataclass(frozen=True, slots=True, eq=False)
class Spectrum:
    """K = V diag(λ) Vᵀ with λ ascending, of a symmetric coupling matrix.

    ``matrix`` (n, n); ``values`` (n,); ``vectors`` (n, n), one column a value; ``rounding`` = n ε λ_max, the bound on
    what the rounding of the entries and of the decomposition can move an eigenvalue (Weyl 1912).
    """

    matrix: FloatArray
    values: FloatArray
    vectors: FloatArray
    rounding: float

    @property
    def negative(self) -> int:
        """Number of eigenvalues below zero by more than rounding."""
        return int(np.count_nonzero(self.values < -self.rounding))

    @property
    def condition(self) -> float:
        """max|λ| / min|λ|, infinite for a singular matrix."""
        size = np.abs(self.values)
        smallest = float(size.min())
        return float(size.max()) / smallest if smallest > self.rounding else np.inf

    @property
    def residual(self) -> float:
        """max|K V − V Λ| / (n max|λ|), the backward error of the decomposition."""
        error = self.matrix @ self.vectors
        error -= self.vectors * self.values
        return float(np.abs(error, out=error).max() / (len(self.values) * np.abs(self.values).max()))


def spectrum(coupling: FloatArray) -> Spectrum:
    """Decompose a symmetric coupling matrix (n, n) without NaN."""
    values, vectors = np.linalg.eigh(coupling)
    return Spectrum(coupling, values, vectors, rounding_bound(values))


def rounding_bound(values: FloatArray) -> float:
    """Return n ε max|λ|: what rounding can move an eigenvalue of an n × n symmetric matrix."""
    return len(values) * EPSILON * float(np.abs(values).max())


def witness(spectrum: Spectrum, self_inductance_h: FloatArray) -> tuple[FloatArray, float]:
    """Return the current of least energy a unit of D-norm, scaled to 1 A, and its energy.

    i = D^(−½) v / ‖D^(−½) v‖ with v the eigenvector of the smallest eigenvalue λ and D = diag L, so that
    ½ iᵀ L i = ½ λ / ‖D^(−½) v‖² (Rayleigh quotient).

    ``self_inductance_h`` has shape (n,), H, all positive.

    Returns
    -------
    current_a : shape (n,), A, Euclidean norm 1, its largest entry positive.
    energy_j : J.
    """
    v = spectrum.vectors[:, 0] / np.sqrt(self_inductance_h)
    norm = float(np.linalg.norm(v))
    current = v / norm
    current = current if current[np.argmax(np.abs(current))] > 0 else -current
    return current, 0.5 * float(spectrum.values[0]) / norm**2
