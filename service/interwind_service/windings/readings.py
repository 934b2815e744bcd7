"""What every kind of reading would show on a given inductance matrix, and how that changes with the matrix.

Each reading is a smooth function y(L). Its derivative is written as a symmetric matrix S with dy = tr(S dL): with u the
currents that the reading drives, an inductance uᵀ L u has S = u uᵀ, and so has a Schur complement, whose u minimises
it.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from interwind.model.frozen import FloatArray
from interwind.model.readings import (
    EffectiveLeakage,
    InverseInductance,
    MutualInductance,
    OpenInductance,
    PairLeakage,
    Reading,
    SeriesInductance,
    ShortedInductance,
    VoltageRatio,
)
from interwind_service.windings.pattern import solve_semidefinite


def windings_of(reading: Reading) -> tuple[str, ...]:
    """Return the labels a reading concerns, the driven one first."""
    match reading:
        case OpenInductance():
            return (reading.winding,)
        case ShortedInductance():
            return (reading.winding, *reading.shorted)
        case VoltageRatio():
            return (reading.driven, reading.measured)
        case _:
            return tuple(dict.fromkeys(reading.windings))


def stated_value(reading: Reading) -> tuple[float, float]:
    """Return the number that was read and its standard deviation, in the unit of its kind."""
    match reading:
        case VoltageRatio():
            return reading.ratio, reading.uncertainty
        case InverseInductance():
            return reading.inverse_inductance_per_h, reading.uncertainty_per_h
        case _:
            return reading.inductance_h, reading.uncertainty_h


def predicted(reading: Reading, L: FloatArray, labels: Sequence[str]) -> tuple[float, FloatArray]:
    """Return the value y that ``reading`` shows on L (n, n), H, and S (n, n) with dy = tr(S dL)."""
    at = [labels.index(label) for label in windings_of(reading)]
    match reading:
        case OpenInductance():
            return _quadratic(L, _unit(len(L), at[0]))
        case ShortedInductance():
            return _shorted(L, at[0], at[1:], relative_resistance(reading))
        case SeriesInductance():
            u = np.zeros(len(L))
            u[at] = reading.senses
            return _quadratic(L, u)
        case PairLeakage():
            return _quadratic(L, _unit(len(L), at[0]) - reading.turns[0] / reading.turns[1] * _unit(len(L), at[1]))
        case MutualInductance():
            return float(L[at[0], at[1]]), _between(len(L), at[0], at[1])
        case VoltageRatio():
            driven, measured = at
            ratio = float(L[driven, measured] / L[driven, driven])
            S = _between(len(L), driven, measured) - ratio * _between(len(L), driven, driven)
            return ratio, S / L[driven, driven]
        case InverseInductance():
            return _inverse(L, at[0], at[-1])
        case EffectiveLeakage():
            return _effective(L, labels.index(reading.reference), at[0], at[1])


def relative_resistance(reading: ShortedInductance) -> FloatArray:
    """Return R / ω of the shorted windings (s,), H, at the frequency of the reading; 0 where no context is stated."""
    count = len(reading.shorted)
    if reading.context is None:
        return np.zeros(count)
    resistance = np.broadcast_to(np.array(reading.context.shorted_resistance_ohm), (count,))
    return resistance / (2.0 * np.pi * reading.context.frequency_hz)


def _shorted(L: FloatArray, driven: int, shorted: list[int], resistance_h: FloatArray) -> tuple[float, FloatArray]:
    """Real part of L_dd − L_ds (L_ss + R / jω)⁻¹ L_sd: what is left when the shorted windings carry their currents."""
    lossy = bool(resistance_h.any())
    u = _unit(len(L), driven).astype(complex if lossy else float)
    inner = L[shorted][:, shorted]
    if lossy:
        inner = inner - 1j * np.diag(resistance_h)
    try:
        u[shorted] = -np.linalg.solve(inner, L[shorted, driven])
    except np.linalg.LinAlgError:
        u[shorted] = -solve_semidefinite(L[shorted][:, shorted], L[shorted, driven])
    return float((L[driven] @ u).real), np.outer(u, u).real


def _effective(L: FloatArray, reference: int, i: int, j: int) -> tuple[float, FloatArray]:
    """ℓ = −1 / (n_i n_j Γ_ij), n_i = L_ri / L_rr: dℓ / ℓ = −dn_i / n_i − dn_j / n_j − dΓ_ij / Γ_ij."""
    n = len(L)
    gamma, S_gamma = _inverse(L, i, j)
    own = L[reference, reference]
    value = -(own**2) / (L[reference, i] * L[reference, j] * gamma)
    S = 2.0 * _between(n, reference, reference) / own - S_gamma / gamma
    for winding in (i, j):
        S = S - _between(n, reference, winding) / L[reference, winding]
    return float(value), value * S


def _inverse(L: FloatArray, i: int, j: int) -> tuple[float, FloatArray]:
    """Γ_ij of Γ = L⁻¹: dΓ = −Γ dL Γ."""
    scale = 1.0 / np.sqrt(L.diagonal())
    gamma = np.linalg.inv(L * np.outer(scale, scale)) * np.outer(scale, scale)
    S = np.outer(gamma[i], gamma[j])
    return float(gamma[i, j]), -0.5 * (S + S.T)


def _quadratic(L: FloatArray, u: FloatArray) -> tuple[float, FloatArray]:
    return float(u @ L @ u), np.outer(u, u)


def _unit(n: int, place: int) -> FloatArray:
    u = np.zeros(n)
    u[place] = 1.0
    return u


def _between(n: int, i: int, j: int) -> FloatArray:
    """S of the entry L_ij itself."""
    S = np.zeros((n, n))
    S[i, j] += 0.5
    S[j, i] += 0.5
    return S
