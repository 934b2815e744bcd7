"""What is read off a set, against closed forms, identities and Monte Carlo."""

from __future__ import annotations

import numpy as np
import pytest

from interwind.errors import InvalidRequest, InvalidWindings
from interwind.model.characterization import EquivalentKind
from interwind.model.connection import InParallel, InSeries, Open, Shorted
from interwind.model.windings import WindingSet
from interwind_service.windings.characterize import characterize
from interwind_service.windings.equivalents import inductance_of, star_legs


def random_set(n: int, seed: int, resistance_ohm=0.0) -> WindingSet:
    rng = np.random.default_rng(seed)
    N, z = rng.uniform(5, 59, n), np.sort(rng.uniform(0.2, 3, n))
    L = np.outer(N, N) * (150 + 3 * np.minimum.outer(z, z) + 0.3 * np.eye(n)) * 1e-9
    return WindingSet(tuple("abcdefgh"[:n]), L, resistance_ohm)


@pytest.mark.parametrize("n", [2, 3, 4, 8])
@pytest.mark.parametrize("seed", [0, 1])
def test_leakages_are_schur_complements(n, seed):
    """Pairs and all-shorted against blocks of the inverse: the independent route to the same numbers."""
    coils = random_set(n, seed)
    report = characterize(coils)
    L = coils.inductance_h

    np.testing.assert_allclose(report.inverse_inductance_per_h @ L, np.eye(n), rtol=0, atol=1e-9)
    np.testing.assert_allclose(report.all_shorted_leakage_h, 1.0 / np.linalg.inv(L).diagonal(), rtol=1e-10)
    for i in range(n):
        for j in range(n):
            if i != j:
                block = L[np.ix_([i, j], [i, j])]
                np.testing.assert_allclose(report.leakage_h[i, j], np.linalg.det(block) / L[j, j], rtol=1e-9)
    # From both sides the leakages stand as the self-inductances (derived).
    assert report.leakage_h[0, 1] / report.leakage_h[1, 0] == pytest.approx(L[0, 0] / L[1, 1], rel=1e-12)


@pytest.mark.parametrize("n", [2, 3, 5, 8])
def test_exact_equivalents_show_the_set_at_their_terminals(n):
    """T, π, three-winding star and cantilever give every leakage back to 1e-10, and L itself."""
    coils = random_set(n, 3)
    exact = [c for c in characterize(coils).equivalents if c.kind is not EquivalentKind.STAR or coils.size <= 3]

    assert {c.kind for c in exact} >= {EquivalentKind.CANTILEVER}
    assert len(exact) == {2: 3, 3: 2}.get(n, 1)
    for circuit in exact:
        np.testing.assert_allclose(inductance_of(circuit, coils.labels), coils.inductance_h, rtol=1e-10)
        assert np.abs(circuit.leakage_error).max() < 1e-10


def test_star_of_a_concentric_set_is_off_by_half():
    """Pair leakages 4.2, 7.4, 10.6, 4.2, 7.4, 4.2: the best star misses them by +51, −14, −10, −25, −14, +51 %.

    Derived: least squares by numpy on the six equations x_i + x_j = ℓ_ij.
    """
    upper = np.triu_indices(4, 1)
    leakage = np.zeros((4, 4))
    leakage[upper] = [4.2, 7.4, 10.6, 4.2, 7.4, 4.2]
    leakage += leakage.T
    design = np.zeros((6, 4))
    design[np.arange(6), upper[0]] = design[np.arange(6), upper[1]] = 1.0
    legs = star_legs(leakage)
    np.testing.assert_allclose(legs, np.linalg.lstsq(design, leakage[upper], rcond=None)[0], rtol=1e-12)
    error = (legs[:, None] + legs)[upper] / leakage[upper] - 1.0
    np.testing.assert_allclose(100 * error, [51, -14, -10, -25, -14, 51], rtol=0, atol=0.5)

    # The same as a set: magnetising 1000 times the leakage, turns 1.
    L = 1e4 + 0.5 * (leakage[0][:, None] + leakage[0][None, :] - leakage)
    report = characterize(WindingSet(("1", "2", "3", "4"), L))
    star = next(c for c in report.equivalents if c.kind is EquivalentKind.STAR)
    np.testing.assert_allclose(100 * star.leakage_error[upper], [51, -14, -10, -25, -14, 51], rtol=0, atol=0.6)
    (finding,) = (f for f in report.findings if f.code == "STAR_IS_A_FIT")
    assert finding.windings in {("1", "2"), ("3", "4"), ("2", "1"), ("4", "3")}


