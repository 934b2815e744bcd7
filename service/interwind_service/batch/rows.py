"""Rows of the database as values."""

from __future__ import annotations

import json
import sqlite3
from dataclasses import dataclass
from pathlib import Path

from interwind.model.batch import BatchProgress, BatchState, CostForecast
from interwind_service.batch.work import ChunkAnswer, RowReason


@dataclass(frozen=True, slots=True)
class Chunk:
    """Some consecutive rows of a batch and what is known of them."""

    key: int
    batch_id: str
    first_row: int
    row_count: int
    state: int
    statuses: bytes
    reasons: tuple[RowReason, ...]
    size_bytes: int
    sha256: str


@dataclass(frozen=True, slots=True)
class Ingredients:
    """Where the submitted numbers of a batch stand, and how to prove them."""

    folder: Path
    recipe_sha256: str
    columns_sha256: str
    width: int
    header: bytes


def reasons_text(answer: ChunkAnswer) -> str:
    """Return the reasons of a chunk as the text that is stored."""
    return json.dumps([[reason.row, reason.code, reason.message] for reason in answer.reasons])


def chunk_of(row: sqlite3.Row) -> Chunk:
    """Return the chunk of a row of ``chunk`` joined with the ``batch_id`` of its batch."""
    return Chunk(
        key=row["key"],
        batch_id=row["batch_id"],
        first_row=row["first_row"],
        row_count=row["row_count"],
        state=row["state"],
        statuses=row["statuses"] or b"",
        reasons=tuple(RowReason(*item) for item in json.loads(row["reasons"] or "[]")),
        size_bytes=row["size_bytes"] or 0,
        sha256=row["sha256"] or "",
    )


def progress_of(row: sqlite3.Row) -> BatchProgress:
    """Return how far the batch of a row of ``batch`` has come."""
    return BatchProgress(
        batch_id=row["batch_id"],
        state=BatchState(row["state"]),
        variant_count=row["variant_count"],
        ok_count=row["ok_count"],
        invalid_count=row["invalid_count"],
        failed_count=row["failed_count"],
        cancelled_count=row["cancelled_count"],
        sequence=row["sequence"],
        request_id=row["request_id"] or "",
        create_time_s=row["create_time_s"],
        done_time_s=row["done_time_s"],
        expire_time_s=row["expire_time_s"],
        forecast=CostForecast(row["duration_s"], row["result_bytes"], row["memory_bytes"], row["chunk_count"]),
    )
