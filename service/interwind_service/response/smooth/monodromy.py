"""The monodromy matrix of a Rosenbrock run: the variational equation carried along its steps.

    dΦ/dt = (f_x − f_q g_q⁻¹ g_x) Φ,     Φ_i = Φ_0 + h Σ a_ij J_j Φ_j

by the Radau IIA method of order 5 on the dense output of each step (Hairer & Wanner 1996, section IV.5). The equation
is linear, so its three stages are one system; all steps of a block are solved together.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.response.drive.drives import Drives
from interwind_service.response.smooth.nonlinear_field import Field
from interwind_service.response.smooth.rosenbrock import Steps

FloatArray = NDArray[np.float64]

_ROOT = float(np.sqrt(6.0))
_NODES = np.array([(4.0 - _ROOT) / 10.0, (4.0 + _ROOT) / 10.0, 1.0])
_WEIGHTS = np.array([
    [(88.0 - 7.0 * _ROOT) / 360.0, (296.0 - 169.0 * _ROOT) / 1800.0, (-2.0 + 3.0 * _ROOT) / 225.0],
    [(296.0 + 169.0 * _ROOT) / 1800.0, (88.0 + 7.0 * _ROOT) / 360.0, (-2.0 - 3.0 * _ROOT) / 225.0],
    [(16.0 - _ROOT) / 36.0, (16.0 + _ROOT) / 36.0, 1.0 / 9.0],
])  # fmt: skip


def transition(field: Field, drives: Drives, steps: Steps) -> FloatArray:
    """Return ∂x(end)/∂x(start) over these steps, shape (n, n)."""
    n, stages = field.states, len(_NODES)
    phi = np.eye(n)
    if not n:
        return phi
    together = max(1, tol.TRANSITION_NUMBERS // max(1, (stages * n) ** 2))
    for first in range(0, len(steps.length_s), together):
        which = np.repeat(np.arange(first, min(first + together, len(steps.length_s))), stages)
        theta = np.tile(_NODES, len(which) // stages)
        w = drives.moved_to(steps.w[which], theta * steps.length_s[which])
        driven = field.drives(w)
        y = field.consistent(steps.at(which, theta), driven, steps.give)
        J = _reduced(field.jacobian(y, driven, np.zeros_like(driven))[0], n).reshape(-1, stages, n, n)
        h = steps.length_s[which[::stages], None, None, None, None]
        coupled = (h * _WEIGHTS[:, :, None, None] * J[:, None]).swapaxes(2, 3).reshape(len(J), stages * n, stages * n)
        unknown = np.eye(stages * n) - coupled
        found = np.linalg.solve(unknown, np.broadcast_to(np.tile(np.eye(n), (stages, 1)), (len(J), stages * n, n)))
        for own in found[:, -n:]:
            phi = own @ phi
    return phi


def _reduced(J: FloatArray, n: int) -> FloatArray:
    """Return the Jacobian over the states alone, the algebraic unknowns following them, shape (..., n, n)."""
    if J.shape[-1] == n:
        return J
    following = np.linalg.solve(J[..., n:, n:], J[..., n:, :n])
    return J[..., :n, :n] - J[..., :n, n:] @ following