@pytest.mark.parametrize(
    ("leakages", "legs", "possible"),
    [((10.0, 18.0, 6.0), (11.0, -1.0, 7.0), True), ((4.0, 18.0, 4.0), (9.0, -5.0, 9.0), False)],
)
def test_a_negative_star_leg_is_harmless_or_not(leakages, legs, possible):
    """(10, 18, 6) % gives legs 11, −1, 7 and exists; (4, 18, 4) % gives 9, −5, 9 and does not (√18 > √4 + √4)."""
    leakage = np.zeros((3, 3))
    leakage[np.triu_indices(3, 1)] = leakages
    leakage += leakage.T
    np.testing.assert_allclose(star_legs(leakage), legs, rtol=1e-12)
    coils = WindingSet(("1", "2", "3"), 1e4 + np.diag(legs))
    if not possible:
        with pytest.raises(InvalidWindings, match="repair"):
            characterize(coils)
        return
    report = characterize(coils)
    star = [f for f in report.findings if f.code == "NEGATIVE_LEG" and f.field == "equivalents[0]"]
    assert [f.windings for f in star] == [("2",)]


def test_error_bars_agree_with_monte_carlo():
    """First-order bars of pair and all-shorted leakages against 20 000 draws of the stated uncertainties, to 3 %."""
    true = random_set(4, 5)
    rng = np.random.default_rng(0)
    size = 2e-4 * np.sqrt(np.outer(true.self_inductance_h, true.self_inductance_h))
    noise = rng.normal(size=(20000, 4, 4))
    noise = np.tril(noise) + np.swapaxes(np.tril(noise, -1), 1, 2)

    stated_h = WindingSet(true.labels, true.inductance_h, inductance_uncertainty_h=size)
    report = characterize(stated_h)
    draws = true.inductance_h + size * noise
    own = np.einsum("kii->ki", draws)
    leakage = own[:, :, None] - draws**2 / own[:, None, :]
    off = ~np.eye(4, dtype=bool)
    np.testing.assert_allclose(report.leakage_uncertainty_h[off], leakage.std(axis=0)[off], rtol=0.03)
    shorted = 1.0 / np.einsum("kii->ki", np.linalg.inv(true.inductance_h + 0.1 * size * noise))
    small = characterize(WindingSet(true.labels, true.inductance_h, inductance_uncertainty_h=0.1 * size))
    np.testing.assert_allclose(small.all_shorted_leakage_uncertainty_h, shorted.std(axis=0), rtol=0.03)

    K, own = true.coupling, true.self_inductance_h
    stated_k = WindingSet.from_coupling(
        true.labels, own, K, coupling_uncertainty=1e-5, inductance_uncertainty_h=0.01 * np.diag(own)
    )
    report = characterize(stated_k)
    k = K + 1e-5 * noise * off
    L11 = own * (1 + 0.01 * rng.normal(size=(20000, 4)))
    np.testing.assert_allclose(
        report.leakage_uncertainty_h[off], (L11[:, :, None] * (1 - k**2)).std(axis=0)[off], rtol=0.03
    )
    shorted = L11 / np.einsum("kii->ki", np.linalg.inv(k))
    np.testing.assert_allclose(report.all_shorted_leakage_uncertainty_h, shorted.std(axis=0), rtol=0.03)
    assert np.all(np.isnan(characterize(true).leakage_uncertainty_h[off]))


