"""A first matrix from readings, one reading at a time, for the fit to start from.

Every winding gets a self-inductance, every pair the mutual inductance that its most telling reading implies; pairs that
no reading speaks of are completed, and the whole is drawn toward no coupling until it is definite. Short-circuit
readings know the size of a coupling and not its sign: signs travel along the readings that do know them, and where none
does, starts are taken for the dotted ends.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from interwind.errors import InvalidRequest
from interwind.model.frozen import FloatArray
from interwind.model.readings import (
    EffectiveLeakage,
    InverseInductance,
    MutualInductance,
    OpenInductance,
    PairLeakage,
    SeriesInductance,
    ShortedInductance,
    VoltageRatio,
)
from interwind_service.tolerances import FIRST_COUPLING, FIRST_COUPLING_LARGEST, FIRST_MARGIN, INVERSE_MARGIN
from interwind_service.windings.completion import largest_determinant
from interwind_service.windings.intake import Taken
from interwind_service.windings.pattern import solve_semidefinite
from interwind_service.windings.readings import windings_of


def first_guess(used: Sequence[Taken], labels: Sequence[str]) -> tuple[FloatArray, list[tuple[str, ...]]]:
    """Return a positive definite matrix (n, n), H, and the groups of windings whose polarity no reading links."""
    inverse = _from_inverse(used, labels)
    if inverse is not None:
        return inverse, [tuple(labels)]
    own = _self_inductances(used, labels)
    size, sign = _couplings(used, labels, own)
    groups, K = _with_signs(size, sign)
    root = np.sqrt(own)
    L = _from_effective(used, labels)
    if L is None:
        L = _definite(K) * np.outer(root, root)
    return L, [tuple(labels[k] for k in group) for group in groups]


def _self_inductances(used: Sequence[Taken], labels: Sequence[str]) -> FloatArray:
    """Open readings where there are any; then ratios, shorts from both sides, turns, and series readings."""
    own = np.full(len(labels), np.nan)
    for one in used:
        if isinstance(one.reading, OpenInductance):
            own[labels.index(one.reading.winding)] = one.value
    ratio = {
        windings_of(one.reading): one.value for one in used if isinstance(one.reading, VoltageRatio) and one.value != 0
    }
    short = {windings_of(one.reading): one.value for one in used if isinstance(one.reading, ShortedInductance)}
    known = -1
    while known != np.count_nonzero(~np.isnan(own)):
        known = np.count_nonzero(~np.isnan(own))
        for (a, b), value in ratio.items():
            i, j = labels.index(a), labels.index(b)
            back = ratio.get((b, a))
            scale = value**2 if back is None else abs(value / back)
            _spread(own, i, j, scale)
        for key, value in short.items():
            back = short.get(key[::-1])
            if len(key) == 2 and back is not None:
                _spread(own, labels.index(key[0]), labels.index(key[1]), back / value)
        for one in used:
            if isinstance(one.reading, PairLeakage):
                i, j = (labels.index(label) for label in one.reading.windings)
                _spread(own, i, j, (one.reading.turns[1] / one.reading.turns[0]) ** 2)
    for one in used:
        for label in windings_of(one.reading):
            k = labels.index(label)
            if np.isnan(own[k]) and isinstance(one.reading, SeriesInductance | ShortedInductance):
                own[k] = one.value
    known_ones = own[~np.isnan(own)]
    return np.where(np.isnan(own), known_ones.mean() if len(known_ones) else 1.0, own)


def _spread(own: FloatArray, i: int, j: int, scale: float) -> None:
    """Fill in place L_jj = scale · L_ii, or the other way round."""
    if np.isnan(own[j]):
        own[j] = own[i] * scale
    elif np.isnan(own[i]):
        own[i] = own[j] / scale


def _couplings(used: Sequence[Taken], labels: Sequence[str], own: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the size of each coupling (n, n) by its sharpest reading, NaN for none, and its sign (n, n), 0 unread."""
    n = len(labels)
    size, spread, sign = np.full((n, n), np.nan), np.full((n, n), np.inf), np.zeros((n, n))
    for one in used:
        at = [labels.index(label) for label in windings_of(one.reading)]
        if len(at) != 2:
            continue
        i, j = at
        implied = _implied(one, float(own[i]), float(own[j]))
        if implied is None:
            continue
        k, deviation = implied
        if not isinstance(one.reading, ShortedInductance):
            sign[i, j] = sign[j, i] = np.sign(k)
        if deviation < spread[i, j]:
            size[i, j] = size[j, i] = min(abs(k), FIRST_COUPLING_LARGEST)
            spread[i, j] = spread[j, i] = deviation
    return size, sign


def _implied(one: Taken, first: float, second: float) -> tuple[float, float] | None:
    """Return the coupling that one reading of a pair implies, and its deviation, given both self-inductances."""
    root = float(np.sqrt(first * second))
    match one.reading:
        case ShortedInductance():
            return float(np.sqrt(max(1.0 - one.value / first, 0.0))), one.uncertainty / first
        case SeriesInductance():
            a, b = one.reading.senses
            return (one.value - first - second) / (2.0 * a * b * root), one.uncertainty / root
        case MutualInductance():
            return one.value / root, one.uncertainty / root
        case VoltageRatio():
            return one.value * first / root, one.uncertainty * first / root
        case PairLeakage():
            r = one.reading.turns[0] / one.reading.turns[1]
            return (first + r * r * second - one.value) / (2.0 * r * root), one.uncertainty / (abs(r) * root)
        case _:
            return None


