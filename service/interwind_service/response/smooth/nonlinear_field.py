"""The equations of a network with smooth laws, as a semi-explicit system in few unknowns, with its Jacobian.

The linear part is solved once for each combination of switch states. A nonlinear branch whose voltage the states fix
(a diode across a capacitor, a saturable branch, whose flux is a state) enters as a current, j = i(v(x)). Every other
one enters by its wave q = v − ρ j (a source q behind ρ, which any passive surrounding accepts) and keeps one
algebraic equation:

    dx/dt = A x + E j + Q q + b(t),      0 = ρ (j_q(x, j, q) − i(v_q(x, j, q)))
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.switched.device import SaturableBranch
from interwind_service.response.switched.equilibrated import Equilibrated, refuse_singular
from interwind_service.response.switched.nonlinear_laws import Laws
from interwind_service.response.switched.tableau import Mode, Tableau

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class Field:
    """f(u, w) of u = (x, q): M du/dt = f with M = diag(1 .. 1, 0 .. 0).

    ``linear_u`` (d + e + p, d), ``linear_w``: rows of f, then of the arguments of the e direct branches, then of the p
    branches solved for by waves; ``over_j`` (d, e), ``wave_j`` (p, e) what the direct currents add; ``signal_*`` all
    signals (s, x).
    """

    states: int
    rho: float
    direct: Laws
    waves: Laws
    linear_u: FloatArray
    linear_w: ComplexArray
    over_j: FloatArray
    wave_j: FloatArray
    signal_u: FloatArray
    signal_j: FloatArray
    signal_w: ComplexArray

    @property
    def size(self) -> int:
        """Number of unknowns d."""
        return self.linear_u.shape[1]

    @property
    def mass(self) -> FloatArray:
        """The diagonal of M, shape (d,)."""
        return np.concatenate([np.ones(self.states), np.zeros(self.size - self.states)])

    def drives(self, w: ComplexArray) -> FloatArray:
        """Return what drives w (..., k) add to the rows of ``linear_u``, shape (..., d + e + p)."""
        return (w @ self.linear_w.T).real

    def _cut(self, rows: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        d, e = self.size, len(self.direct.branch)
        return rows[..., :d], rows[..., d : d + e], rows[..., d + e :]

    def value(self, u: FloatArray, driven: FloatArray) -> FloatArray:
        """Return f, shape (..., d)."""
        rows: FloatArray = u.dot(self.linear_u.T)
        rows += driven
        d, e = u.shape[-1], self.over_j.shape[1]
        f: FloatArray = rows[..., :d]
        if e:
            j = self.direct.current(rows[..., d : d + e])
            f += j.dot(self.over_j.T)
        if d > self.states:
            wave = rows[..., d + e :]
            if e:
                wave += j @ self.wave_j.T
            f[..., self.states :] -= self.rho * self.waves.current(wave)
        return f

    def jacobian(self, u: FloatArray, driven: FloatArray, rate: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return ∂f/∂u, shape (..., d, d), and ∂f/∂t, shape (..., d), for drives that change by ``rate``."""
        if u.ndim == 1 and self.size == self.states:
            return self._jacobian_at(u, driven, rate)
        _, argument, wave = self._cut(u @ self.linear_u.T + driven)
        over_u, direct_u, wave_u = self._cut(self.linear_u.T)
        J = over_u.T.copy() if u.ndim == 1 else np.tile(over_u.T, (*u.shape[:-1], 1, 1))
        f_t = rate[..., : self.size].copy()
        if argument.size:
            j, slope = self.direct.currents(argument)
            lifted = slope[..., :, None] * direct_u.T
            lifted_t = slope * rate[..., self.size : self.size + slope.shape[-1]]
            J += self.over_j @ lifted
            f_t += lifted_t @ self.over_j.T
        if wave.size:
            wave_rows, wave_rate = wave_u.T, rate[..., rate.shape[-1] - wave.shape[-1] :]
            if argument.size:
                wave = wave + j @ self.wave_j.T
                wave_rows, wave_rate = wave_rows + self.wave_j @ lifted, wave_rate + lifted_t @ self.wave_j.T
            slope = self.rho * self.waves.currents(wave)[1]
            J[..., self.states :, :] -= slope[..., :, None] * wave_rows
            f_t[..., self.states :] -= slope * wave_rate
        return J, f_t

    def _jacobian_at(self, u: FloatArray, driven: FloatArray, rate: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the same at one point where nothing is solved for by waves; every step of a run asks for it."""
        d = len(u)
        direct_u = self.linear_u[d:]
        slope = self.direct.currents(direct_u.dot(u) + driven[d:])[1]
        over = self.over_j * slope
        return self.linear_u[:d] + over.dot(direct_u), rate[:d] + over.dot(rate[d:])

    def direct_currents(self, u: FloatArray, driven: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return currents and slopes of the direct branches, each (..., e)."""
        if not self.direct.branch.size:
            nothing = np.empty((*u.shape[:-1], 0))
            return nothing, nothing
        return self.direct.currents(self._cut(u @ self.linear_u.T + driven)[1])

    def direct_change(self, u: FloatArray) -> FloatArray:
        """Return how the arguments of the direct branches change with u, shape (..., e)."""
        return u @ self._cut(self.linear_u.T)[1]

    def direct_rate(self, w: ComplexArray) -> FloatArray:
        """Return what drives w add to the arguments of the direct branches, shape (..., e)."""
        return self._cut(self.drives(w))[1]

    def wave_slopes(self, u: FloatArray, driven: FloatArray) -> FloatArray:
        """Return ρ di/dv of the branches solved for by waves, shape (..., p)."""
        _, argument, wave = self._cut(u @ self.linear_u.T + driven)
        j, _ = self.direct.currents(argument)
        return self.rho * self.waves.currents(wave + j @ self.wave_j.T)[1]

    def residual(self, u: FloatArray, driven: FloatArray) -> float:
        """Return the largest |f| of the algebraic equations at points (S, d) over the largest sum of its terms."""
        own = slice(self.states, self.size)
        j, _ = self.direct_currents(u, driven)
        terms = np.abs(u) @ np.abs(self.linear_u[own]).T + np.abs(driven[:, own])
        terms += np.abs(j) @ np.abs(self.over_j[own]).T
        terms = terms.max(axis=0) + self.wave_slopes(u, driven) * np.abs(u[:, own]).max(initial=0.0)
        gap = np.abs(self.value(u, driven)[:, own])
        return float((gap / np.where(terms > 0.0, terms, 1.0)).max(initial=0.0))

    def consistent(self, u: FloatArray, driven: FloatArray, give: FloatArray | None = None) -> FloatArray:
        """Return u (..., d) that meets the algebraic equations: Newton's method with halving.

        The correction is the least one counted in ``give`` (d,): how far each unknown may move. None lets the waves
        alone move. Where a diode blocks in series with an inductor, its voltage hangs on the last digits of the
        current, and it is the current that has to yield.
        """
        if self.states == self.size:
            return u
        give = self.mass == 0.0 if give is None else give
        own = slice(self.states, self.size)
        u, still = u.copy(), np.zeros_like(driven)
        gap = self.value(u, driven)[..., own]
        for _ in range(tol.WAVE_STEPS):
            size = np.abs(gap).max(axis=-1, keepdims=True)
            wrong = size > tol.WAVE_RESIDUAL * np.maximum(1.0, np.abs(u[..., own]).max(axis=-1, keepdims=True))
            if not wrong.any() or not np.isfinite(size).all():
                break
            rows = self.jacobian(u, driven, still)[0][..., own, :] * give
            norm = np.linalg.norm(rows, axis=-1, keepdims=True)
            norm[norm == 0.0] = 1.0
            step = np.where(wrong, give * (np.linalg.pinv(rows / norm) @ (gap[..., None] / norm))[..., 0], 0.0)
            before = u.copy()
            for _ in range(tol.WAVE_HALVINGS):
                u = before - step
                gap = self.value(u, driven)[..., own]
                worse = np.abs(gap).max(axis=-1, keepdims=True) > size
                if not worse.any():
                    break
                step = np.where(worse, 0.5 * step, step)
        return u


def field_of(tableau: Tableau, mode: Mode, laws: Laws) -> Field:
    """Solve the linear part for these switch states."""
    M, N, F = tableau.with_modes(mode)
    count, rho = len(laws.branch), tableau.limit.middle_ohm
    state_of = {device.branch: device for device in tableau.devices if isinstance(device, SaturableBranch)}
    unit = np.zeros((tableau.unknowns, count))
    for k, branch in enumerate(laws.branch.tolist()):
        row = tableau.row_of_branch[branch]
        N[row], F[row] = 0.0, 0.0
        unit[row, k] = 1.0
        M[row] = 0.0 if branch in state_of else tableau.branch_voltage_row(branch)
        M[row, tableau.column_of_current[branch]] = 1.0 if branch in state_of else -rho
    first = _solve(M, unit, tableau)
    voltage = np.array([tableau.branch_voltage_row(int(b)) for b in laws.branch]).reshape(count, tableau.unknowns)
    loose = np.abs(voltage @ first).max(axis=1, initial=0.0) > tol.STIFF_VOLTAGE
    direct = np.array([k for k, b in enumerate(laws.branch.tolist()) if b in state_of or not loose[k]], dtype=np.int64)
    waves = np.setdiff1d(np.arange(count), direct)
    for branch in laws.branch[direct].tolist():
        row = tableau.row_of_branch[branch]
        M[row] = 0.0
        M[row, tableau.column_of_current[branch]] = 1.0
    SX, SJ = _solve(M, N, tableau), _solve(M, unit, tableau)
    SU = _solve(M, F.real, tableau) + 1j * _solve(M, F.imag, tableau)
    Sd, Sq = SJ[:, direct], SJ[:, waves]
    states = tableau.states
    Su = np.hstack([SX, Sq])
    current = np.zeros((count, tableau.unknowns))
    current[np.arange(count), tableau.column_of_current[laws.branch]] = 1.0
    direct_u, direct_w = voltage[direct] @ Su, voltage[direct] @ SU
    for position, k in enumerate(direct.tolist()):
        device = state_of.get(int(laws.branch[k]))
        direct_u[position, states:] = 0.0
        if device is not None:
            direct_u[position], direct_w[position] = 0.0, 0.0
            direct_u[position, device.state] = device.root
    P, J = tableau.P, rho * current[waves]
    below = np.eye(states, Su.shape[1])
    return Field(
        states,
        rho,
        laws.part(direct),
        laws.part(waves),
        np.vstack([P @ Su, J @ Su, direct_u, voltage[waves] @ Su]),
        np.vstack([P @ SU, J @ SU, direct_w, voltage[waves] @ SU]),
        np.vstack([P @ Sd, J @ Sd]),
        voltage[waves] @ Sd,
        np.vstack([Su, below]),
        np.vstack([Sd, np.zeros((states, len(direct)))]),
        np.vstack([SU, np.zeros((states, SU.shape[1]))]),
    )


def _solve(M: FloatArray, right: FloatArray, tableau: Tableau) -> FloatArray:
    factor = Equilibrated(M)
    refuse_singular(factor, tableau)
    return factor.solve(right)
