"""Readings as they come off the bench: checked, cleaned of what else was in the circuit, or refused.

    shown in parallel       L_s = L_p / (1 + 1/Q²)
    capacitance across      1/Z = 1/Z_read − jωC; without loss L = L_read / (1 + ω² L_read C)
    resistance of a short   stays in the model of the reading (`readings`): its correction needs the shorted winding

A reading is usable as it stands where both corrections stay below a hundredth: well above R/(2πL) of the shorted
winding, well below the resonance f0 = 1/(2π √(LC)).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from interwind.errors import InvalidRequest, field_path
from interwind.model.finding import Finding, Severity
from interwind.model.frozen import FloatArray
from interwind.model.readings import (
    READINGS,
    EffectiveLeakage,
    OpenInductance,
    PairLeakage,
    Reading,
    ReadingContext,
    ReadingForm,
    SeriesInductance,
    ShortedInductance,
)
from interwind_service.tolerances import (
    CORRECTION_LIMIT,
    CORRECTION_NEGLIGIBLE,
    DERIVATIVE_STEP,
    READING_LARGEST,
    READING_LEAST,
)
from interwind_service.windings.readings import predicted, stated_value, windings_of

POSITIVE = (OpenInductance, ShortedInductance, SeriesInductance, PairLeakage)


@dataclass(frozen=True, slots=True, eq=False)
class Taken:
    """A reading as the fit uses it: its corrected value and standard deviation, and what is to be said about it."""

    reading: Reading
    value: float
    uncertainty: float
    findings: tuple[Finding, ...]


def taken(readings: Sequence[Reading], labels: Sequence[str]) -> list[Taken]:
    """Check every reading against the labels and its domain, and correct it for its context.

    Raises
    ------
    InvalidRequest : a reading is no reading, names no winding, has no positive uncertainty, or lies outside its usable
        window by more than can be corrected.
    """
    if not len(readings):
        raise InvalidRequest.at("readings", "none found; give at least one open-circuit inductance for each winding")
    result = []
    for position, reading in enumerate(readings):
        with field_path(f"readings[{position}]"):
            _require(reading, labels)
            result.append(_corrected(reading, position))
    return result


def short_corrections(used: Sequence[Taken], L: FloatArray, labels: Sequence[str]) -> list[Finding]:
    """Report how much the resistance of each short changed its reading, now that L (n, n) is known; refuse too much."""
    findings = []
    for position, one in enumerate(used):
        reading = one.reading
        if not isinstance(reading, ShortedInductance) or reading.context is None:
            continue
        if not any(reading.context.shorted_resistance_ohm):
            continue
        with_resistance, _ = predicted(reading, L, labels)
        without, _ = predicted(replace(reading, context=None), L, labels)
        part = with_resistance / without - 1.0
        # The correction grows with (R / ωL)², so the edge of the window follows from its size here.
        window = reading.context.frequency_hz * float(np.sqrt(abs(part) / CORRECTION_NEGLIGIBLE))
        with field_path(f"readings[{position}]"):
            findings += _judged(reading, position, part, with_resistance, without, f"above {window:.3g} Hz")
    return findings


def _require(reading: Reading, labels: Sequence[str]) -> None:
    if not isinstance(reading, READINGS):
        raise InvalidRequest.at("", f"{reading!r} found; a reading is expected")
    named = windings_of(reading) + ((reading.reference,) if isinstance(reading, EffectiveLeakage) else ())
    for label in named:
        if label not in labels:
            raise InvalidRequest.at("windings", f"{label!r} is no winding; there are {', '.join(labels)}")
    value, uncertainty = stated_value(reading)
    if not (np.isfinite(value) and (value > 0 or not isinstance(reading, POSITIVE))):
        raise InvalidRequest.at(
            "inductance_h",
            f"{value!r} found; a finite inductance above 0 H is expected. A negative one was read above resonance",
        )
    if value != 0 and not READING_LEAST <= abs(value) <= READING_LARGEST:
        raise InvalidRequest.at(
            "inductance_h",
            f"{value!r} found; a size of {READING_LEAST:g} to {READING_LARGEST:g}, or 0 where it may be, is expected",
        )
    if not (np.isfinite(uncertainty) and uncertainty > 0):
        raise InvalidRequest.at(
            "uncertainty_h", f"{uncertainty!r} found; one standard deviation above 0 is expected: state what you know"
        )
    if isinstance(reading, PairLeakage) and not (np.all(np.isfinite(reading.turns)) and all(reading.turns)):
        raise InvalidRequest.at("turns", f"{reading.turns!r} found; finite numbers other than 0 are expected")
    context = getattr(reading, "context", None)
    if context is not None:
        with field_path("context"):
            _require_context(context, len(getattr(reading, "shorted", ())))


def _require_context(context: ReadingContext, shorted: int) -> None:
    if not (np.isfinite(context.frequency_hz) and context.frequency_hz > 0):
        raise InvalidRequest.at("frequency_hz", f"{context.frequency_hz!r} found; a frequency above 0 Hz is expected")
    if not context.quality_factor > 0:
        raise InvalidRequest.at("quality_factor", f"{context.quality_factor!r} found; a number above 0 is expected")
    if not (np.isfinite(context.parallel_capacitance_f) and context.parallel_capacitance_f >= 0):
        raise InvalidRequest.at(
            "parallel_capacitance_f", f"{context.parallel_capacitance_f!r} found; 0 F or more is expected"
        )
    resistance = np.array(context.shorted_resistance_ohm)
    if not np.all(np.isfinite(resistance) & (resistance >= 0)):
        raise InvalidRequest.at("shorted_resistance_ohm", f"{resistance.tolist()} found; 0 ohm or more is expected")
    if len(resistance) not in (1, shorted) or (shorted == 0 and np.any(resistance)):
        raise InvalidRequest.at(
            "shorted_resistance_ohm", f"{len(resistance)} values found for {shorted} shorted windings; one, or one each"
        )


def _corrected(reading: Reading, position: int) -> Taken:
    value, uncertainty = stated_value(reading)
    context = getattr(reading, "context", None)
    if context is None:
        return Taken(reading, value, uncertainty, ())
    corrected = bare_inductance(value, context)
    step = DERIVATIVE_STEP * value
    slope = (bare_inductance(value + step, context) - bare_inductance(value - step, context)) / (2.0 * step)
    window = "with the instrument set to series"
    if context.parallel_capacitance_f > 0 and corrected > 0:
        resonance = 1.0 / (2.0 * np.pi * np.sqrt(corrected * context.parallel_capacitance_f))
        window = f"below {resonance * np.sqrt(CORRECTION_NEGLIGIBLE):.3g} Hz (it resonates at {resonance:.3g} Hz)"
    findings = _judged(reading, position, value / corrected - 1.0, value, corrected, window)
    return Taken(reading, corrected, abs(slope) * uncertainty, tuple(findings))


def bare_inductance(inductance_h: float, context: ReadingContext) -> float:
    """Return the series inductance of the windings alone, H, from what the instrument shows."""
    omega = 2.0 * np.pi * context.frequency_hz
    reactance = omega * inductance_h
    if context.form is ReadingForm.SERIES:
        admittance = 1.0 / complex(reactance / context.quality_factor, reactance)
    else:
        admittance = complex(1.0 / (reactance * context.quality_factor), -1.0 / reactance)
    return float((1.0 / (admittance - 1j * omega * context.parallel_capacitance_f)).imag / omega)


def _judged(reading: Reading, position: int, part: float, shown: float, bare: float, window: str) -> list[Finding]:
    if abs(part) > CORRECTION_LIMIT or bare <= 0:
        raise InvalidRequest.at(
            "context",
            f"the reading {shown:.4g} H would have to be corrected by {-100 * part / (1 + part):.3g} %, more than "
            f"can be trusted: measure {window} instead",
            reason="READING_OUTSIDE_WINDOW",
        )
    if abs(part) <= CORRECTION_NEGLIGIBLE**2:
        return []
    severity = Severity.WARNING if abs(part) > CORRECTION_NEGLIGIBLE else Severity.INFO
    text = (
        f"Reading {position + 1} of {'-'.join(windings_of(reading))} shows {shown:.5g} H, {100 * part:+.2g} % beside "
        f"the bare {bare:.5g} H that is used; it would be within {100 * CORRECTION_NEGLIGIBLE:g} % {window}."
    )
    return [Finding("READING_CORRECTED", severity, windings_of(reading), f"readings[{position}]", text, shown, bare)]
