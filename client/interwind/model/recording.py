"""What a long time response keeps of its samples, and the figures that are taken from all of them."""

from __future__ import annotations

from dataclasses import dataclass

from interwind.errors import InvalidRequest
from interwind.model.frozen import FloatArray, plain_float


@dataclass(frozen=True, slots=True)
class Recording:
    """Samples kept: from ``from_s`` to ``until_s`` (None: the stop), every ``every``-th of the grid.

    With ``envelope`` each kept sample carries the smallest and largest value up to the next one: no peak is lost.
    """

    from_s: float = 0.0
    until_s: float | None = None
    every: int = 1
    envelope: bool = False

    def __post_init__(self) -> None:
        object.__setattr__(self, "from_s", plain_float(self.from_s, "from_s"))
        if self.until_s is not None:
            object.__setattr__(self, "until_s", plain_float(self.until_s, "until_s"))
        if isinstance(self.every, bool) or not isinstance(self.every, int) or self.every < 1:
            raise InvalidRequest.at("every", f"{self.every!r} found; a whole number from 1 on is expected")


@dataclass(frozen=True, slots=True, eq=False)
class RecordFigures:
    """Figures over the window of a recording, each shape (observables,).

    Linear runs: ``means``, ``rmses`` of the exact solution for voltages, currents, fluxes, of the samples for powers,
    energies; ``peaks`` the sample of largest magnitude, with its sign, kept or not; ``peak_times_s`` its instant, s.
    Runs with switches or nonlinear elements: all of the solution between its events, peaks between samples, too; NaN
    for what has no path that defines it somewhere in the window. With exponential diodes or arresters the solution is
    the dense output of the method, of order 3.
    """

    means: FloatArray
    rmses: FloatArray
    peaks: FloatArray
    peak_times_s: FloatArray
