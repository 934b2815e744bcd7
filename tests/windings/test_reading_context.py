"""The context of a reading: what frequency, capacitance, loss and the form of the instrument do, undone or refused."""

from __future__ import annotations

import numpy as np
import pytest

from interwind.errors import InvalidRequest
from interwind.model.readings import (
    OpenInductance,
    ReadingContext,
    ReadingForm,
    SeriesInductance,
    ShortedInductance,
)
from interwind_service.windings.identify import identify
from interwind_service.windings.intake import bare_inductance


def one_winding(inductance_h: float, context: ReadingContext):
    found = identify(("a",), [OpenInductance("a", inductance_h, 1e-3 * inductance_h, context)])
    return float(found.windings.inductance_h[0, 0]), {f.code for f in found.findings}


@pytest.mark.parametrize(("quality", "excess"), [(1.0, 1.0), (3.0, 1.0 / 9.0), (10.0, 0.01)])
def test_parallel_reading(quality, excess):
    """L_p = L_s (1 + 1/Q²) (textbook law): +100 % at Q = 1, +11 % at 3, +1 % at 10."""
    context = ReadingContext(1e4, ReadingForm.PARALLEL, quality)
    assert bare_inductance(1e-3 * (1.0 + excess), context) == pytest.approx(1e-3, rel=1e-12)
    assert bare_inductance(1e-3, ReadingContext(1e4, ReadingForm.SERIES, quality)) == pytest.approx(1e-3, rel=1e-12)


@pytest.mark.parametrize(
    ("shown_h", "context"),
    [
        # 60 pF at 100 kHz (derived): 1.0243 reads 1.0000 mH.
        (1e-3 / (1 - (2 * np.pi * 1e5) ** 2 * 1e-3 * 60e-12), ReadingContext(1e5, parallel_capacitance_f=60e-12)),
        # At 0.3 of the resonance (derived): 1 / (1 − 0.09), +9.9 %.
        (1e-3 / 0.91, ReadingContext(0.3 / (2 * np.pi * np.sqrt(1e-3 * 60e-12)), parallel_capacitance_f=60e-12)),
        (1e-3 * (1 + 1 / 9), ReadingContext(1e4, ReadingForm.PARALLEL, 3.0)),
    ],
    ids=["60 pF", "0.3 f0", "Q = 3"],
)
def test_corrections_are_applied_and_said(shown_h, context):
    """The bare inductance is used, and the correction is a finding."""
    bare, codes = one_winding(shown_h, context)

    assert bare == pytest.approx(1e-3, rel=1e-9)
    assert "READING_CORRECTED" in codes


def test_a_reading_inside_its_window_is_left_without_words():
    """Far below resonance nothing needs to be said."""
    bare, codes = one_winding(1e-3, ReadingContext(100.0, parallel_capacitance_f=60e-12))

    assert bare == pytest.approx(1e-3, rel=1e-6)
    assert codes == set()


def test_a_reading_near_resonance_is_refused_with_its_window():
    """At 0.7 of the resonance half of what is read is capacitance: refused, with where to measure."""
    resonance = 1.0 / (2 * np.pi * np.sqrt(1e-3 * 60e-12))
    shown = 1e-3 / (1 - 0.49)
    with pytest.raises(InvalidRequest, match=r"measure below .*it resonates at 6.5e\+05 Hz") as caught:
        one_winding(shown, ReadingContext(0.7 * resonance, parallel_capacitance_f=60e-12))

    assert caught.value.reason == "READING_OUTSIDE_WINDOW"
    assert caught.value.violations[0].field == "readings[0].context"


def shorted_secondary(frequency_hz: float) -> float:
    """Series inductance seen from 500 µH when 5 µH with 20 mΩ is shorted, k = 0.995: the impedance by hand."""
    first, second, k = 500e-6, 5e-6, 0.995
    omega = 2 * np.pi * frequency_hz
    mutual = k * np.sqrt(first * second)
    return ((1j * omega * first + (omega * mutual) ** 2 / (0.02 + 1j * omega * second)) / 1j / omega).real


def test_resistance_of_the_short():
    """488, 148, 6.99, 5.008 µH at 100 Hz, 1, 10, 100 kHz for a true 4.987 µH (derived): corrected where it can be."""
    reads = [shorted_secondary(f) for f in (1e2, 1e3, 1e4, 1e5)]
    for read_h, printed_h, digit_h in zip(
        reads, (488e-6, 148e-6, 6.99e-6, 5.008e-6), (1e-6, 1e-6, 1e-8, 1e-9), strict=True
    ):
        assert read_h == pytest.approx(printed_h, abs=digit_h / 2)

    def found(frequency_hz: float, shown_h: float):
        context = ReadingContext(frequency_hz, shorted_resistance_ohm=0.02)
        return identify(
            ("p", "s"),
            [
                OpenInductance("p", 500e-6, 5e-7),
                OpenInductance("s", 5e-6, 5e-9),
                ShortedInductance("p", ("s",), shown_h, 0.01 * shown_h, context),
            ],
        )

    for frequency_hz, shown_h in ((1e4, reads[2]), (1e5, reads[3])):
        answer = found(frequency_hz, shown_h)
        assert answer.leakage_h[0, 1] == pytest.approx(4.9875e-6, rel=1e-6)
        (finding,) = (f for f in answer.findings if f.code == "READING_CORRECTED")
        assert (finding.measured, finding.limit) == pytest.approx((shown_h, 4.9875e-6), rel=1e-6)
    for frequency_hz, shown_h in ((1e2, reads[0]), (1e3, reads[1])):
        with pytest.raises(InvalidRequest, match="measure above") as caught:
            found(frequency_hz, shown_h)
        assert caught.value.reason == "READING_OUTSIDE_WINDOW"


