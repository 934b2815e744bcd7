"""Modes of one combination of device states, found from both ends of the spectrum.

A blocking device on a stray inductance gives |λ| up to 1e15 /s beside 1e2 /s, and an eigen-decomposition of A alone
loses the slow end to rounding. So the fast modes come from A = P M⁻¹ N and the slow ones from the resolvent
X = (s0 − A)⁻¹, solved directly from the companion network at s0: λ = s0 − 1/μ. With d = x − X B w the drives enter as

    dd/dt = A d + X B (s0 − W) w,        s = S_x d + S_0 w

which never forms the response to a drive as a difference of two huge numbers, and holds for s = 0 beside λ = 0.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.switched.equilibrated import Equilibrated, refuse_singular
from interwind_service.response.switched.tableau import Mode, Tableau

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class Modes:
    """The solution of one combination of device states, with y = (s, x) all signals.

        y(t) = Re Y (κ ∘ e^{λt}) + Re Σ_b (Y_b w0) t^q_b e^{s_b t} / q_b!,    κ = Λ (x0 − Re X_p w0)

    ``eigenvalue`` (h,) one of each conjugate pair; ``left`` (h, n) with the factor 2 of a pair inside; ``signal``
    (m + n, h); ``exponent``, ``power`` (b,); ``forced`` (m + n, b, k); ``particular`` (n, k) its states at t = 0;
    ``condition`` of V.
    """

    eigenvalue: ComplexArray
    left: ComplexArray
    signal: ComplexArray
    exponent: ComplexArray
    power: NDArray[np.int64]
    forced: ComplexArray
    particular: ComplexArray
    condition: float

    @property
    def state_signal(self) -> ComplexArray:
        """Rows of ``signal`` that are states."""
        return self.signal[len(self.signal) - self.left.shape[1] :]

    @property
    def state_forced(self) -> ComplexArray:
        """Rows of ``forced`` that are states."""
        return self.forced[len(self.forced) - self.left.shape[1] :]

    def amplitudes(self, x: FloatArray, w: ComplexArray) -> ComplexArray:
        """Return κ of a start from x with the drives at w, shape (h,)."""
        return self.left @ (x - (self.particular @ w).real)


@dataclass(frozen=True, slots=True, eq=False)
class Instant:
    """Signals straight from states and drives: s = SX x + SU w."""

    SX: FloatArray
    SU: ComplexArray


def instant_of(tableau: Tableau, mode: Mode) -> Instant:
    """Solve the tableau for unit states and drives, or name what makes it singular."""
    M, N, F = tableau.with_modes(mode)
    factor = Equilibrated(M)
    refuse_singular(factor, tableau)
    return Instant(factor.solve(N), factor.solve(F))


def modes_of(tableau: Tableau, mode: Mode, instant: Instant, rate_per_s: float, span_s: float) -> Modes:
    """Return the modes for one combination of device states.

    ``rate_per_s`` is s0, about the inverse of the time of interest; ``span_s`` is the longest stretch the modes are run
    over, within which a drive and a mode closer than ``NEAR_RESONANCE`` are joined by their Taylor series.
    """
    M, N, F = tableau.with_modes(mode)
    P, states = tableau.P, tableau.states
    A = P @ instant.SX
    lift = N @ P
    companion = Equilibrated(M - lift / rate_per_s)
    refuse_singular(companion, tableau)
    SR, S0 = companion.solve(N) / rate_per_s, companion.solve(F)
    X = (P @ SR + np.eye(states)) / rate_per_s
    xs = P @ S0 / rate_per_s

    found = _Spectrum.of(*_both_ends(A, X, instant.SX, SR, rate_per_s))
    if (
        found.condition > tol.DEFECTIVE_MODES
    ):  # critical damping: modes that coincide are drawn apart by a rounding of A
        jitter = 1.0 + tol.MODE_SPLITTING * np.random.default_rng(states).uniform(-1.0, 1.0, A.shape)
        apart = _Spectrum.of(*_both_ends(A * jitter, X * jitter, instant.SX, SR, rate_per_s))
        found = min(found, apart, key=lambda spectrum: spectrum.condition)

    eigenvalue, V, S, left = found.with_conjugates()
    exponent, power, forced_modes = _forced(eigenvalue, left @ xs, tableau.drives.exponent, tableau.drives.link,
                                            tableau.drives.W, rate_per_s, span_s)  # fmt: skip
    signal = np.vstack([S, V])
    forced = np.einsum("mj,jbk->mbk", signal, forced_modes)
    direct = np.vstack([S0, xs])
    for channel, s in enumerate(tableau.drives.exponent):
        for order, source in enumerate(_followers(channel, tableau.drives.link)):
            forced[:, _basis(exponent, power, s, order), source] += direct[:, channel]
    particular = (
        forced[len(forced) - states :, power == 0].sum(axis=1)
        if states
        else np.zeros((0, len(tableau.drives.exponent)))
    )
    return Modes(
        found.eigenvalue,
        found.left,
        np.vstack([found.S, found.V]),
        exponent,
        power,
        forced,
        particular,
        found.condition,
    )


@dataclass(frozen=True, slots=True, eq=False)
class _Spectrum:
    """One of each conjugate pair: ``eigenvalue`` (h,), ``V`` (n, h), signals ``S`` (m, h), ``left`` (h, n).

    The inverse is taken of the real matrix (Re v, Im v): so Re V left = 1 to the condition times rounding, where two
    separately rounded halves of a pair would leave the condition squared.
    """

    eigenvalue: ComplexArray
    V: ComplexArray
    S: ComplexArray
    left: ComplexArray
    condition: float

    @classmethod
    def of(cls, eigenvalue: ComplexArray, V: ComplexArray, S: ComplexArray) -> _Spectrum:
        """Choose the halves and invert."""
        half = eigenvalue.imag >= 0.0
        eigenvalue, V, S = eigenvalue[half], V[:, half], S[:, half]
        paired = np.flatnonzero(eigenvalue.imag > 0.0)
        real = np.hstack([V.real, V.imag[:, paired]])
        inverse = np.linalg.inv(real) if len(real) else real
        left = inverse[: len(eigenvalue)].astype(complex)
        left[paired] -= 1j * inverse[len(eigenvalue) :]
        condition = float(np.linalg.norm(real, 1) * np.linalg.norm(inverse, 1)) if len(real) else 1.0
        return cls(eigenvalue, V, S, left, condition)

    def with_conjugates(self) -> tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]:
        """Return eigenvalues, V, S and left rows of all modes, the halves first."""
        paired = self.eigenvalue.imag > 0.0
        weight = np.where(paired, 0.5, 1.0)[:, None]
        return (
            np.concatenate([self.eigenvalue, self.eigenvalue[paired].conj()]),
            np.hstack([self.V, self.V[:, paired].conj()]),
            np.hstack([self.S, self.S[:, paired].conj()]),
            np.vstack([weight * self.left, 0.5 * self.left[paired].conj()]),
        )


def _both_ends(
    A: FloatArray, X: FloatArray, SX: FloatArray, SR: FloatArray, rate: float
) -> tuple[ComplexArray, ComplexArray, ComplexArray]:
    """Return eigenvalues (n,), vectors (n, n) and signals (m, n): slow modes from X = (s0 − A)⁻¹, fast ones from A."""
    if not len(A):
        return np.zeros(0, complex), np.zeros((0, 0), complex), np.zeros((len(SX), 0), complex)
    fast, V_fast = (part.astype(complex) for part in np.linalg.eig(A))
    mu, V_slow = (part.astype(complex) for part in np.linalg.eig(X))
    order = np.argsort(np.abs(fast), kind="stable")
    fast, V_fast = fast[order], V_fast[:, order]
    order = np.argsort(-np.abs(mu), kind="stable")
    mu, V_slow = mu[order], V_slow[:, order]
    slow = rate - 1.0 / mu
    cut = _split(slow, fast, rate)
    V = np.hstack([V_slow[:, :cut], V_fast[:, cut:]])
    S = np.hstack([SR @ (V_slow[:, :cut] / mu[:cut]), SX @ V_fast[:, cut:]])
    return np.concatenate([slow[:cut], fast[cut:]]), V, S


def _split(slow: ComplexArray, fast: ComplexArray, rate: float) -> int:
    """Return how many modes to take from the slow end: where the two rounding errors meet, never inside a pair."""
    size = len(fast)
    if size == 0:
        return 0
    largest = np.abs(fast[-1])
    best, best_error = 0, np.inf
    for cut in range(size + 1):
        if 0 < cut < size and (_same(slow[cut - 1], slow[cut]) or _same(fast[cut - 1], fast[cut])):
            continue
        error_slow = np.abs(slow[cut - 1]) / rate if cut else 0.0
        error_fast = largest / max(np.abs(fast[cut]), rate) if cut < size else 0.0
        if max(error_slow, error_fast) < best_error:
            best, best_error = cut, max(error_slow, error_fast)
    return best


def _same(one: complex, other: complex) -> bool:
    return bool(one.imag != 0.0 and abs(one - other.conjugate()) <= tol.CONJUGATE_PAIR * abs(one))


def _basis(exponent: ComplexArray, power: NDArray[np.int64], s: complex, q: int) -> int:
    return int(np.flatnonzero((exponent == s) & (power == q))[0])


def _followers(channel: int, link: NDArray[np.int64]) -> list[int]:
    """Return the channels whose unit start reaches a channel as 1, t, t²/2, ... in this order."""
    chain = [channel]
    while link[chain[-1]] >= 0:
        chain.append(int(link[chain[-1]]))
    return chain


def _forced(
    eigenvalue: ComplexArray, xs: ComplexArray, s_of: ComplexArray, link: NDArray[np.int64],
    W: ComplexArray, rate: float, span: float,
) -> tuple[ComplexArray, NDArray[np.int64], ComplexArray]:  # fmt: skip
    """Return basis functions t^q e^{st}/q! and in them the modal response to each channel, (modes, basis, channels).

    To t^p e^{st}/p! a mode λ answers −Σ_r t^r e^{st} / (r! (λ−s)^{p−r+1}) beside its own e^{λt}; near resonance
    e^{st} Σ_k (λ−s)^k t^{k+p+1} / (k+p+1)! instead.
    """
    beta = xs @ (rate * np.eye(len(s_of)) - W)  # modal drive of each channel
    near: dict[complex, NDArray[np.bool_]] = {}
    where: dict[tuple[complex, int], int] = {}
    for s in dict.fromkeys(s_of.tolist()):
        near[s] = np.abs(eigenvalue - s) * span < tol.NEAR_RESONANCE
        longest = max(len(_followers(c, link)) for c in np.flatnonzero(s_of == s))
        top = tol.RESONANCE_TERMS + longest - 1 if near[s].any() else longest - 1
        for q in range(top + 1):
            where[s, q] = len(where)
    found = np.zeros((len(eigenvalue), len(where), len(s_of)), dtype=complex)
    for channel, s in enumerate(s_of.tolist()):
        drive, gap, close = beta[:, channel], eigenvalue - s, near[s]
        far = ~close
        for p, source in enumerate(_followers(channel, link)):
            for r in range(p + 1):
                found[far, where[s, r], source] -= drive[far] / gap[far] ** (p - r + 1)
            for k in range(tol.RESONANCE_TERMS) if close.any() else ():
                found[close, where[s, k + p + 1], source] += drive[close] * gap[close] ** k
    exponent = np.array([s for s, _ in where], dtype=complex)
    return exponent, np.array([q for _, q in where], dtype=np.int64), found
