"""The periodic steady state: samples over one period, and figures of the exact solution."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from interwind.errors import InvalidRequest
from interwind.model.frozen import ComplexArray, FloatArray
from interwind.model.observables import Observable
from interwind.model.response import EnergyLedger, Event, _Columns


@dataclass(frozen=True, slots=True, eq=False)
class PeriodicResponse(_Columns):
    """One period of the steady state, in the phase of the waveforms' own t = 0.

    Attributes
    ----------
    time_s : shape (T,), s, k step_s for k = 0 .. period_s/step_s; ``samples`` shape (T, observables), limits from the
        right.
    means, rmses, peaks, peak_times_s : shape (observables,): mean, root of the mean square, largest magnitude (with its
        sign) and its instant, s, of the exact solution.
    harmonic_values : shape (observables, K), complex peak values c_k of harmonics k = 1 .. K:
        x(t) = mean + Σ Re(c_k e^(j k 2π t / period)).
    multipliers : shape (n,), complex, Floquet multipliers, largest first; all inside the unit circle when it is stable.
    mean_power_w : power absorbed by every element, W, by its name; the sum of all is zero.
    events : switch and diode changes of the period, in order; ``ledger`` : where the energy went in it.
    """

    period_s: float = field(kw_only=True)
    time_s: FloatArray = field(kw_only=True)
    means: FloatArray = field(kw_only=True)
    rmses: FloatArray = field(kw_only=True)
    peaks: FloatArray = field(kw_only=True)
    peak_times_s: FloatArray = field(kw_only=True)
    harmonic_values: ComplexArray = field(kw_only=True)
    multipliers: ComplexArray = field(kw_only=True)
    mean_power_w: Mapping[str, float] = field(default_factory=dict, kw_only=True)
    events: tuple[Event, ...] = field(default=(), kw_only=True)
    ledger: EnergyLedger | None = field(default=None, kw_only=True)

    def mean(self, observable: Observable) -> float:
        """Return the mean over the period."""
        return float(self.means[self._position(observable)])

    def rms(self, observable: Observable) -> float:
        """Return the root of the mean square over the period."""
        return float(self.rmses[self._position(observable)])

    def peak(self, observable: Observable) -> float:
        """Return the value of largest magnitude in the period, with its sign."""
        return float(self.peaks[self._position(observable)])

    def peak_time_s(self, observable: Observable) -> float:
        """Return the instant of the peak, s."""
        return float(self.peak_times_s[self._position(observable)])

    def harmonics(self, observable: Observable, count: int) -> ComplexArray:
        """Return the complex peak values of harmonics 1 to ``count``: x = mean + Σ Re(c_k e^(j k 2π t / period))."""
        stated = self.harmonic_values.shape[1]
        if not 0 <= count <= stated:
            raise InvalidRequest.at("count", f"{count!r} found; a response carries harmonics 1 to {stated}")
        return self.harmonic_values[self._position(observable), :count]

    def _position(self, observable: Observable) -> int:
        try:
            return self.observables.index(observable)
        except ValueError as error:
            raise InvalidRequest.at("observe", f"{observable!r} was not asked for; ask for it in observe") from error
