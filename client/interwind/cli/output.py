"""Writes an answer: as text for people, as JSON, or to a file of the kind its ending names."""

from __future__ import annotations

import csv
import dataclasses
import io
import json
import sys
from collections.abc import Mapping
from enum import Enum
from pathlib import Path
from typing import Any

import numpy as np

from interwind.cli.columns import MATRICES, columns_of, real_columns, values_of
from interwind.errors import InvalidRequest

ENDINGS = (".npz", ".csv", ".json")
# Fields that the columns of an answer show already.
BEHIND_COLUMNS = (
    "samples", "observables", "figures", *MATRICES, "residue", "participants", "participation", "points", "table",
)  # fmt: skip


def write(answer: Any, output: str | None, *, as_json: bool) -> None:
    """Write an answer to the file ``output``, or to standard output where none is named."""
    if output is None:
        sys.stdout.write(json_text(answer) if as_json else csv_text(answer, separator=" "))
        return
    path = Path(output)
    if path.suffix == ".npz":
        np.savez_compressed(path, allow_pickle=False, **_arrays(answer))
    else:
        path.write_text(json_text(answer) if path.suffix == ".json" else csv_text(answer), encoding="utf-8")


def check_ending(output: str) -> None:
    """Refuse a file name whose ending names no format."""
    if Path(output).suffix not in ENDINGS:
        raise InvalidRequest.at("--output", f"{output!r} found; a name ending in .npz, .csv or .json is expected")


def csv_text(answer: Any, *, separator: str = ",") -> str:
    """Return a response as one row a point, other answers as one row a named value; numbers keep all their digits."""
    lines = io.StringIO()
    columns = real_columns(columns_of(answer))
    if columns:
        rows = csv.writer(lines, lineterminator="\n")
        rows.writerow(columns)
        rows.writerows(zip(*(column.tolist() for column in columns.values()), strict=True))
    else:
        rows = csv.writer(lines, lineterminator="\n", delimiter=separator)
        for name, value in values_of(answer):
            rows.writerow([name, *np.atleast_1d(value).tolist()])
    return lines.getvalue()


def json_text(answer: Any) -> str:
    """Return an answer as JSON: the contract's own mapping where it has one, else its fields by name."""
    if hasattr(answer, "to_json"):
        return str(answer.to_json()) + "\n"
    columns = columns_of(answer)
    content: dict[str, Any] = {heading: column for heading, column in columns.items()}
    for field in dataclasses.fields(answer):
        if field.name not in (*columns, *BEHIND_COLUMNS):
            content[field.name] = getattr(answer, field.name)
    return json.dumps(_plain(content), indent=2, allow_nan=False) + "\n"


def _plain(value: Any) -> Any:
    """Turn a value into what JSON knows; non-finite numbers become the texts protobuf's mapping uses."""
    if isinstance(value, Enum):
        return value.name
    if dataclasses.is_dataclass(value):
        return {field.name: _plain(getattr(value, field.name)) for field in dataclasses.fields(value)}
    if isinstance(value, Mapping):
        return {str(key): _plain(item) for key, item in value.items()}
    if isinstance(value, np.ndarray | np.generic):
        return _plain(value.tolist())
    if isinstance(value, tuple | list):
        return [_plain(item) for item in value]
    if isinstance(value, complex):
        return {"real": _plain(value.real), "imaginary": _plain(value.imag)}
    if isinstance(value, float) and not np.isfinite(value):
        return "NaN" if np.isnan(value) else "Infinity" if value > 0 else "-Infinity"
    return value


def _arrays(answer: Any) -> dict[str, Any]:
    """Return the columns of a response, or the named values of another answer, as arrays."""
    return columns_of(answer) or {name: np.asarray(value) for name, value in values_of(answer)}