def test_printed_digits_become_bars():
    """K = 0.9950 to three decimals: half a unit over √3 moves the leakage by 2 k / (1 − k²) of itself (derived)."""
    coils = WindingSet.from_coupling(("a", "b"), [1e-3, 1e-3], [[1, 0.995], [0.995, 1]], coupling_decimals=3)
    report = characterize(coils)
    relative = report.leakage_uncertainty_h[0, 1] / report.leakage_h[0, 1]

    assert relative == pytest.approx(0.0005 / np.sqrt(3) * 2 * 0.995 / (1 - 0.995**2), rel=1e-9)


def test_modes_of_equal_phases():
    """N equal coils with one k: L (1 + (N − 1) k) once and L (1 − k) else, energy shared alike (derived)."""
    L = 1e-5 * (0.7 * np.eye(4) + 0.3)
    modes = characterize(WindingSet(("a", "b", "c", "d"), L, 0.01)).modes

    np.testing.assert_allclose(modes.inductance_h, 1e-5 * np.array([0.7, 0.7, 0.7, 1.9]), rtol=1e-12)
    np.testing.assert_allclose(modes.energy_share[:, -1], 0.25, rtol=1e-9)
    np.testing.assert_allclose(modes.energy_share.sum(axis=0), 1.0, rtol=1e-12)
    np.testing.assert_allclose(modes.time_constant_s, 1e-3 * np.array([0.7, 0.7, 0.7, 1.9]), rtol=1e-12)
    np.testing.assert_allclose(np.linalg.norm(modes.decay_current_a, axis=0), 1.0, rtol=1e-12)


def test_perfect_coupling_has_no_inverse_and_says_so():
    """L = n nᵀ: leakage zero, no π nor cantilever, NaN in the inverse."""
    report = characterize(WindingSet(("a", "b"), 1e-3 * np.array([[1.0, 2.0], [2.0, 4.0]])))

    assert np.all(np.isnan(report.inverse_inductance_per_h))
    np.testing.assert_array_equal(report.all_shorted_leakage_h, [0.0, 0.0])
    assert [c.kind for c in report.equivalents] == [EquivalentKind.T]
    assert "PERFECT_COUPLING" in {f.code for f in report.findings}


def test_equal_coils_in_parallel():
    """N equal coils side by side: (L / N)(1 + (N − 1) k), the resistance R / N (derived)."""
    coils = WindingSet(("a", "b", "c"), 1e-3 * (0.4 * np.eye(3) + 0.6), 0.3)
    joined = characterize(coils, [InParallel("all", ("a", "b", "c"))]).windings

    np.testing.assert_allclose(joined.inductance_h, [[1e-3 / 3 * 2.2]], rtol=1e-12)
    np.testing.assert_allclose(joined.resistance_matrix_ohm, [[0.1]], rtol=1e-12)


def test_connections_agree_with_impedances_at_high_frequency():
    """Series, parallel and shorted together against the node equations at 1 GHz, where loss no longer counts."""
    coils = random_set(6, 8, np.full(6, 0.01))
    connections = [InSeries("s", ("a", "b"), (True, False)), InParallel("p", ("c", "d")), Shorted("e"), Open("f")]
    joined = characterize(coils, connections).windings
    assert joined.labels == ("p", "s")

    Z = np.diag(np.full(6, 0.01)) + 2j * np.pi * 1e9 * coils.inductance_h
    # Unknown currents a..e (f open), branch voltages: v_s = v_a − v_b, v_p = v_c = v_d, v_e = 0.
    constraint = np.array([[1, 1, 0, 0, 0.0]])  # i_a = −i_b: the series current leaves b at its start
    A = np.zeros((8, 8), dtype=complex)
    A[:5, :5] = Z[:5, :5]
    A[:5, 5] = [-1, 0, 0, 0, 0]  # v_a
    A[:5, 6] = [0, -1, 0, 0, 0]  # v_b
    A[:5, 7] = [0, 0, -1, -1, 0]  # v_p
    A[5, :5] = constraint
    A[6, [0]] = 1.0
    A[7, [2, 3]] = 1.0
    for drive, row in ((6, "s"), (7, "p")):
        right = np.zeros(8, dtype=complex)
        right[drive] = 1.0
        x = np.linalg.solve(A, right)
        seen = {"s": x[5] - x[6], "p": x[7]}
        for other in ("s", "p"):
            expected = seen[other].imag / (2 * np.pi * 1e9)
            assert joined.inductance_h[joined.index(other), joined.index(row)] == pytest.approx(expected, rel=1e-6)


