"""How far the stated band can move the smallest eigenvalue (Weyl 1912)."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from interwind.errors import InvalidRequest
from interwind.model.frozen import FloatArray
from interwind.model.windings import WindingSet
from interwind_service.tolerances import COMPUTABLE_WIDTH, STATED_DEVIATIONS


@dataclass(frozen=True, slots=True, eq=False)
class Band:
    """The half-width of every entry of the coupling matrix, shape (n, n); zero where nothing was stated.

    ``stated`` tells a band of zero from none; ``deviation`` (n, n) is one standard deviation where one was stated
    (NaN for printed digits), in coupling.
    """

    half_width: FloatArray
    deviation: FloatArray
    stated: bool

    @property
    def bound(self) -> float:
        """Largest change of any eigenvalue: |λ(K + Δ) − λ(K)| ≤ ‖Δ‖₂ ≤ ‖H‖₂ for |Δ| ≤ H entry by entry (Perron)."""
        return _spectral_radius(self.half_width)


def stated_band(coils: WindingSet) -> Band:
    """Return the band of the coupling matrix that the owner of the data stated.

    Printed digits: half a unit of the last decimal. Standard deviations: two of them. Couplings stated with a band
    are known to that band whatever the self-inductances are; a band of the inductance matrix is carried over as
    ΔL_ij / sqrt(L_ii L_jj), the diagonal included (Sylvester: the scaling keeps the signs of the eigenvalues).

    Raises
    ------
    InvalidRequest : an uncertainty is negative, infinite or NaN.
    """
    n = coils.size
    off = ~np.eye(n, dtype=bool)
    width = np.zeros((n, n))
    deviation = np.full((n, n), np.nan)
    stated = False
    if coils.coupling_uncertainty is not None:
        u = np.minimum(_spread(coils.coupling_uncertainty, "coupling_uncertainty", n), COMPUTABLE_WIDTH) * off
        width, deviation, stated = np.maximum(width, STATED_DEVIATIONS * u), np.where(off, u, np.nan), True
    if coils.coupling_decimals is not None:
        width, stated = np.maximum(width, 0.5 * 10.0**-coils.coupling_decimals * off), True
    if coils.inductance_uncertainty_h is not None:
        u = _spread(coils.inductance_uncertainty_h, "inductance_uncertainty_h", n)
        if not stated:
            root = np.sqrt(coils.self_inductance_h)
            scale = np.outer(root, root)
            deviation = np.minimum(u, COMPUTABLE_WIDTH * scale) / scale
            width, stated = STATED_DEVIATIONS * deviation, True
    return Band(np.where(np.isnan(coils.coupling), 0.0, width), deviation, stated and bool(np.any(width > 0)))


def _spread(value: FloatArray, field: str, n: int) -> FloatArray:
    bad = ~(np.isfinite(value) & (value >= 0))
    if np.any(bad):
        place = "".join(f"[{k}]" for k in np.argwhere(bad)[0]) if value.ndim else ""
        found = float(value[tuple(np.argwhere(bad)[0])]) if value.ndim else float(value)
        raise InvalidRequest.at(
            field + place, f"{found!r} found; one standard deviation is expected, finite and not negative"
        )
    full = np.broadcast_to(value, (n, n))
    return np.maximum(full, full.T)


def _spectral_radius(width: FloatArray) -> float:
    """‖H‖₂ of a symmetric non-negative matrix; closed form when all off-diagonal entries are equal."""
    n = len(width)
    if n == 1:
        return float(width[0, 0])
    diagonal, off = width.diagonal(), width[0, 1]
    if np.all(diagonal == diagonal[0]) and np.count_nonzero(width == off) >= n * (n - 1):
        pattern = width.copy()
        np.fill_diagonal(pattern, off)
        if np.all(pattern == off):
            return float(diagonal[0] + (n - 1) * off)
    return float(np.linalg.eigvalsh(width)[-1])
