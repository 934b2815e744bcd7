"""The energy ledger of a Rosenbrock run: every power is one more state, integrated by the same stages.

A quadrature state e' = p(y) has no influence on the others, so its stages follow from theirs afterwards, for many steps
at once: u_e,i = hγ (p(y_i) + Σ c_ij u_e,j / h + h d_i ∂p/∂t + ∂p/∂y u_i), a triangular system with constant factors.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind_service.response.drive.drives import Drives
from interwind_service.response.smooth.nonlinear_field import Field
from interwind_service.response.smooth.tableaux import C_TIME, D_TIME, GAMMA, A, B, C
from interwind_service.response.switched.energy import PowerTerms

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

_STAGES = GAMMA * np.linalg.inv(np.eye(len(C_TIME)) - GAMMA * C)
_RESULT, _ERROR = B @ _STAGES, _STAGES[-1]


class Ledger:
    """The power terms of one field, products of two factors each, and their integrals over steps."""

    def __init__(self, field: Field, drives: Drives, terms: PowerTerms) -> None:
        self.field, self.drives, self.terms = field, drives, terms
        over = np.vstack([terms.one.over, terms.other.over])  # both factors of all terms at once
        self.u, self.j, self.w = ((over @ own).T for own in (field.signal_u, field.signal_j, field.signal_w))
        self.offset = np.concatenate([terms.one.offset, terms.other.offset])
        self.turn = drives.W.T
        self.rate = self.turn @ self.w

    def _factors(self, y: FloatArray, j: FloatArray, w: ComplexArray) -> tuple[FloatArray, FloatArray]:
        found = y @ self.u + (w @ self.w).real + self.offset
        if j.shape[-1]:
            found += j @ self.j
        half = found.shape[-1] // 2
        return found[..., :half], found[..., half:]

    def _product_rate(self, change: FloatArray, one: FloatArray, other: FloatArray) -> FloatArray:
        half = change.shape[-1] // 2
        return other * change[..., :half] + one * change[..., half:]

    def powers(self, y: FloatArray, w: ComplexArray) -> FloatArray:
        """Return every power term for unknowns y (..., d) and drives w (..., k), W, shape (..., terms)."""
        j, _ = self.field.direct_currents(y, self.field.drives(w))
        one, other = self._factors(y, j, w)
        return one * other

    def energies(
        self, y: FloatArray, stages: FloatArray, w: ComplexArray, length_s: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """Return the energy of every power term over steps, and its difference to order 3, J, each (S, terms).

        Parameters
        ----------
        y : shape (S, d), at the start of each step; ``stages`` (S, 6, d); ``w`` (S, k) the drives there.
        """
        field, h = self.field, length_s[:, None, None]
        j, slope = field.direct_currents(y, field.drives(w))
        one, other = self._factors(y, j, w)
        change, in_time = stages @ self.u, (w @ self.rate).real
        if j.shape[-1]:
            change += (slope[:, None] * field.direct_change(stages)) @ self.j
            in_time += (slope * field.direct_rate(w @ self.turn)) @ self.j
        right = self._product_rate(change, one[:, None], other[:, None])
        right += h * D_TIME[:, None] * self._product_rate(in_time, one, other)[:, None]
        moved = w[:, None]
        if not self.drives.steady:
            times = (length_s[:, None] * C_TIME).ravel()
            moved = self.drives.moved_to(np.repeat(w, len(C_TIME), axis=0), times).reshape(len(w), len(C_TIME), -1)
        right += self.powers(y[:, None] + A @ stages, moved)
        return length_s[:, None] * (_RESULT @ right), length_s[:, None] * (_ERROR @ right)
