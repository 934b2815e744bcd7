"""The standard impulses of unit peak as sums of amplitude (t/decay)^power e^(−t/decay) cos(2π f t).

Constants as published, in µs, from memory of the documents named; the peak factor is recomputed from them where the
document leaves it to the reader, so that ``peak`` is the true peak.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from interwind.model.waveform import ImpulseShape

_MICRO = 1e-6


@dataclass(frozen=True, slots=True)
class Term:
    """amplitude (t/decay_s)^power e^(−t/decay_s) cos(2π frequency_hz t)."""

    amplitude: float
    decay_s: float
    power: int = 0
    frequency_hz: float = 0.0


def _double_exponential(tail_us: float, front_us: float) -> tuple[Term, ...]:
    """e^(−t/tail) − e^(−t/front) scaled to peak 1."""
    top = np.log(tail_us / front_us) * tail_us * front_us / (tail_us - front_us)
    factor = 1.0 / (np.exp(-top / tail_us) - np.exp(-top / front_us))
    return Term(factor, tail_us * _MICRO), Term(-factor, front_us * _MICRO)


def _front_times_tail(factor: float, front_us: float, tail_us: float, frequency_hz: float = 0.0) -> tuple[Term, ...]:
    """Factor (1 − e^(−t/front)) e^(−t/tail) cos(2π f t)."""
    both = front_us * tail_us / (front_us + tail_us)
    return (
        Term(factor, tail_us * _MICRO, frequency_hz=frequency_hz),
        Term(-factor, both * _MICRO, frequency_hz=frequency_hz),
    )


SHAPES: dict[ImpulseShape, tuple[Term, ...]] = {
    # Kuffel, Zaengl & Kuffel, High Voltage Engineering Fundamentals, 2nd ed., time constants of the double exponential.
    ImpulseShape.LIGHTNING_1_2_50: _double_exponential(68.2, 0.405),
    # IEC 60060-1: crest at 250 µs, half of it at 2500 µs, both counted from 0; the constants are derived from that.
    ImpulseShape.SWITCHING_250_2500: _double_exponential(3155.01549091, 62.48290042),
    # IEEE C62.41 / C62.45 analytic waveforms: 0.01243 µs⁻³ t³ e^(−t/3.911 µs).
    ImpulseShape.CURRENT_8_20: (Term(0.01243 * 3.911**3, 3.911 * _MICRO, power=3),),
    ImpulseShape.SURGE_10_1000: _front_times_tail(1.019, 3.827, 1404.0),
    ImpulseShape.RING_100_KHZ: _front_times_tail(1.590, 0.533, 9.788, 100e3),
}
