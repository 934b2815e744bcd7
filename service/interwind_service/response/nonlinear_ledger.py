"""The energy ledger of a Rosenbrock run: every power is one more state, integrated by the same stages.

A quadrature state e' = p(y) has no influence on the others, so its stages follow from theirs afterwards, for many steps
at once: u_e,i = hγ (p(y_i) + Σ c_ij u_e,j / h + h d_i ∂p/∂t + ∂p/∂y u_i), a triangular system with constant factors.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind_service.response.drives import Drives
from interwind_service.response.energy import PowerTerms
from interwind_service.response.nonlinear_field import Field
from interwind_service.response.tableaux import C_TIME, D_TIME, GAMMA, A, B, C
from interwind_service.response.trajectory import Rows

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

_STAGES = GAMMA * np.linalg.inv(np.eye(len(C_TIME)) - GAMMA * C)
_RESULT, _ERROR = B @ _STAGES, _STAGES[-1]


class _Factor:
    """One factor of all powers over y, direct currents and drives."""

    def __init__(self, rows: Rows, field: Field, drives: Drives) -> None:
        self.u, self.j = (rows.over @ field.signal_u).T, (rows.over @ field.signal_j).T
        self.w, self.offset = (rows.over @ field.signal_w).T, rows.offset
        self.rate = drives.W.T @ self.w

    def at(self, y: FloatArray, j: FloatArray, w: ComplexArray) -> FloatArray:
        return y @ self.u + j @ self.j + (w @ self.w).real + self.offset

    def along(self, u: FloatArray, lifted: FloatArray) -> FloatArray:
        return u @ self.u + lifted @ self.j

    def in_time(self, lifted: FloatArray, w: ComplexArray) -> FloatArray:
        return lifted @ self.j + (w @ self.rate).real


class Ledger:
    """The power terms of one field, and their integrals over steps."""

    def __init__(self, field: Field, drives: Drives, terms: PowerTerms) -> None:
        self.field, self.drives, self.terms = field, drives, terms
        self.one, self.other = _Factor(terms.one, field, drives), _Factor(terms.other, field, drives)
        self.turn = drives.W.T

    def powers(self, y: FloatArray, w: ComplexArray) -> FloatArray:
        """Return every power term for unknowns y (T, d) and drives w (T, k), W, shape (T, terms)."""
        j, _ = self.field.direct_currents(y, self.field.drives(w))
        return self.one.at(y, j, w) * self.other.at(y, j, w)

    def energies(
        self, y: FloatArray, stages: FloatArray, w: ComplexArray, length_s: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """Return the energy of every power term over steps, and its difference to order 3, J, each (S, terms).

        Parameters
        ----------
        y : shape (S, d), at the start of each step; ``stages`` (S, 6, d); ``w`` (S, k) the drives there.
        """
        field, one, other = self.field, self.one, self.other
        h = length_s[:, None, None]
        j, slope = field.direct_currents(y, field.drives(w))
        a, b = one.at(y, j, w)[:, None], other.at(y, j, w)[:, None]
        lifted_t = slope * field.direct_rate(w @ self.turn)
        in_time = b[:, 0] * one.in_time(lifted_t, w) + a[:, 0] * other.in_time(lifted_t, w)
        lifted = slope[:, None] * field.direct_change(stages)
        right = b * one.along(stages, lifted) + a * other.along(stages, lifted)
        right += h * D_TIME[:, None] * in_time[:, None]
        argument = y[:, None] + A @ stages
        shape = (len(y), len(C_TIME), len(w[0]))
        moved = np.broadcast_to(w[:, None], shape).reshape(-1, shape[2])
        if not self.drives.steady:
            moved = self.drives.moved_to(moved, (length_s[:, None] * C_TIME).ravel())
        moved = moved.reshape(shape)
        j, _ = field.direct_currents(argument, field.drives(moved))
        right += one.at(argument, j, moved) * other.at(argument, j, moved)
        energy: FloatArray = length_s[:, None] * (_RESULT @ right)
        error: FloatArray = length_s[:, None] * (_ERROR @ right)
        return energy, error
