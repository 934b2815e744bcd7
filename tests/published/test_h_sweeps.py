"""Area H, published state-space benchmarks: the sweep on their matrices against their published frequency responses."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.io

from interwind_service.response.sinusoidal.shifted_schur import shifted_schur


def load(data_folder, name: str) -> dict[str, np.ndarray]:
    """Arrays of one benchmark, dense."""
    data = scipy.io.loadmat(data_folder / f"{name}.mat")
    found = {}
    for key, value in data.items():
        if not key.startswith("__"):
            found[key] = np.asarray(value.todense() if hasattr(value, "todense") else value, dtype=float)
    return found


def sweep(data: dict[str, np.ndarray], shift: float) -> np.ndarray:
    """C (jω − A)⁻¹ B at every published ω from one Schur form of K = (s0 − A)⁻¹."""
    A, B, C, omega = data["A"], data["B"], data["C"], data["w"].ravel()
    K = np.linalg.inv(shift * np.eye(len(A)) - A)
    schur = shifted_schur(K)
    t = schur.solve((K @ B).astype(complex), 1j * omega - shift)
    return np.einsum("pn,nfm->fpm", C @ schur.U, t)


def test_h04_building(data_folder):
    """SLICOT "building", 48 states (looked up): 165 published magnitudes to 1e-10, peak 5.26471e-3 at 5.2233."""
    data = load(data_folder, "building")
    found = np.abs(sweep(data, 10.0)[:, 0, 0])
    np.testing.assert_allclose(found, data["mag"].ravel(), rtol=1e-10)
    assert found.max() == pytest.approx(5.26471e-3, rel=1e-5)
    assert data["w"].ravel()[found.argmax()] == pytest.approx(5.22330512, rel=1e-8)
    assert np.linalg.eigvals(data["A"]).real.max() == pytest.approx(-0.261802277, rel=1e-8)


def test_h05_cd_player(data_folder):
    """SLICOT "CD player", 120 states, 2 x 2 (looked up): 243 published magnitudes, by columns, to 1e-8 of the peak."""
    data = load(data_folder, "cdplayer")
    found = np.abs(sweep(data, 300.0)).transpose(0, 2, 1).reshape(243, 4)
    published = data["mag"] if data["mag"].shape == (243, 4) else data["mag"].T
    assert np.abs(found - published).max() <= 1e-8 * published.max()
    assert found[:, 0].max() == pytest.approx(2.31982096e6, rel=1e-8)
    assert data["w"].ravel()[found[:, 0].argmax()] == pytest.approx(22.5682088, rel=1e-8)
