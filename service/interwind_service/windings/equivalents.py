"""Equivalent circuits: inductances and ideal transformers with the terminal behaviour of the set.

    T, π          two windings, turns ratio 1
    star          one leg a winding and one magnetising branch: exact up to three windings, a fit beyond (Boyajian 1924)
    cantilever    one magnetising branch at the reference and a branch between every two windings: exact for any number
                  (Erickson & Maksimović 1998)

The legs are bookkeeping: one may be negative in a set that can exist, and nothing may be hung on an inner node.
"""

from __future__ import annotations

import numpy as np

from interwind.model.characterization import EquivalentBranch, EquivalentCircuit, EquivalentKind
from interwind.model.frozen import FloatArray
from interwind.model.windings import WindingSet


def tee(coils: WindingSet) -> EquivalentCircuit:
    """Return the T of two windings: legs L_1 − M and L_2 − M, magnetising branch M."""
    (first, mutual), (_, second) = coils.inductance_h
    a, b = coils.labels
    branches = (
        EquivalentBranch((a,), float(first - mutual)),
        EquivalentBranch((b,), float(second - mutual)),
        EquivalentBranch((), float(mutual)),
    )
    return _circuit(coils, EquivalentKind.T, np.ones(2), branches)


def pi(coils: WindingSet, inverse: FloatArray) -> EquivalentCircuit:
    """Return the π of two windings: shunts 1 / (Γ_11 + Γ_12) and 1 / (Γ_22 + Γ_12), series −1 / Γ_12, Γ = L⁻¹."""
    a, b = coils.labels
    branches = (
        EquivalentBranch((a,), _reciprocal(inverse[0, 0] + inverse[0, 1])),
        EquivalentBranch((b,), _reciprocal(inverse[1, 1] + inverse[0, 1])),
        EquivalentBranch((a, b), _reciprocal(-inverse[0, 1])),
    )
    return _circuit(coils, EquivalentKind.PI, np.ones(2), branches)


def cantilever(coils: WindingSet, inverse: FloatArray) -> EquivalentCircuit | None:
    """Return the cantilever circuit with the first winding as reference; None where a winding is not coupled to it.

    n_j = L_1j / L_11, ℓ_ij = −1 / (n_i n_j Γ_ij), magnetising L_11.
    """
    L, n = coils.inductance_h, coils.size
    ratio = L[0] / L[0, 0]
    if np.any(ratio == 0.0):
        return None
    branches = [EquivalentBranch((coils.labels[0],), float(L[0, 0]))]
    branches += [
        EquivalentBranch((coils.labels[i], coils.labels[j]), _reciprocal(-ratio[i] * ratio[j] * inverse[i, j]))
        for i in range(n)
        for j in range(i + 1, n)
    ]
    return _circuit(coils, EquivalentKind.CANTILEVER, ratio, tuple(branches))


def star(coils: WindingSet) -> EquivalentCircuit | None:
    """Return the star of three or more windings; None where the mutual inductances do not allow one.

    Turns ratios a and magnetising L_m fit ln|L_ij| = ln L_m + ln|a_i a_j| by least squares, a_1 = 1; legs by
    `star_legs` from the leakages at balanced ampere-turns. For three windings both fits are exact.
    """
    L, n = coils.inductance_h, coils.size
    i, j = np.triu_indices(n, 1)
    mutual = L[i, j]
    sign = np.where(L[0] < 0, -1.0, 1.0)
    if n == 3:
        sign[1:] = np.sign(L[1, 2]) * np.sign(L[0, [2, 1]])
    magnetising_sign = np.sign(mutual * sign[i] * sign[j])
    if np.any(mutual == 0.0) or np.any(magnetising_sign != magnetising_sign[0]):
        return None
    design = np.zeros((len(i), n))
    design[:, 0] = 1.0
    for column in range(1, n):
        design[:, column] = (i == column).astype(float) + (j == column)
    fit = np.linalg.lstsq(design, np.log(np.abs(mutual)), rcond=None)[0]
    ratio = sign * np.append(1.0, np.exp(fit[1:]))
    referred = L / np.outer(ratio, ratio)
    own = referred.diagonal()
    legs = star_legs(own[:, None] + own[None, :] - 2.0 * referred)
    magnetising = float(magnetising_sign[0] * np.exp(fit[0]))
    branches = [EquivalentBranch((label,), float(leg)) for label, leg in zip(coils.labels, legs, strict=True)]
    return _circuit(coils, EquivalentKind.STAR, ratio, (*branches, EquivalentBranch((), magnetising)))


def star_legs(leakage: FloatArray) -> FloatArray:
    """Return the legs x (n,) that fit x_i + x_j to the referred pair leakages (n, n) by least squares, n ≥ 3.

    x_i = (Σ_j ℓ_ij − S) / (n − 2), S = Σ_{i<j} ℓ_ij / (n − 1).
    """
    n = len(leakage)
    own = leakage - np.diag(leakage.diagonal())
    total = float(own.sum()) / (2.0 * (n - 1))
    return (own.sum(axis=1) - total) / (n - 2)


def inductance_of(circuit: EquivalentCircuit, labels: tuple[str, ...]) -> FloatArray:
    """Return the inductance matrix (n, n), H, that a circuit shows at its terminals."""
    n = len(labels)
    if circuit.kind in (EquivalentKind.T, EquivalentKind.STAR):
        referred = np.zeros((n, n))
        for branch in circuit.branches:
            if branch.windings:
                place = labels.index(branch.windings[0])
                referred[place, place] += branch.inductance_h
            else:
                referred += branch.inductance_h
    else:
        admittance = np.zeros((n, n))
        for branch in circuit.branches:
            ends = np.zeros(n)
            ends[labels.index(branch.windings[0])] = 1.0
            if len(branch.windings) == 2:
                ends[labels.index(branch.windings[1])] = -1.0
            admittance += np.outer(ends, ends) / branch.inductance_h
        referred = np.linalg.inv(admittance)
    return referred * np.outer(circuit.turns_ratio, circuit.turns_ratio)


def _circuit(
    coils: WindingSet, kind: EquivalentKind, ratio: FloatArray, branches: tuple[EquivalentBranch, ...]
) -> EquivalentCircuit:
    n = coils.size
    bare = EquivalentCircuit(kind, coils.labels[0], ratio, branches, np.zeros((n, n)))
    wanted, shown = _leakages(coils.inductance_h), _leakages(inductance_of(bare, coils.labels))
    with np.errstate(divide="ignore", invalid="ignore"):
        error = np.where(wanted != 0.0, shown / wanted - 1.0, np.where(shown == 0.0, 0.0, np.nan))
    return EquivalentCircuit(kind, coils.labels[0], ratio, branches, error)


def _leakages(L: FloatArray) -> FloatArray:
    own = L.diagonal()
    leakage = (np.outer(own, own) - L * L) / own[None, :]
    np.fill_diagonal(leakage, 0.0)
    return leakage


def _reciprocal(value: float) -> float:
    return float(1.0 / value) if value != 0.0 else float("inf")
