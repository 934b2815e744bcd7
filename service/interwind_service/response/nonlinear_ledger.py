"""The energy ledger of a Rosenbrock run: every power is one more state, integrated by the same stages.

A quadrature state e' = p(y) has no influence on the others, so its stages follow from theirs afterwards, for many steps
at once: u_e,i = hγ (p(y_i) + Σ c_ij u_e,j / h + h d_i ∂p/∂t + ∂p/∂y u_i).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind_service.response.drives import Drives
from interwind_service.response.energy import PowerTerms
from interwind_service.response.nonlinear_field import Field
from interwind_service.response.rosenbrock import Steps
from interwind_service.response.tableaux import C_TIME, D_TIME, GAMMA, A, B, C
from interwind_service.response.trajectory import Rows

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


class _Factor:
    """One factor of all powers over y, direct currents and drives."""

    def __init__(self, rows: Rows, field: Field, drives: Drives) -> None:
        self.u, self.j = rows.over @ field.signal_u, rows.over @ field.signal_j
        self.w, self.offset = rows.over @ field.signal_w, rows.offset
        self.rate = self.w @ drives.W

    def at(self, y: FloatArray, j: FloatArray, w: ComplexArray) -> FloatArray:
        return y @ self.u.T + j @ self.j.T + (w @ self.w.T).real + self.offset

    def along(self, u: FloatArray, lifted: FloatArray) -> FloatArray:
        return u @ self.u.T + lifted @ self.j.T

    def in_time(self, lifted: FloatArray, w: ComplexArray) -> FloatArray:
        return lifted @ self.j.T + (w @ self.rate.T).real


def energies(field: Field, drives: Drives, terms: PowerTerms, steps: Steps) -> FloatArray:
    """Return the energy of every power term over these steps, J, shape (terms,)."""
    one, other = _Factor(terms.one, field, drives), _Factor(terms.other, field, drives)
    h = steps.length_s[:, None]

    def powers(y: FloatArray, w: ComplexArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        j, slope = field.direct_currents(y, field.drives(w))
        return one.at(y, j, w), other.at(y, j, w), slope

    a, b, slope = powers(steps.y0, steps.w)
    lifted_t = slope * field.direct_rate(steps.w @ drives.W.T)
    in_time = b * one.in_time(lifted_t, steps.w) + a * other.in_time(lifted_t, steps.w)
    stages = np.zeros((len(C_TIME), *a.shape))
    for i in range(len(C_TIME)):
        argument = steps.y0 + np.einsum("j,sjd->sd", A[i, :i], steps.stages[:, :i])
        p_one, p_other, _ = powers(argument, _drives_at(drives, steps, C_TIME[i]))
        u = steps.stages[:, i]
        lifted = slope * field.direct_change(u)
        gradient = b * one.along(u, lifted) + a * other.along(u, lifted)
        coupled = np.tensordot(C[i, :i], stages[:i], axes=1) / h if i else 0.0
        stages[i] = GAMMA * h * (p_one * p_other + coupled + h * D_TIME[i] * in_time + gradient)
    total: FloatArray = np.tensordot(B, stages, axes=1).sum(axis=0)
    return total


def _drives_at(drives: Drives, steps: Steps, share: float) -> ComplexArray:
    return steps.w if drives.steady else drives.moved_to(steps.w, share * steps.length_s)
