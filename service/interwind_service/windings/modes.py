"""Modes of a set: eigen-inductances of L, and the time constants with which currents decay in shorted windings.

L v = λ v          L v = τ R v
"""

from __future__ import annotations

import numpy as np
from scipy.linalg import eigh

from interwind.model.characterization import Modes
from interwind.model.frozen import FloatArray


def modes_of(inductance_h: FloatArray, resistance_ohm: FloatArray) -> Modes:
    """Return the modes of L (n, n), H, with R (n, n), ohm; the time constants are NaN where R is not definite."""
    n = len(inductance_h)
    values, currents = np.linalg.eigh(inductance_h)
    # With L v = λ v the share v_w (L v)_w / vᵀ L v is v_w²: no eigenvalue of rounding size is divided by.
    share = np.where(values > 0, currents**2, np.nan)
    tau, decay = np.full(n, np.nan), np.full((n, n), np.nan)
    if _definite(resistance_ohm):
        tau, decay = eigh(inductance_h, resistance_ohm)
        decay = decay / np.linalg.norm(decay, axis=0)
    return Modes(values, currents, share, tau, decay)


def _definite(matrix: FloatArray) -> bool:
    if not np.all(matrix.diagonal() > 0):
        return False
    try:
        np.linalg.cholesky(matrix)
    except np.linalg.LinAlgError:
        return False
    return True
