"""The rows of a chunk: each variant's answer as numbers, a status and a reason. One bad row harms no other.

What a row holds depends on its variant alone, never on its neighbours, its place or the worker.
"""

from __future__ import annotations

import dataclasses
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InterwindError, InvalidRequest, field_path
from interwind.model.batch import Analysis, CheckAnalysis, FrequencyAnalysis, TimeAnalysis
from interwind.model.elements import Windings
from interwind.model.finding import Verdict
from interwind.model.network import Network
from interwind.model.observables import NodeVoltage, Observable, WindingCurrent
from interwind_service import engine
from interwind_service.batch.overrides import Overrides
from interwind_service.batch.work import FAILED_CODE, INVALID_CODE, OK_CODE, RowReason
from interwind_service.tolerances import BATCH_POINT_LIMIT, OUTPUT_GRID_SHARE

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Layout:
    """What a row holds: numbers of ``dtype`` of each of ``observables`` at each of ``points``, named ``point_name``."""

    observables: tuple[Observable, ...]
    points: FloatArray
    point_name: str
    dtype: np.dtype[Any]

    @property
    def columns(self) -> int:
        """Arrays of a row; after a check the one of eigenvalues."""
        return len(self.observables) or 1

    @property
    def row_bytes(self) -> int:
        """Bytes of a row."""
        return self.columns * self.points.size * self.dtype.itemsize


@dataclass(frozen=True, slots=True, eq=False)
class Rows:
    """``values`` (columns, rows, points), NaN where there is none; ``statuses`` one byte a row; ``reasons``."""

    values: NDArray[Any]
    statuses: bytes
    reasons: tuple[RowReason, ...]


def layout_of(network: Network, analysis: Analysis) -> Layout:
    """Return what the rows of an analysis will hold.

    Raises
    ------
    InvalidRequest : a grid that is none, too many points, or windings that are not there.
    """
    if isinstance(analysis, CheckAnalysis):
        size = checked_windings(network, analysis).windings.size
        return Layout((), np.arange(size, dtype=np.float64), "index", np.dtype("<f8"))
    observables = analysis.observe or tuple(_usual(network))
    if isinstance(analysis, FrequencyAnalysis):
        points, name, dtype = analysis.frequency_hz, "frequency_hz", np.dtype("<c16")
    else:
        name, dtype = "time_s", np.dtype("<f8")
        field, span_s = (
            ("stop_s", analysis.stop_s) if isinstance(analysis, TimeAnalysis) else ("period_s", analysis.period_s)
        )
        points = _grid(field, span_s, analysis.step_s)
    if not 0 < points.size <= BATCH_POINT_LIMIT:
        raise InvalidRequest.at(
            name, f"{points.size} points a row found; 1 to {BATCH_POINT_LIMIT} are allowed in a batch",
            reason="TOO_MANY_POINTS", limit=BATCH_POINT_LIMIT,
        )  # fmt: skip
    return Layout(observables, points, name, dtype)


