"""Pictures of answers, drawn with matplotlib (extra ``plot``): one figure an answer, its cautions underneath."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from interwind.codec.observable import observable_heading
from interwind.errors import InvalidRequest
from interwind.model.observables import Observable
from interwind.model.report import ValidityReport
from interwind.model.response import FrequencyResponse, PortResponse

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

LEGEND_LIMIT = 12  # more lines than this are told apart by nobody


def save(answer: Any, path: str | Path, *, observe: Sequence[Observable] | None = None) -> None:
    """Draw an answer into an image file, its kind by the ending."""
    figure(answer, observe=observe).savefig(path, dpi=150)


def figure(answer: Any, *, observe: Sequence[Observable] | None = None) -> Figure:
    """Return the figure of a response over frequency or time, of a port response, or of a verdict.

    ``observe``: which observables of a response to draw; None = all of them.

    Raises
    ------
    InvalidRequest : there is no picture of such an answer, or matplotlib is not installed.
    """
    if isinstance(answer, ValidityReport):
        drawn = blank(answer, "feasible interval of each coupling, the others held", rows=1)
        _draw_intervals(answer, drawn.axes[0])
    elif isinstance(answer, FrequencyResponse | PortResponse):
        drawn = blank(answer, "over frequency", rows=2)
        _draw_frequency(answer, observe, *drawn.axes)
    elif hasattr(answer, "time_s"):
        drawn = blank(answer, "over time", rows=1)
        _draw_time(answer, observe, drawn.axes[0])
    else:
        raise InvalidRequest.at("plot", f"{type(answer).__name__} found; a response or a verdict can be drawn")
    return drawn


def blank(answer: Any, title: str, *, rows: int) -> Figure:
    """Return a figure of ``rows`` axes one above the other, with the answer's cautions underneath."""
    try:
        from matplotlib.figure import Figure
    except ImportError as error:
        raise InvalidRequest.at("plot", 'matplotlib is not installed; pip install "interwind[plot]"') from error
    drawn = Figure(figsize=(9.0, 3.0 + 2.5 * rows), layout="constrained")
    for row in range(rows):
        drawn.add_subplot(rows, 1, row + 1)
    drawn.axes[0].set_title(title)
    said = [textwrap.fill(f"Caution: {caution.message}", 130) for caution in answer.cautions]
    if said:
        drawn.supxlabel("\n".join(said), fontsize=7, ha="left", x=0.02)
    return drawn


def _draw_intervals(report: ValidityReport, axes: Axes) -> None:
    """One cell a pair: the couplings that would do; grey where none does, framed where it is to blame."""
    count = len(report.labels)
    width = report.feasible_high - report.feasible_low
    shown = np.where(np.eye(count, dtype=bool), np.nan, width)
    axes.imshow(np.ma.masked_invalid(shown), cmap="viridis", aspect="auto")
    axes.set_facecolor("0.9")
    axes.set_xticks(range(count), report.labels)
    axes.set_yticks(range(count), report.labels)
    culprits = {frozenset(culprit.pair) for culprit in report.culprits}
    for row in range(count):
        for column in range(count):
            if row == column:
                continue
            if np.isnan(width[row, column]):
                axes.text(column, row, "none", ha="center", va="center", fontsize=8, color="0.5")
                continue
            text = f"{report.feasible_low[row, column]:.5f}\n{report.feasible_high[row, column]:.5f}"
            blamed = frozenset((report.labels[row], report.labels[column])) in culprits
            box = {"edgecolor": "red", "facecolor": "white", "linewidth": 2} if blamed else {"alpha": 0.0}
            axes.text(column, row, text, ha="center", va="center", fontsize=8, bbox=box)
    axes.set_xlabel(f"verdict {report.verdict.name}, smallest eigenvalue {report.eigenvalues[0]:.5g}")


def _draw_frequency(
    answer: FrequencyResponse | PortResponse, observe: Sequence[Observable] | None, magnitude: Axes, phase: Axes
) -> None:
    curves: dict[str, NDArray[Any]]
    if isinstance(answer, PortResponse):
        pairs = [(i, j) for i in range(len(answer.ports)) for j in range(len(answer.ports))]
        curves = {f"S {answer.ports[i]} {answer.ports[j]}": answer.scattering[:, i, j] for i, j in pairs}
    else:
        curves = {observable_heading(observable): answer[observable] for observable in observe or answer}
    for name, curve in curves.items():
        magnitude.loglog(answer.frequency_hz, np.abs(curve), label=name, linewidth=0.9)
        phase.semilogx(answer.frequency_hz, np.degrees(np.angle(curve)), linewidth=0.9)
    magnitude.set_ylabel("magnitude, peak")
    phase.set_ylabel("phase, degrees")
    phase.set_xlabel("frequency, Hz")
    phase.grid(visible=True, linewidth=0.3)
    _legend(magnitude, len(curves))


def _draw_time(answer: Any, observe: Sequence[Observable] | None, axes: Axes) -> None:
    shown = list(observe or answer)
    for observable in shown:
        axes.plot(answer.time_s, answer[observable], label=observable_heading(observable), linewidth=0.9)
    axes.set_xlabel("time, s")
    axes.set_ylabel("V, A, Wb, W or J by the name")
    _legend(axes, len(shown))


def _legend(axes: Axes, count: int) -> None:
    axes.grid(visible=True, linewidth=0.3)
    if count <= LEGEND_LIMIT:
        axes.legend(fontsize=7)