class Bench:
    """Two 1 mH windings, k = 0.99, 60 pF across each and 20 pF from the first start to the second finish."""

    L = 1e-3 * np.array([[1.0, 0.99], [0.99, 1.0]])

    def series_h(self, frequency_hz: float, aiding: bool) -> float:
        """Series inductance between the outer ends, node by node (nodal analysis by hand)."""
        omega = 2 * np.pi * frequency_hz
        ends = np.array([[1, -1], [0, 1]]) if aiding else np.array([[1, -1], [0, -1]])
        across = np.array([1, 0]) if aiding else np.array([1, -1])
        Y = ends.T @ np.linalg.inv(1j * omega * self.L) @ ends + 1j * omega * 60e-12 * ends.T @ ends
        Y = Y + 1j * omega * 20e-12 * np.outer(across, across)
        return float((np.linalg.inv(Y)[0, 0] / 1j / omega).real)

    def open_h(self, frequency_hz: float) -> float:
        return 1e-3 / (1 - (2 * np.pi * frequency_hz) ** 2 * 1e-3 * 60e-12)


@pytest.mark.parametrize(
    ("frequency_hz", "apparent"),
    [(1e4, 0.9905), (5e4, 1.004), (1e5, 1.049), (2e5, 1.31)],
    ids=["10", "50", "100", "200"],
)
def test_frequency_fakes_a_coupling_above_one(frequency_hz, apparent):
    """K from aiding and opposing readings (derived) reads 0.9905 to 1.31; with the capacitances stated it is 0.990.

    Across the aiding pair lie 60/4 + 60/4 + 20 pF, across the opposing one 60/4 + (60 + 20)/4.
    """
    bench = Bench()
    aiding, opposing = bench.series_h(frequency_hz, True), bench.series_h(frequency_hz, False)
    assert (aiding - opposing) / (4 * bench.open_h(frequency_hz)) == pytest.approx(
        apparent, abs=5e-4 if apparent < 1.2 else 5e-3
    )

    def context(capacitance_f: float) -> ReadingContext:
        return ReadingContext(frequency_hz, parallel_capacitance_f=capacitance_f)

    own = bench.open_h(frequency_hz)
    readings = [OpenInductance(label, own, 1e-3 * own, context(60e-12)) for label in ("a", "b")]
    readings.append(SeriesInductance(("a", "b"), True, aiding, 1e-3 * aiding, context(50e-12)))
    readings.append(SeriesInductance(("a", "b"), False, opposing, 1e-3 * opposing, context(35e-12)))
    found = identify(("a", "b"), readings)

    assert found.windings.coupling[0, 1] == pytest.approx(0.99, abs=2e-4)
    assert found.outliers == ()


def test_without_the_context_the_readings_are_said_to_be_impossible():
    """At 100 kHz with nothing stated the readings ask for k = 1.049, and the answer says that nothing shows them."""
    bench = Bench()
    readings = [OpenInductance(label, bench.open_h(1e5), 1e-6) for label in ("a", "b")]
    readings.append(SeriesInductance(("a", "b"), True, bench.series_h(1e5, True), 1e-6))
    readings.append(SeriesInductance(("a", "b"), False, bench.series_h(1e5, False), 1e-7))
    codes = {f.code for f in identify(("a", "b"), readings).findings}

    assert codes & {"READINGS_IMPOSSIBLE", "READINGS_CONTRADICT", "OUTLIER"}


BAD = [
    (ReadingContext(0.0), "frequency_hz"),
    (ReadingContext(1e3, quality_factor=0.0), "quality_factor"),
    (ReadingContext(1e3, parallel_capacitance_f=-1e-12), "parallel_capacitance_f"),
    (ReadingContext(1e3, shorted_resistance_ohm=(0.1, 0.2, 0.3)), "shorted_resistance_ohm"),
]


@pytest.mark.parametrize(("context", "field"), BAD, ids=[row[1] for row in BAD])
def test_bad_context_is_refused(context, field):
    """The path leads to the field."""
    with pytest.raises(InvalidRequest) as caught:
        identify(("a", "b"), [ShortedInductance("a", ("b",), 1e-3, 1e-6, context)])
    assert caught.value.violations[0].field == f"readings[0].context.{field}"
