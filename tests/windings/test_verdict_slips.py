"""Signs, factors, units and sides: the slip is named with the value that would fit, and silence where there is none."""

from __future__ import annotations

import numpy as np
import pytest

from interwind.model.finding import Finding, Verdict
from interwind.model.report import ValidityReport
from interwind.model.windings import WindingSet
from interwind_service.windings.verdict import check

TURNS = np.array([40, 5, 8, 12])
SLIPS = {"SIGN_FLIPPED", "FACTOR_TWO", "UNIT_SLIP", "OTHER_SIDE", "UNLIKELY_MAGNITUDE", "DUPLICATE_WINDINGS"}


def stack_h(turns: np.ndarray = TURNS) -> np.ndarray:
    """Inductance matrix of a tight stack, H: L_ij = N_i N_j (150 + 0.7 min(z_i, z_j) + 0.3 δ_ij) nH."""
    z = np.linspace(0.3, 2.4, len(turns))
    return 1e-9 * np.outer(turns, turns) * (150 + 0.7 * np.minimum.outer(z, z) + 0.3 * np.eye(len(turns)))


def coils(L: np.ndarray) -> WindingSet:
    return WindingSet([f"w{i + 1}" for i in range(len(L))], L)


def slips(report: ValidityReport) -> list[Finding]:
    return [finding for finding in report.findings if finding.code in SLIPS]


def test_a_clean_set_has_no_slips():
    """Nothing is suspected in a stack that is right, nor in loose coils of any kind."""
    assert slips(check(coils(stack_h()))) == []
    rng = np.random.default_rng(1)
    for _ in range(50):
        n = int(rng.integers(2, 7))
        A = rng.normal(size=(n, n + 1)) * 10 ** rng.uniform(-1, 1, (n, 1))
        assert slips(check(coils(1e-6 * A @ A.T))) == []


def test_single_flipped_pair_is_named():
    """One mutual of the wrong sign: named, with the opposite value as the one that fits."""
    L = stack_h()
    L[0, 2] = L[2, 0] = -L[0, 2]
    report = check(coils(L))
    (finding,) = slips(report)

    assert report.verdict is Verdict.INVALID
    assert (finding.code, finding.windings) == ("SIGN_FLIPPED", ("w1", "w3"))
    assert finding.limit == -finding.measured > 0.98


def test_two_flipped_pairs_are_named_together():
    """Two pairs of the wrong sign: no single change cures, the two named together do."""
    L = stack_h(np.array([40, 5, 8, 12, 20, 9]))
    for i, j in ((0, 2), (3, 5)):
        L[i, j] = L[j, i] = -L[i, j]
    report = check(coils(L))

    assert report.culprits == ()
    assert {f.windings for f in slips(report)} == {("w1", "w3"), ("w4", "w6")}


def test_whole_winding_reversed_raises_no_alarm_but_is_said():
    """A reversed winding changes nothing that can be seen; the report says so in plain words."""
    dots = np.array([1, 1, -1, 1])
    report = check(coils(stack_h() * np.outer(dots, dots)))

    assert slips(report) == []
    assert report.verdict is Verdict.VALID
    assert "REVERSAL_NOT_SHOWN" in {f.code for f in report.findings}


@pytest.mark.parametrize("factor", [2.0, 0.5])
def test_factor_two_in_a_mutual(factor):
    """A mutual counted twice or once too little is recognised."""
    L = stack_h()
    L[1, 3] *= factor
    L[3, 1] *= factor
    (finding,) = slips(check(coils(L)))

    assert (finding.code, finding.windings) == ("FACTOR_TWO", ("w2", "w4"))
    assert finding.limit == pytest.approx(finding.measured / factor)


@pytest.mark.parametrize("slip", [1e3, 1e-3, 1e6])
def test_unit_slip_in_a_mutual(slip):
    """A mutual in the wrong unit is recognised, with the value in H that would fit."""
    L = stack_h()
    true = L[1, 3]
    L[1, 3] = L[3, 1] = true * slip
    (finding,) = slips(check(coils(L)))

    assert (finding.code, finding.windings) == ("UNIT_SLIP", ("w2", "w4"))
    assert f"M = {true:.6g} H" in finding.message


@pytest.mark.parametrize("slip", [1e3, 1e-3])
def test_unit_slip_in_a_self_inductance(slip):
    """A self-inductance in the wrong unit spoils its whole row; the value that would fit is named."""
    L = stack_h()
    true = L[2, 2]
    L[2, 2] *= slip
    (finding,) = slips(check(coils(L)))

    assert (finding.code, finding.windings, finding.field) == ("UNIT_SLIP", ("w3",), "inductance_h[2][2]")
    assert finding.limit == pytest.approx(true)


def test_unlikely_magnitude():
    """1000 H beside nanohenries is doubted with the value that would fit; a 1 : 5000 current transformer is not."""
    K = np.array([[1, 0.98, 0.97], [0.98, 1, 0.98], [0.97, 0.98, 1]])
    report = check(WindingSet.from_coupling(list("abc"), [1000.0, 20e-9, 5e-9], K))
    (finding,) = slips(report)
    assert (finding.code, finding.windings) == ("UNLIKELY_MAGNITUDE", ("a",))
    assert finding.limit == pytest.approx(1e-6)

    transformer = WindingSet.from_coupling(("bar", "winding"), [2e-6, 50.0], K[:2, :2])
    assert slips(check(transformer)) == []
    assert slips(check(WindingSet(("a",), [[1e6]])))[0].code == "UNLIKELY_MAGNITUDE"


@pytest.mark.parametrize("power", [1, -1])
def test_leakage_referred_to_the_other_side(power):
    """40 and 5 turns: a leakage entered on the wrong side is off by 64, stays possible one way, and is recognised."""
    L = stack_h()
    d = np.sqrt(L.diagonal())
    K = L / np.outer(d, d)
    true = K[0, 1]
    K[0, 1] = K[1, 0] = np.sqrt(1 - (1 - true**2) * 64.0**power)
    report = check(WindingSet.from_coupling([f"w{i + 1}" for i in range(4)], L.diagonal(), K))
    findings = [f for f in slips(report) if f.code == "OTHER_SIDE"]

    assert [f.windings for f in findings] == [("w1", "w2")]
    assert findings[0].limit == pytest.approx(true, abs=1e-4)
    assert "REFERRAL_NOT_SHOWN" in {f.code for f in report.findings}


def test_duplicate_windings():
    """The same conductor entered twice agrees in every entry; perfectly coupled windings of other turns do not."""
    L = stack_h()[np.ix_([0, 1, 1, 2], [0, 1, 1, 2])]
    (finding,) = slips(check(coils(L)))
    assert (finding.code, finding.windings) == ("DUPLICATE_WINDINGS", ("w2", "w3"))

    assert slips(check(coils(1e-6 * np.outer(TURNS, TURNS)))) == []
