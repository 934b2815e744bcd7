"""A batch: one base network, one analysis, and columns of overrides of equal length V, one row a variant."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import Enum
from typing import Any

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest
from interwind.model.frozen import ComplexArray, FloatArray, frozen_vector, plain_float
from interwind.model.observables import OBSERVABLES, Observable
from interwind.model.response import Initial, SteadyStart


class VariantStatus(Enum):
    """What became of one variant."""

    OK = "OK"
    INVALID = "INVALID"
    FAILED = "FAILED"
    CANCELLED = "CANCELLED"


class BatchState(Enum):
    """How far a batch has come."""

    WAITING = "WAITING"
    RUNNING = "RUNNING"
    DONE = "DONE"
    CANCELLED = "CANCELLED"


@dataclass(frozen=True, slots=True, eq=False)
class FrequencyAnalysis:
    """A frequency response of each variant at ``frequency_hz`` (F,), Hz."""

    frequency_hz: FloatArray
    observe: tuple[Observable, ...] | None = None

    def __post_init__(self) -> None:
        object.__setattr__(self, "frequency_hz", frozen_vector(self.frequency_hz, "frequency_hz"))
        object.__setattr__(self, "observe", _observables(self.observe))


@dataclass(frozen=True, slots=True, eq=False)
class TimeAnalysis:
    """A time response of each variant, sampled every ``step_s`` from 0 to ``stop_s``, s."""

    stop_s: float
    step_s: float
    observe: tuple[Observable, ...] | None = None
    initial: Initial = None
    tolerance: float = 1e-6

    def __post_init__(self) -> None:
        for name in ("stop_s", "step_s", "tolerance"):
            object.__setattr__(self, name, plain_float(getattr(self, name), name))
        object.__setattr__(self, "observe", _observables(self.observe))
        if self.initial is not None and not isinstance(self.initial, SteadyStart | Mapping):
            raise InvalidRequest.at("initial", f"{self.initial!r} found; a mapping, SteadyStart() or None is expected")


@dataclass(frozen=True, slots=True, eq=False)
class PeriodicAnalysis:
    """A periodic response of each variant, sampled every ``step_s`` over one ``period_s``, s."""

    period_s: float
    step_s: float
    observe: tuple[Observable, ...] | None = None
    tolerance: float = 1e-6

    def __post_init__(self) -> None:
        for name in ("period_s", "step_s", "tolerance"):
            object.__setattr__(self, name, plain_float(getattr(self, name), name))
        object.__setattr__(self, "observe", _observables(self.observe))


@dataclass(frozen=True, slots=True)
class CheckAnalysis:
    """Whether the windings of each variant can exist; ``windings_name`` None = the only ones of the network."""

    windings_name: str | None = None


Analysis = FrequencyAnalysis | TimeAnalysis | PeriodicAnalysis | CheckAnalysis
ANALYSES: tuple[type[Any], ...] = (FrequencyAnalysis, TimeAnalysis, PeriodicAnalysis, CheckAnalysis)


@dataclass(frozen=True, slots=True)
class CostForecast:
    """What a batch will take: seconds of all workers together, bytes of its results, bytes of memory a worker."""

    duration_s: float = 0.0
    result_bytes: int = 0
    memory_bytes: int = 0
    chunk_count: int = 0


@dataclass(frozen=True, slots=True)
class BatchProgress:
    """Where a batch stands; ``sequence`` rises with every change, so a watcher takes up where it was.

    ``held_reason``: why it stands still at present, ``STATE_FOLDER_FULL`` on a full disk; it goes on by itself.
    Times are seconds since the beginning of 1970, UTC.
    """

    batch_id: str
    state: BatchState
    variant_count: int
    ok_count: int = 0
    invalid_count: int = 0
    failed_count: int = 0
    cancelled_count: int = 0
    sequence: int = 0
    request_id: str = ""
    create_time_s: float = 0.0
    done_time_s: float | None = None
    expire_time_s: float | None = None
    forecast: CostForecast | None = None
    held_reason: str = ""

    @property
    def done_count(self) -> int:
        """Variants that have their row."""
        return self.ok_count + self.invalid_count + self.failed_count + self.cancelled_count

    @property
    def done(self) -> bool:
        """Whether every variant has its row."""
        return self.state in (BatchState.DONE, BatchState.CANCELLED)


@dataclass(frozen=True, slots=True, eq=False)
class BatchResult:
    """Every row of a batch.

    ``status`` (V,) of `VariantStatus`; ``reason`` (V,) text, empty when OK; ``table[observable]`` (V, P), rows of NaN
    where not OK; ``points`` (P,): frequency_hz or time_s. After a `CheckAnalysis` the one column is
    ``eigenvalues`` (V, n) of the coupling matrices, ascending, given for rows that are INVALID, too.
    """

    status: NDArray[np.object_]
    reason: NDArray[np.object_]
    points: FloatArray
    table: Mapping[Observable | str, FloatArray | ComplexArray]

    @property
    def ok(self) -> NDArray[np.bool_]:
        """Which rows are OK, shape (V,)."""
        return np.asarray(self.status == VariantStatus.OK, dtype=np.bool_)


@dataclass(frozen=True, slots=True, eq=False)
class BatchRow:
    """One row of a batch: ``table[observable]`` (P,), NaN where not OK; ``reason`` is empty when OK."""

    index: int
    status: VariantStatus
    reason: str
    table: Mapping[Observable | str, FloatArray | ComplexArray]


@dataclass(frozen=True, slots=True, eq=False)
class BatchSummary:
    """Quantiles and extreme rows over the OK rows, of the values, of their magnitudes where complex.

    ``quantiles[observable]`` (Q, P) at ``levels`` (Q,); ``highest_rows[observable]``, ``lowest_rows[observable]``: the
    rows whose largest magnitude over all points is highest (lowest), the extreme one first, with those magnitudes in
    ``highest`` and ``lowest``; ``row_count`` OK rows went in.
    """

    levels: FloatArray
    points: FloatArray
    quantiles: Mapping[Observable | str, FloatArray]
    highest_rows: Mapping[Observable | str, NDArray[np.int64]]
    highest: Mapping[Observable | str, FloatArray]
    lowest_rows: Mapping[Observable | str, NDArray[np.int64]]
    lowest: Mapping[Observable | str, FloatArray]
    row_count: int = field(default=0)


def _observables(value: Any) -> tuple[Observable, ...] | None:
    if value is None:
        return None
    observables = tuple(value)
    for position, observable in enumerate(observables):
        if not isinstance(observable, OBSERVABLES):
            raise InvalidRequest.at(
                f"observe[{position}]", f"{type(observable).__name__} found; an observable is expected"
            )
    return observables


def point_count(analysis: Analysis) -> int:
    """Return about how many points a row has, for admission; 0 where the analysis does not tell."""
    if isinstance(analysis, FrequencyAnalysis):
        return int(analysis.frequency_hz.size)
    if isinstance(analysis, TimeAnalysis | PeriodicAnalysis):
        span_s = analysis.stop_s if isinstance(analysis, TimeAnalysis) else analysis.period_s
        ratio = span_s / analysis.step_s if analysis.step_s > 0 and span_s >= 0 else 0.0
        return round(ratio) + 1 if ratio < 2.0**62 else 0
    return 0
