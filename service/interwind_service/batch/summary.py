"""Quantiles and extreme rows of a batch, from its files, a column and some points at a time."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest
from interwind.model.batch import BatchSummary
from interwind_service.batch.chunk import Layout
from interwind_service.batch.folder import prove, rows_name
from interwind_service.batch.work import OK_CODE
from interwind_service.tolerances import BATCH_SUMMARY_BYTES, BATCH_SUMMARY_ROWS

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class StoredRows:
    """A chunk as it is stored: where its numbers stand, how to prove them, and the status bytes of its rows."""

    first_row: int
    row_count: int
    statuses: bytes
    size_bytes: int
    sha256: str


def summarize(
    folder: Path, chunks: Sequence[StoredRows], layout: Layout, levels: Sequence[float], extreme_count: int
) -> BatchSummary:
    """Return quantiles at ``levels`` and the ``extreme_count`` highest and lowest rows, over the OK rows.

    Complex values enter by their magnitude; a NaN (a singular frequency) is left out of its point. Quantiles
    interpolate linearly between order statistics (Hyndman & Fan 1996, type 7).

    Raises
    ------
    DataLoss : a file fails its checksum.
    InvalidRequest : a level outside 0 to 1.
    """
    for position, level in enumerate(levels):
        if not 0.0 <= level <= 1.0:
            raise InvalidRequest.at(f"quantile_levels[{position}]", f"{level!r} found; a level from 0 to 1 is expected")
    if not 0 <= extreme_count <= BATCH_SUMMARY_ROWS:
        raise InvalidRequest.at("extreme_count", f"{extreme_count} found; 0 to {BATCH_SUMMARY_ROWS} are allowed")
    blocks, rows = [], []
    for chunk in chunks:
        ok = np.frombuffer(chunk.statuses, np.uint8) == OK_CODE
        if chunk.size_bytes and ok.any():
            path = folder / rows_name(chunk.first_row, chunk.row_count)
            prove(path, chunk.size_bytes, chunk.sha256)
            shape = (layout.columns, chunk.row_count, layout.points.size)
            blocks.append((np.memmap(path, dtype=layout.dtype, mode="r", shape=shape), ok))
            rows.append(chunk.first_row + np.flatnonzero(ok))
    row = np.concatenate(rows) if rows else np.empty(0, dtype=np.int64)
    keys = layout.observables or ("eigenvalues",)
    count = min(extreme_count, row.size)
    quantiles, highest_rows, highest, lowest_rows, lowest = ({} for _ in range(5))  # type: ignore[var-annotated]
    share = max(1, BATCH_SUMMARY_BYTES // (16 * max(row.size, 1)))
    for column, key in enumerate(keys):
        peak = np.zeros(row.size)
        parts = [np.empty((len(levels), 0))]
        for start in range(0, layout.points.size, share):
            values = _gather(blocks, column, slice(start, start + share))
            with np.errstate(invalid="ignore"):
                peak = np.fmax(peak, np.fmax.reduce(np.abs(values), axis=1)) if row.size else peak
            parts.append(_quantiles(values, levels))
        quantiles[key] = np.concatenate(parts, axis=1)
        order = np.lexsort((row, peak))  # ties in the order of the rows
        highest_rows[key], highest[key] = row[order[::-1][:count]], peak[order[::-1][:count]]
        lowest_rows[key], lowest[key] = row[order[:count]], peak[order[:count]]
    return BatchSummary(
        np.array(levels, dtype=np.float64),
        layout.points,
        quantiles,
        highest_rows,
        highest,
        lowest_rows,
        lowest,
        row.size,
    )


def _gather(blocks: Sequence[tuple[NDArray[np.generic], NDArray[np.bool_]]], column: int, points: slice) -> FloatArray:
    """Return the OK rows of one column at some points, magnitudes where complex, shape (rows, points)."""
    if not blocks:
        return np.empty((0, 0))
    values = np.concatenate([block[column, ok, points] for block, ok in blocks])
    return np.abs(values) if np.iscomplexobj(values) else values


def _quantiles(values: FloatArray, levels: Sequence[float]) -> FloatArray:
    """Return the quantiles of each point over its rows without the NaN ones, shape (levels, points)."""
    ordered = np.sort(values, axis=0)  # NaN last
    count = np.sum(~np.isnan(ordered), axis=0)
    found = np.full((len(levels), values.shape[1]), np.nan)
    some = np.flatnonzero(count)
    for position, level in enumerate(levels):
        place = level * (count[some] - 1)
        low = np.floor(place).astype(np.int64)
        high = np.minimum(low + 1, count[some] - 1)
        below, above = ordered[low, some], ordered[high, some]
        found[position, some] = below + (place - low) * (above - below)
    return found
