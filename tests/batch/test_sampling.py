"""Random sets stay inside what can exist, and spread as they say."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw
from interwind_service import engine


def tight(size: int = 6, coupling: float = 0.995) -> iw.WindingSet:
    k = np.full((size, size), coupling)
    np.fill_diagonal(k, 1.0)
    return iw.WindingSet.from_coupling([f"w{j}" for j in range(size)], np.linspace(1e-3, 2e-3, size), k)


def couplings(L):
    root = np.sqrt(np.einsum("vii->vi", L))
    return L / (root[:, :, None] * root[:, None, :])


def test_independent_errors_on_couplings_leave_the_valid_set():
    """Why the service draws: ±0.5 % on each of the 15 couplings of a tight set of six leaves nearly no set possible."""
    rng = np.random.default_rng(0)
    errors = rng.uniform(-0.005, 0.005, (2000, 6, 6))
    k = tight().coupling * (1.0 + np.triu(errors, 1) + np.triu(errors, 1).transpose(0, 2, 1))
    assert np.mean(np.linalg.eigvalsh(k)[:, 0] < 0.0) > 0.9


@pytest.mark.parametrize("parameter", list(iw.SampleParameter))
@pytest.mark.parametrize("spread", [0.005, 0.1, 0.5])
def test_every_draw_can_exist(parameter, spread):
    """Not one of 2000 sets is impossible, however wide the spread; matrices are symmetric, couplings below 1."""
    L = engine.sample_windings(tight(), iw.SampleWindings("T", 2000, spread, 0.05, parameter, seed=3))
    k = couplings(L)
    assert np.array_equal(L, L.transpose(0, 2, 1))
    assert np.linalg.eigvalsh(k)[:, 0].min() > -6 * np.finfo(float).eps * 6
    assert np.abs(k[:, ~np.eye(6, dtype=bool)]).max() <= 1.0 + 1e-15


def test_spread_is_the_relative_deviation_of_a_tight_leakage():
    """For a tight pair the leakage 1 − k² deviates by the stated share, to the order of the share squared."""
    L = engine.sample_windings(tight(2, 0.999), iw.SampleWindings("T", 20_000, 0.05, seed=1))
    leakage = 1.0 - couplings(L)[:, 0, 1] ** 2
    assert leakage.std() / leakage.mean() == pytest.approx(0.05, rel=0.05)
    assert np.median(leakage) == pytest.approx(1.0 - 0.999**2, rel=0.01)


def test_self_spread_is_log_normal_and_signs_stay():
    """The logarithm of L deviates by the stated share; a negative coupling stays negative; no spread, no change."""
    coils = iw.WindingSet.from_coupling(("a", "b"), [1e-3, 4e-3], [[1.0, -0.3], [-0.3, 1.0]])
    L = engine.sample_windings(coils, iw.SampleWindings("T", 20_000, 0.2, 0.1, seed=2))
    assert np.log(L[:, 0, 0]).std() == pytest.approx(0.1, rel=0.05)
    assert (L[:, 0, 1] < 0.0).all()
    still = engine.sample_windings(coils, iw.SampleWindings("T", 3, 0.0))
    assert np.allclose(still, coils.inductance_h, rtol=1e-14)


def test_same_seed_same_sets():
    """The seed alone decides."""
    one, same, other = (
        engine.sample_windings(tight(), iw.SampleWindings("T", 5, 0.1, seed=seed)) for seed in (1, 1, 2)
    )
    assert np.array_equal(one, same)
    assert not np.array_equal(one, other)


def test_an_impossible_nominal_set_is_refused():
    """There is nothing to draw around; the eigenvalue is told."""
    coils = iw.WindingSet.from_coupling(("a", "b"), [1.0, 1.0], [[1.0, 1.2], [1.2, 1.0]])
    with pytest.raises(iw.InvalidWindings, match=r"-0\.2"):
        engine.sample_windings(coils, iw.SampleWindings("T", 5, 0.1))
