"""One Schur form serves every shift."""

from __future__ import annotations

import numpy as np
import pytest

from interwind_service.response.sinusoidal.shifted_schur import shifted_schur


@pytest.mark.parametrize("size", [1, 2, 31, 32, 33, 100])
@pytest.mark.parametrize("per_shift", [False, True])
def test_against_a_direct_solve(size, per_shift):
    """Every shift is solved to rounding, one right side for all or one for each."""
    rng = np.random.default_rng(size)
    K = rng.normal(size=(size, size))
    shift = 1j * np.geomspace(1e-3, 1e3, 7)
    r = rng.normal(size=(size, 7, 2) if per_shift else (size, 2)) + 0j

    schur = shifted_schur(K)
    x = np.einsum("ij,jfm->fim", schur.U, schur.solve(r, shift))

    right = r.transpose(1, 0, 2) if per_shift else np.broadcast_to(r, (7, size, 2))
    direct = np.linalg.solve(np.eye(size) + shift[:, None, None] * K, right)
    assert np.abs(x - direct).max() <= 1e-11 * np.abs(direct).max()