def shortened(analysis: Analysis, points: int) -> tuple[Analysis, float]:
    """Return the analysis over about so many of its points, and how many times more the whole has."""
    if isinstance(analysis, FrequencyAnalysis) and analysis.frequency_hz.size > points:
        every = -(-analysis.frequency_hz.size // points)
        few = analysis.frequency_hz[::every]
        return FrequencyAnalysis(few, analysis.observe), analysis.frequency_hz.size / few.size
    if isinstance(analysis, TimeAnalysis) and analysis.stop_s > points * analysis.step_s:
        stop_s = points * analysis.step_s
        return dataclasses.replace(analysis, stop_s=stop_s), analysis.stop_s / stop_s
    return analysis, 1.0


def checked_windings(network: Network, analysis: CheckAnalysis) -> Windings:
    """Return the windings element that a check is about."""
    found = [element for element in network.elements if isinstance(element, Windings)]
    if analysis.windings_name is not None:
        found = [element for element in found if element.name == analysis.windings_name]
    if len(found) != 1:
        names = ", ".join(element.name for element in network.elements if isinstance(element, Windings)) or "none"
        raise InvalidRequest.at(
            "windings_name", f"{analysis.windings_name!r} found; name one of the winding sets: {names}"
        )
    return found[0]


@dataclass(frozen=True, slots=True, eq=False)
class Desk:
    """All that the variants of a batch share: what varies, the analysis, what a row holds, and the prepared stack."""

    overrides: Overrides
    analysis: Analysis
    layout: Layout
    stack: Any


def desk_of(overrides: Overrides, analysis: Analysis) -> Desk:
    """Prepare for the variants of a batch."""
    layout = layout_of(overrides.network, analysis)
    stack = None
    if isinstance(analysis, FrequencyAnalysis):
        try:
            stack = engine.prepare_stack(overrides.network, layout.points, layout.observables)
        except InterwindError:
            pass  # the base network alone cannot be solved; its variants may well be
    return Desk(overrides, analysis, layout, stack)


def solve_rows(desk: Desk, numbers: FloatArray, first_row: int) -> Rows:
    """Compute the rows of some consecutive variants, ``numbers`` shape (rows, width)."""
    layout = desk.layout
    values = np.full((layout.columns, len(numbers), layout.points.size), np.nan, dtype=layout.dtype)
    statuses = bytearray([OK_CODE]) * len(numbers)
    reasons: list[RowReason] = []
    answered = np.zeros(len(numbers), dtype=bool)
    if desk.stack is not None:
        answered = engine.stacked_responses(desk.stack, desk.overrides.columns(numbers), values)
    if isinstance(desk.analysis, CheckAnalysis):
        element = checked_windings(desk.overrides.network, desk.analysis)
        own = [c for c in desk.overrides.columns(numbers) if getattr(c, "windings_name", "") == element.name]
        values[0], answered = engine.clear_eigenvalues(element.windings, own, len(numbers))
    answer = _answerer(desk.overrides.network, desk.analysis, layout)
    for k in np.flatnonzero(~answered).tolist():
        try:
            network = desk.overrides.variant(numbers[k])
            refusal = answer(network, values[:, k])
            if refusal is not None:
                statuses[k] = INVALID_CODE
                reasons.append(RowReason(first_row + k, "INVALID_WINDINGS", refusal))
        except InterwindError as error:
            statuses[k] = INVALID_CODE if isinstance(error, InvalidRequest) else FAILED_CODE
            reasons.append(RowReason(first_row + k, error.reason, error.message))
            values[:, k] = np.nan
    return Rows(values, bytes(statuses), tuple(reasons))


def _answerer(network: Network, analysis: Analysis, layout: Layout) -> Callable[[Network, NDArray[Any]], str | None]:
    """Return what answers one variant: it fills (columns, points), and may say why the variant cannot exist."""
    if isinstance(analysis, CheckAnalysis):
        name = checked_windings(network, analysis).name

        def check(variant: Network, into: NDArray[Any]) -> str | None:
            element = variant.element(name)
            report = engine.check(element.windings)  # type: ignore[union-attr]
            into[0] = report.eigenvalues
            return None if report.verdict is not Verdict.INVALID else _why(report)

        return check

    def respond(variant: Network, into: NDArray[Any]) -> str | None:
        if isinstance(analysis, FrequencyAnalysis):
            response: Any = engine.frequency_response(variant, analysis.frequency_hz, layout.observables)
        elif isinstance(analysis, TimeAnalysis):
            response = engine.time_response(
                variant, analysis.stop_s, analysis.step_s, layout.observables, analysis.initial, analysis.tolerance
            )
        else:
            response = engine.periodic_response(
                variant, analysis.period_s, analysis.step_s, layout.observables, analysis.tolerance
            )
        into[...] = response.samples.T
        return None

    return respond


def _why(report: Any) -> str:
    smallest = float(report.eigenvalues[0])
    message = f"the coupling matrix has the eigenvalue {smallest:.6g}; no windings have one below 0"
    if report.culprits:
        culprit = report.culprits[0]
        message += (
            f"; the coupling of {culprit.pair[0]!r}, {culprit.pair[1]!r} between {culprit.low:.6g} and"
            f" {culprit.high:.6g} would cure it"
        )
    return message


def _usual(network: Network) -> list[Observable]:
    """Return all node voltages and winding currents."""
    usual: list[Observable] = [NodeVoltage(name) for name in network.nodes]
    for element in network.elements:
        if isinstance(element, Windings):
            usual += [WindingCurrent(element.name, label) for label in element.windings.labels]
    return usual


def _grid(field: str, span_s: float, step_s: float) -> FloatArray:
    with field_path("analysis"):
        if not (step_s > 0.0 and span_s > 0.0 and np.isfinite(span_s / step_s)):
            raise InvalidRequest.at(field, f"{span_s!r} s at steps of {step_s!r} s found; both must be above 0")
        steps = round(span_s / step_s)
        if steps < 1 or abs(span_s / step_s - steps) > OUTPUT_GRID_SHARE:
            raise InvalidRequest.at(
                field, f"{span_s!r} s is no multiple of step_s = {step_s!r} s; the nearest are"
                f" {max(steps, 1) * step_s!r} and {(steps + 1) * step_s!r}",
            )  # fmt: skip
    return np.arange(min(steps, BATCH_POINT_LIMIT) + 1) * step_s
