"""An answer as columns under headings, or, where it has none, as named values."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterator, Mapping
from enum import Enum
from typing import Any

import numpy as np
from numpy.typing import NDArray

from interwind.codec.observable import observable_heading
from interwind.codec.port_figures import figure_heading
from interwind.model.batch import BatchResult
from interwind.model.finding import Caution, Evidence, Finding
from interwind.model.poles import PoleReport
from interwind.model.port_figures import PortFigures
from interwind.model.response import PortResponse

Columns = dict[str, NDArray[Any]]
AXES = ("frequency_hz", "time_s")
MATRICES = ("impedance_ohm", "admittance_s", "scattering")


def columns_of(answer: Any) -> Columns:
    """Return the columns of a response, its axis first: ``time_s``, ``node_voltage out``; empty for other answers."""
    if isinstance(answer, BatchResult):
        return _rows_of(answer)
    axis = next((name for name in AXES if hasattr(answer, name)), None)
    if axis is None:
        return {}
    columns: Columns = {axis: getattr(answer, axis)}
    if isinstance(answer, PortResponse):
        for name in MATRICES:
            matrix = getattr(answer, name)
            for row, into in enumerate(answer.ports):
                for column, driven in enumerate(answer.ports):
                    columns[f"{name} {into} {driven}"] = matrix[:, row, column]
    elif isinstance(answer, PortFigures):
        columns |= {figure_heading(figure): answer[figure] for figure in answer.figures}
    elif isinstance(answer, PoleReport):
        columns |= {"pole_per_s": answer.pole_per_s, "quality_factor": answer.quality_factor}
        for column, observable in enumerate(answer.observables):
            columns[f"residue {observable_heading(observable)}"] = answer.residue[:, column]
        for column, name_and_label in enumerate(answer.participants):
            columns[" ".join(("participation", *filter(None, name_and_label)))] = answer.participation[:, column]
    else:
        columns |= {observable_heading(observable): answer[observable] for observable in answer}
    return columns


def _rows_of(batch: BatchResult) -> Columns:
    """Return a batch as one row a variant and point: variant, status, reason, point, then its columns."""
    variants, points = len(batch.status), len(batch.points)
    columns: Columns = {
        "variant": np.repeat(np.arange(variants), points),
        "status": np.repeat(np.array([status.name for status in batch.status]), points),
        "reason": np.repeat(np.array(batch.reason, dtype=np.str_), points),
        "point": np.tile(batch.points, variants),
    }
    for key, table in batch.table.items():
        columns[key if isinstance(key, str) else observable_heading(key)] = table.reshape(-1)
    return columns


def real_columns(columns: Columns) -> Columns:
    """Return the columns with each complex one as two, its heading followed by ``real`` and ``imag``."""
    split: Columns = {}
    for heading, column in columns.items():
        if np.iscomplexobj(column):
            split |= {f"{heading} real": column.real, f"{heading} imag": column.imag}
        else:
            split[heading] = column
    return split


def values_of(answer: Any, path: str = "") -> Iterator[tuple[str, Any]]:
    """Yield every named value of an answer, nested ones by their path, without what was noticed (`noticed_in`)."""
    for field in dataclasses.fields(answer):
        value = getattr(answer, field.name)
        name = f"{path}.{field.name}" if path else field.name
        if isinstance(value, Evidence) or value is None or _is_noticed(value):
            continue
        if isinstance(value, Enum):
            yield name, value.name
        elif isinstance(value, Mapping):
            yield from ((f"{name}.{key}", item) for key, item in value.items())
        elif dataclasses.is_dataclass(value):
            yield from values_of(value, name)
        elif isinstance(value, tuple) and value and dataclasses.is_dataclass(value[0]):
            for position, item in enumerate(value):
                yield from values_of(item, f"{name}[{position}]")
        elif isinstance(value, np.ndarray) and value.ndim > 1:
            for position, row in enumerate(value):
                yield f"{name}[{position}]", row
        elif not (isinstance(value, tuple | np.ndarray) and len(np.atleast_1d(np.asarray(value, dtype=object))) == 0):
            yield name, value


def noticed_in(answer: Any) -> Iterator[str]:
    """Yield one line for each finding and each caution of an answer."""
    for finding in getattr(answer, "findings", ()):
        yield f"{finding.severity.name.lower()} {finding.code}: {finding.message}"
    for caution in getattr(answer, "cautions", ()):
        yield f"caution {caution.code}: {caution.message}"


def _is_noticed(value: Any) -> bool:
    return isinstance(value, tuple) and bool(value) and isinstance(value[0], Finding | Caution)
