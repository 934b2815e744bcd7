"""Random sets of windings around a nominal one, drawn so that every one of them can exist.

Independent errors on each coupling leave the set of possible matrices almost surely when the coupling is tight. The
entries of a Cholesky factor, and the partial couplings, are free of each other: any values in their range make a set
that can exist.

References: Lewandowski, Kurowicka & Joe 2009 (partial correlations generate all correlation matrices); Pinheiro & Bates
1996 (parametrisation by the Cholesky factor).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidWindings
from interwind.model.vary import SampleParameter, SampleWindings
from interwind.model.windings import WindingSet

FloatArray = NDArray[np.float64]


def sample_windings(windings: WindingSet, sample: SampleWindings) -> FloatArray:
    """Draw sets of windings.

    K = F Fᵀ, F lower triangular with rows of length 1. LEAKAGE: with r_ji² = Σ_{m ≥ i} F_jm² the partial leakage of the
    pair is λ_ji = r_j,i+1² / r_ji², and λ' = λ / (λ + (1 − λ) e^(−spread ξ)). FACTOR: F'_ji = F_ji (1 + spread ξ), rows
    scaled back to length 1.

    Parameters
    ----------
    windings : the nominal set, every pair known.
    sample : what is drawn, how many, how far, and the seed.

    Returns
    -------
    shape (count, n, n), H.

    Raises
    ------
    InvalidWindings : the nominal set cannot exist, or a pair is not known.
    """
    nominal = windings.coupling
    if not (np.all(np.isfinite(windings.inductance_h)) and np.all(windings.self_inductance_h > 0.0)):
        raise InvalidWindings.at("windings", "a pair is not known, or a self-inductance is not above 0; fill it first")
    try:
        factor = np.linalg.cholesky(0.5 * (nominal + nominal.T))
    except np.linalg.LinAlgError as error:
        smallest = float(np.linalg.eigvalsh(nominal)[0])
        raise InvalidWindings.at(
            "windings",
            f"the nominal coupling matrix has the eigenvalue {smallest:.6g}, none at or below 0 may; mend it by repair",
            eigenvalue=smallest,
        ) from error
    generator = np.random.Generator(np.random.Philox(sample.seed))
    n = windings.size
    drawn = generator.standard_normal((sample.count, n, n))
    self_drawn = generator.standard_normal((sample.count, n))
    if sample.parameter is SampleParameter.LEAKAGE:
        factors = _by_leakage(factor, sample.spread * drawn)
    else:
        factors = factor * (1.0 + sample.spread * drawn)
        factors /= np.sqrt((factors**2).sum(axis=2, keepdims=True))
    coupling = factors @ factors.transpose(0, 2, 1)
    root = np.sqrt(windings.self_inductance_h) * np.exp(0.5 * sample.self_spread * self_drawn)
    inductance_h = coupling * root[:, :, None] * root[:, None, :]
    inductance_h = 0.5 * (inductance_h + inductance_h.transpose(0, 2, 1))
    inductance_h[:, np.arange(n), np.arange(n)] = root**2
    return inductance_h


def _by_leakage(factor: FloatArray, shift: FloatArray) -> FloatArray:
    n = len(factor)
    rest = np.cumsum((factor**2)[:, ::-1], axis=1)[:, ::-1]  # r_ji², sums of squares: nothing cancels
    factors = np.zeros_like(shift)
    for j in range(n):
        left = np.ones(len(shift))  # what is left of the row's length, squared
        for i in range(j):
            leakage = rest[j, i + 1] / rest[j, i]
            odds = (1.0 - leakage) * np.exp(-shift[:, j, i])
            drawn = leakage / (leakage + odds)
            factors[:, j, i] = np.sign(factor[j, i]) * np.sqrt(left * odds / (leakage + odds))
            left = left * drawn
        factors[:, j, j] = np.sqrt(left)
    return factors