def test_sharing_has_its_limits():
    """From resistances at 0 Hz to rows of the inverse inductance matrix at high frequency (derived); sums to 1."""
    coils = random_set(4, 2, [0.05, 0.02, 0.1, 0.03])
    frequency_hz = np.array([0.0, 1e2, 1e4, 1e9])
    (sharing,) = characterize(coils, [InParallel("p", ("b", "c"))], frequency_hz).sharing
    direct = (1 / np.array([0.02, 0.1])) / (1 / 0.02 + 1 / 0.1)
    inductive = np.linalg.inv(coils.inductance_h[1:3, 1:3]).sum(axis=1)

    np.testing.assert_allclose(sharing.share.sum(axis=1), 1.0, rtol=1e-12)
    np.testing.assert_allclose(sharing.direct_share, direct, rtol=1e-12)
    np.testing.assert_allclose(sharing.share[0], direct, rtol=1e-12)
    np.testing.assert_allclose(sharing.inductive_share, inductive / inductive.sum(), rtol=1e-9)
    np.testing.assert_allclose(sharing.share[-1], sharing.inductive_share, rtol=1e-6)
    Z = np.diag([0.02, 0.1]) + 2j * np.pi * 1e4 * coils.inductance_h[1:3, 1:3]
    current = np.linalg.solve(Z, np.ones(2))
    np.testing.assert_allclose(sharing.share[2], current / current.sum(), rtol=1e-9)


def test_sharing_feels_a_shorted_winding():
    """A shorted winding changes the sharing; against the node equations with its voltage held at zero."""
    coils = random_set(3, 4, [0.02, 0.05, 0.04])
    (sharing,) = characterize(coils, [InParallel("p", ("a", "b")), Shorted("c")], [5e3]).sharing
    Z = np.diag([0.02, 0.05, 0.04]) + 2j * np.pi * 5e3 * coils.inductance_h
    current = np.linalg.solve(Z, [1.0, 1.0, 0.0])[:2]

    np.testing.assert_allclose(sharing.share[0], current / current.sum(), rtol=1e-9)


BAD = [
    ([InSeries("s", ("a", "z"))], (), "connections[0].windings"),
    ([InSeries("c", ("a", "b"))], (), "label"),
    ([Shorted("a"), Open("b"), Open("c")], (), "connections"),
    (["a"], (), "connections[0]"),
    ([], [50.0], "frequency_hz"),
    ([InParallel("p", ("a", "b"))], [-1.0], "frequency_hz[0]"),
]


@pytest.mark.parametrize(("connections", "frequency_hz", "field"), BAD)
def test_bad_connections_are_refused_with_their_field(connections, frequency_hz, field):
    """Each a typed error that names the place."""
    with pytest.raises(InvalidRequest) as caught:
        characterize(random_set(3, 0), connections, frequency_hz)
    assert caught.value.violations[0].field == field


def test_a_connection_that_shorts_itself_is_refused():
    """Perfectly coupled windings of unequal turns in parallel leave no inductance."""
    coils = WindingSet(("a", "b"), 1e-3 * np.array([[1.0, 2.0], [2.0, 4.0]]))
    with pytest.raises(InvalidRequest, match="unequal turns") as caught:
        characterize(coils, [InParallel("p", ("a", "b"))])
    assert caught.value.reason == "SHORTED_BY_CONNECTION"


def test_sets_without_an_answer_are_refused():
    """An unknown pair, and a set that cannot exist."""
    with pytest.raises(InvalidRequest, match="repair can fill it"):
        characterize(WindingSet(("a", "b"), [[1e-3, np.nan], [np.nan, 1e-3]]))
    K = [[1, 0.9, 0.9], [0.9, 1, 0.5], [0.9, 0.5, 1]]
    with pytest.raises(InvalidWindings, match="mend it with repair"):
        characterize(WindingSet.from_coupling(("a", "b", "c"), [1e-4] * 3, K))