def _with_signs(size: FloatArray, sign: FloatArray) -> tuple[list[list[int]], FloatArray]:
    """Carry the signs that were read along the pairs; return the groups they link, and the signed couplings."""
    n = len(size)
    orientation = np.zeros(n)
    groups = []
    for seed in range(n):
        if orientation[seed]:
            continue
        orientation[seed], group = 1.0, [seed]
        for i in group:
            for j in np.flatnonzero((sign[i] != 0) & (orientation == 0)):
                orientation[j] = orientation[i] * sign[i, j]
                group.append(int(j))
        groups.append(sorted(group))
    K = size * np.where(sign != 0, sign, np.outer(orientation, orientation))
    np.fill_diagonal(K, 1.0)
    return groups, K


def _definite(K: FloatArray) -> FloatArray:
    """Complete what no reading speaks of, and draw toward no coupling until the smallest eigenvalue has a margin."""
    unknown = np.isnan(K)
    completed = largest_determinant(K) if np.any(unknown) else K
    if completed is None:
        completed = np.where(unknown, FIRST_COUPLING, K)
    completed = np.where(unknown & (completed == 0.0), FIRST_COUPLING, completed)
    least = float(np.linalg.eigvalsh(completed)[0])
    drawn = (FIRST_MARGIN - least) / (1.0 - least) if least < FIRST_MARGIN else 0.0
    return (1.0 - drawn) * completed + drawn * np.eye(len(K))


def _from_inverse(used: Sequence[Taken], labels: Sequence[str]) -> FloatArray | None:
    """L = Γ⁻¹ where every entry of Γ was read, or all but one on the diagonal, whose winding was read open.

    L_rr = 1 / (Γ_rr − Γ_rs Γ_ss⁻¹ Γ_sr) gives the missing entry Γ_rr.

    Raises
    ------
    InvalidRequest : Γ was read throughout and is singular or indefinite.
    """
    n = len(labels)
    gamma, own = np.full((n, n), np.nan), np.full(n, np.nan)
    for one in used:
        if isinstance(one.reading, InverseInductance):
            i, j = (labels.index(label) for label in one.reading.windings)
            gamma[i, j] = gamma[j, i] = one.value
        elif isinstance(one.reading, OpenInductance):
            own[labels.index(one.reading.winding)] = one.value
    missing = np.flatnonzero(np.isnan(gamma.diagonal()))
    if n > 1 and len(missing) == 1 and np.isfinite(own[missing[0]]):
        r = int(missing[0])
        s = np.arange(n) != r
        if not np.any(np.isnan(gamma[s])):
            gamma[r, r] = 1.0 / own[r] + gamma[r, s] @ solve_semidefinite(gamma[np.ix_(s, s)], gamma[s, r])
    L = _inverted(gamma)
    if L is None and not np.any(np.isnan(gamma)):
        raise InvalidRequest.at(
            "readings",
            "the inverse inductance matrix that was read is singular or indefinite, as it is where the magnetising "
            "inductance is taken for infinite: leave out one diagonal entry and read that winding open instead",
            reason="SINGULAR_INVERSE",
        )
    return L


def _from_effective(used: Sequence[Taken], labels: Sequence[str]) -> FloatArray | None:
    """L from a full cantilever set: L_rr, all voltage ratios from r, all effective leakages referred to r.

    Γ_ij = −1 / (n_i n_j ℓ_ij), and Γ n = e_r / L_rr gives the diagonal.
    """
    n = len(labels)
    off = np.full((n, n), np.nan)
    references = {one.reading.reference for one in used if isinstance(one.reading, EffectiveLeakage)}
    if len(references) != 1:
        return None
    r = labels.index(references.pop())
    ratio, own = np.full(n, np.nan), np.nan
    ratio[r] = 1.0
    for one in used:
        at = [labels.index(label) for label in windings_of(one.reading)]
        match one.reading:
            case VoltageRatio() if at[0] == r:
                ratio[at[1]] = one.value
            case OpenInductance() if at[0] == r:
                own = one.value
            case EffectiveLeakage():
                off[at[0], at[1]] = off[at[1], at[0]] = -1.0 / one.value
    gamma = off / np.outer(ratio, ratio)
    np.fill_diagonal(gamma, 0.0)
    drive = np.zeros(n)
    drive[r] = 1.0 / own
    np.fill_diagonal(gamma, (drive - gamma @ ratio) / ratio)
    return _inverted(gamma)


def _inverted(gamma: FloatArray) -> FloatArray | None:
    if np.any(np.isnan(gamma)) or not np.all(gamma.diagonal() > 0):
        return None
    scale = 1.0 / np.sqrt(gamma.diagonal())
    normal = gamma * np.outer(scale, scale)
    if np.linalg.eigvalsh(normal)[0] < INVERSE_MARGIN:
        return None
    return np.linalg.inv(normal) * np.outer(scale, scale)
