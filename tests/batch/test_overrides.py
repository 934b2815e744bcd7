"""Columns of overrides: each names what it changes, and is refused by its path when it cannot."""

from __future__ import annotations

import link
import numpy as np
import pytest

import interwind as iw
from interwind_service.batch.overrides import lay_out

TWO = np.array([1.0, 2.0])


@pytest.mark.parametrize(
    ("columns", "path"),
    [
        ([iw.Vary("nobody", "resistance_ohm", TWO)], "columns[0].element.name"),
        ([iw.Vary("load", "inductance_h", TWO)], "columns[0].field"),
        ([iw.Vary("load", "a", TWO)], "columns[0].field"),
        ([iw.Vary("load", "resistance_ohm", TWO)] * 2, "columns[1].field"),
        ([iw.Vary("load", "resistance_ohm", TWO), iw.Vary("c1", "capacitance_f", TWO[:1])], "vary[1]"),
        ([iw.VaryCoupling("load", ("tx", "rx"), TWO)], "columns[0].windings_name"),
        ([iw.VaryCoupling("T1", ("tx", "ry"), TWO)], "columns[0].pair.label"),
        ([iw.VaryCoupling("T1", ("tx", "tx"), TWO)], "columns[0].pair"),
        ([iw.VaryCoupling("T1", ("tx", "rx"), TWO), iw.VaryCoupling("T1", ("rx", "tx"), TWO)], "columns[1].pair"),
        ([iw.VaryMatrix("T1", np.ones((2, 3, 3)))], "columns[0].inductance_h"),
        ([iw.VaryMatrix("T1", np.ones((2, 2, 2)))] * 2, "columns[1].windings_name"),
    ],
)  # fmt: skip
def test_a_column_that_does_not_fit_is_refused_by_its_path(columns, path):
    """The path of the column and field, and the choices there are."""
    with pytest.raises(iw.InvalidRequest) as caught:
        lay_out(link.network(), columns)
    assert path == caught.value.violations[0].field


def test_a_variant_is_a_new_network_and_the_base_stands_still():
    """Only what is named changes; the base keeps its numbers."""
    net = link.network()
    columns = [
        iw.Vary("load", "resistance_ohm", TWO),
        iw.VaryInductance("T1", ("tx", "rx"), np.array([1e-6, 2e-6])),
        iw.Vary("source", "phasor", np.array([3.0, 4.0])),
    ]
    overrides, numbers = lay_out(net, columns)
    variant = overrides.variant(numbers[1])
    assert (2.0, 4.0) == (variant.element("load").resistance_ohm, variant.element("source").phasor)
    assert (
        2e-6 == variant.element("T1").windings.inductance_h[0, 1] == variant.element("T1").windings.inductance_h[1, 0]
    )
    assert (link.LOAD_OHM, link.SOURCE_V) == (net.element("load").resistance_ohm, net.element("source").phasor)
    assert variant.element("c1") is net.element("c1")


def test_numbers_of_waveforms_and_gates_vary():
    """A dotted field reaches into a waveform or a gate."""
    net = iw.Network(
        "zero",
        [
            iw.VoltageSource("v", "a", "zero", waveform=iw.Sine(1.0, 50.0)),
            iw.Switch("s", "a", "b", closed=iw.Gate(1e-3, 4e-4)),
            iw.Resistor("r", "b", "zero", 1.0),
        ],
    )
    columns = [iw.Vary("v", "waveform.frequency_hz", np.array([60.0])), iw.Vary("s", "closed.on_s", np.array([2e-4]))]
    overrides, numbers = lay_out(net, columns)
    variant = overrides.variant(numbers[0])
    assert 60.0 == variant.element("v").waveform.frequency_hz
    assert 2e-4 == variant.element("s").closed.on_s


def test_a_coupling_stated_as_coupling_stays_one():
    """What was printed as a coupling keeps its digits: the variant is stated as coupling, too."""
    overrides, numbers = lay_out(link.network(), [iw.VaryCoupling("T1", ("tx", "rx"), np.array([0.7]))])
    coils = overrides.variant(numbers[0]).element("T1").windings
    assert coils.stated_as_coupling
    assert 0.7 == coils.coupling[0, 1]


def test_readings_make_the_set_that_fits_them():
    """Open, shorted and series readings of two windings, exact, give back the inductances they were read on."""
    rng = np.random.default_rng(7)
    L = np.array([[2e-3, 0.6e-3], [0.6e-3, 1e-3]]) * rng.uniform(0.9, 1.1, (3, 1, 1))
    readings = (
        iw.OpenInductance("tx", 1.0, 1e-9),
        iw.OpenInductance("rx", 1.0, 1e-9),
        iw.SeriesInductance(("tx", "rx"), True, 1.0, 1e-9),
        iw.ShortedInductance("tx", ("rx",), 1.0, 1e-9),
    )
    series = L[:, 0, 0] + L[:, 1, 1] + 2 * L[:, 0, 1]
    values = np.stack([L[:, 0, 0], L[:, 1, 1], series, L[:, 0, 0] - L[:, 0, 1] ** 2 / L[:, 1, 1]], axis=1)
    overrides, numbers = lay_out(link.network(), [iw.VaryReadings("T1", readings, values)])
    for k in range(3):
        coils = overrides.variant(numbers[k]).element("T1").windings
        assert np.allclose(L[k], coils.inductance_h, rtol=1e-6)
        assert np.array_equal([0.12, 0.09], coils.resistance_ohm)
