"""Poles, residues, zeros and participation against closed forms; adaptive sweeps miss no peak."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw
from interwind_service.response.adaptive import adaptive_response
from interwind_service.response.frequency import frequency_response
from interwind_service.response.poles import poles

from .test_sweep import sections

Q = 1000.0
SELF_H, CAPACITANCE_F, COUPLING = 10e-6, 2.5e-9, 0.0007


def link() -> iw.Network:
    """Two coupled resonators of quality factor 1000, driven in series."""
    omega = 1.0 / np.sqrt(SELF_H * CAPACITANCE_F)
    pair = iw.WindingSet.from_coupling(
        ("near", "far"), [SELF_H, SELF_H], [[1, COUPLING], [COUPLING, 1]], omega * SELF_H / Q
    )
    return iw.Network(
        "g",
        [
            iw.VoltageSource("drive", "s", "g", phasor=1.0),
            iw.Capacitor("c1", "s", "a", CAPACITANCE_F),
            iw.Windings("T", pair, {"near": ("a", "g"), "far": ("b", "g")}),
            iw.Capacitor("c2", "b", "g", CAPACITANCE_F),
        ],
    )


def test_poles_of_a_series_resonance():
    """P = −R/2L ± j√(1/LC − (R/2L)²), Q = |p| L/R; the current has a zero at 0 (derived)."""
    R, L, C = 10.0, 1e-3, 1e-6
    network = iw.Network(
        "g",
        [
            iw.VoltageSource("v", "a", "g", phasor=2.0), iw.Resistor("r", "a", "b", R),
            iw.Inductor("l", "b", "c", L), iw.Capacitor("c", "c", "g", C),
        ],
    )  # fmt: skip

    report = poles(network, [iw.ElementCurrent("l"), iw.NodeVoltage("c")])

    alpha = R / (2 * L)
    p = complex(-alpha, np.sqrt(1 / (L * C) - alpha**2))
    assert report.pole_per_s == pytest.approx([p], rel=1e-12)
    assert report.quality_factor == pytest.approx([np.sqrt(L / C) / R], rel=1e-12)
    # i(s) = 2 (s/L) / ((s − p)(s − p*)): residue 2 (p/L) / (p − p*); v_c = i / (s C).
    assert report.residue[0] == pytest.approx([2 * p / L / (2j * p.imag), 2 / (L * C) / (2j * p.imag)], rel=1e-11)
    assert np.abs(report.zero_per_s[0]) == pytest.approx([0.0], abs=1e-6 * abs(p))
    assert report.zero_per_s[1].size == 0
    assert report.participation.sum(axis=1) == pytest.approx([1.0])


def test_modes_of_coupled_resonators_split():
    """Symmetric resonators: one mode of L (1 + k), one of L (1 − k), all four stores sharing alike (derived)."""
    report = poles(link(), [iw.WindingCurrent("T", "far")])

    lossless = 1.0 / np.sqrt(SELF_H * CAPACITANCE_F * np.array([1 + COUPLING, 1 - COUPLING]))
    assert np.abs(report.pole_per_s) == pytest.approx(lossless, rel=1e-12)
    assert report.participation == pytest.approx(np.full((2, 4), 0.25), rel=1e-9)
    assert report.participants == (("c1", ""), ("c2", ""), ("T", "near"), ("T", "far"))
    (close,) = report.findings  # k below 1/Q: one peak shows both
    assert close.code == "MODES_WITHIN_BANDWIDTH"


def test_residues_rebuild_the_response():
    """Σ r/(s − p) and the conjugates differ from the response by a constant only, the direct part."""
    network = sections(12)
    asked = [iw.NodeVoltage("n5"), iw.WindingCurrent("T", "w3")]
    report = poles(network, asked)
    frequency_hz = np.array([1e4, 3e5, 2e6])
    s = 2j * np.pi * frequency_hz[:, None, None]

    pairs = report.frequency_hz[:, None] > 0
    sums = (report.residue / (s - report.pole_per_s[:, None])).sum(axis=1)
    sums += np.where(pairs, report.residue.conj() / (s - report.pole_per_s.conj()[:, None]), 0).sum(axis=1)
    rest = frequency_response(network, frequency_hz, asked).samples - sums

    assert np.abs(rest - rest[0]).max() < 1e-9 * np.abs(sums).max()


def test_zeros_silence_the_response():
    """At a zero on the axis the answer vanishes: a trap in the path of a divider (derived)."""
    L, C = 1e-3, 1e-6
    network = iw.Network(
        "g",
        [
            iw.VoltageSource("v", "a", "g", phasor=1.0), iw.Resistor("r1", "a", "b", 50.0),
            iw.Inductor("l", "b", "c", L), iw.Capacitor("c", "c", "g", C), iw.Resistor("r2", "b", "g", 50.0),
        ],
    )  # fmt: skip

    report = poles(network, [iw.NodeVoltage("b")])

    assert report.zero_per_s[0] == pytest.approx([1j / np.sqrt(L * C)], rel=1e-9)


def test_adaptive_sweep_of_a_sharp_link():
    """Q = 1000 in four decades: the peak within 0.01 dB and 1 ppm of a dense search, in at most 300 points."""
    asked = [iw.WindingCurrent("T", "far"), iw.WindingCurrent("T", "near")]

    response = adaptive_response(link(), iw.AdaptiveSweep(1e4, 1e8), asked)

    assert response.frequency_hz.size <= 300
    near = 1.0 / (2 * np.pi * np.sqrt(SELF_H * CAPACITANCE_F))
    dense = np.linspace(near * 0.995, near * 1.005, 100_001)
    exact = frequency_response(link(), dense, asked)
    for item in asked:
        found, truth = np.abs(response[item]), np.abs(exact[item])
        assert abs(20 * np.log10(found.max() / truth.max())) < 0.01
        assert response.frequency_hz[found.argmax()] == pytest.approx(dense[truth.argmax()], rel=1e-6)
    (told,) = [finding for finding in response.findings if finding.code == "ADAPTIVE_PEAK_ERROR"]
    assert told.measured <= told.limit == 0.01


@pytest.mark.parametrize(
    ("sweep", "field"),
    [
        (iw.AdaptiveSweep(0.0, 1.0), "start_hz"),
        (iw.AdaptiveSweep(2.0, 1.0), "stop_hz"),
        (iw.AdaptiveSweep(1.0, 2.0, 0.0), "tolerance_db"),
    ],
)
def test_spans_that_make_no_sense(sweep, field):
    """Each is refused by its field."""
    with pytest.raises(iw.InvalidRequest) as caught:
        adaptive_response(link(), sweep)

    assert caught.value.violations[0].field == field


def test_modes_closer_than_their_bandwidth_are_said():
    """Two strongly damped, equal resonators."""
    R, L, C = 20.0, 1e-3, 1e-6
    elements = [iw.VoltageSource("v", "a", "g", phasor=1.0)]
    for k in "12":
        elements += [
            iw.Resistor(f"r{k}", "a", f"b{k}", R * int(k)), iw.Inductor(f"l{k}", f"b{k}", f"c{k}", L),
            iw.Capacitor(f"c{k}", f"c{k}", "g", C),
        ]  # fmt: skip

    (finding,) = poles(iw.Network("g", elements), [iw.ElementCurrent("v")]).findings

    assert finding.code == "MODES_WITHIN_BANDWIDTH"
