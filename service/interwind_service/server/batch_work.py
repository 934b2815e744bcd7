"""What a worker does for a batch: plan a submission, compute a chunk. It runs in workers, so it imports no gRPC."""

from __future__ import annotations

import functools
import hashlib
import shutil
import time
from pathlib import Path
from typing import Any

import numpy as np
from google.protobuf.message import DecodeError

from interwind.codec.array import array_to_message, stored_arrays
from interwind.codec.batch import (
    Submission,
    submission_from_message,
    submission_to_message,
    summary_to_messages,
)
from interwind.codec.observable import observables_to_messages
from interwind.errors import InvalidRequest, Overloaded, field_path
from interwind.model.batch import Analysis, CostForecast
from interwind.v1 import array_pb2, batch_service_pb2
from interwind_service.batch.chunk import Desk, Layout, desk_of, layout_of, shortened, solve_rows
from interwind_service.batch.folder import room_in_state_folder, sync_folder, write_durably
from interwind_service.batch.overrides import Overrides, lay_out
from interwind_service.batch.summary import StoredRows, summarize
from interwind_service.batch.work import ChunkAnswer, ChunkTask, Plan
from interwind_service.tolerances import (
    BATCH_CHUNK_BYTES,
    BATCH_CHUNK_ROWS,
    BATCH_CHUNK_S,
    BATCH_FORECAST_COLD_S,
    BATCH_FORECAST_POINTS,
    BATCH_FORECAST_ROWS,
    BATCH_FORECAST_S,
    BATCH_FORECAST_TICK_S,
    BATCH_FORECAST_TIMES,
    BATCH_VARIANT_LIMIT,
    WORKER_BASE_BYTES,
)
from interwind_service.workers.arrays import ArrayFolder


def plan_submission(request: bytes, incoming: str, arrays: ArrayFolder) -> Plan:
    """Check a submission, try a few of its variants, and write it down in the folder ``incoming``."""
    try:
        message = batch_service_pb2.SubmitBatchRequest.FromString(request)
    except DecodeError as error:
        raise InvalidRequest(
            "the bytes are no SubmitBatchRequest; rebuild the caller", reason="MALFORMED_MESSAGE"
        ) from error
    with stored_arrays(arrays):
        submission = submission_from_message(message)
    with field_path("network"):
        overrides, numbers = lay_out(submission.network, submission.columns)
    if len(numbers) > BATCH_VARIANT_LIMIT:
        raise InvalidRequest.at(
            "columns", f"{len(numbers)} variants found; at most {BATCH_VARIANT_LIMIT} are allowed; submit several",
            reason="TOO_MANY_VARIANTS", limit=BATCH_VARIANT_LIMIT,
        )  # fmt: skip
    if not len(numbers):
        raise InvalidRequest.at("columns", "columns without a value found; at least one variant is expected")
    desk = desk_of(overrides, submission.analysis)
    layout = desk.layout
    call_s, row_s = _seconds(desk, numbers)
    chunk_rows = max(1, min(BATCH_CHUNK_ROWS, int(BATCH_CHUNK_S / row_s), BATCH_CHUNK_BYTES // layout.row_bytes))
    count = len(numbers)
    chunk_count = -(-count // chunk_rows)
    recipe = recipe_of(overrides, submission.analysis)
    columns = np.ascontiguousarray(numbers, dtype="<f8").tobytes()
    if not submission.validate_only:
        _write_down(Path(incoming), recipe, columns)
    recipe_sha256, columns_sha256 = (hashlib.sha256(data).hexdigest() for data in (recipe, columns))
    return Plan(
        folder="" if submission.validate_only else Path(incoming).name,
        request_id=submission.request_id,
        content_sha256=hashlib.sha256((recipe_sha256 + columns_sha256).encode()).hexdigest(),
        recipe_sha256=recipe_sha256,
        columns_sha256=columns_sha256,
        width=overrides.width,
        variant_count=count,
        chunk_rows=chunk_rows,
        header=_header(layout, count),
        forecast=CostForecast(
            duration_s=row_s * count + call_s * chunk_count,
            result_bytes=layout.row_bytes * count,
            memory_bytes=WORKER_BASE_BYTES + 4 * layout.row_bytes * chunk_rows + 3 * len(recipe),
            chunk_count=chunk_count,
        ),
    )


def solve_chunk(task: ChunkTask) -> ChunkAnswer:
    """Compute the rows of a chunk; their numbers go to a durable file, or home in the answer."""
    desk = _desk(task.recipe)
    numbers = np.frombuffer(task.columns, "<f8").reshape(task.row_count, desk.overrides.width)
    rows = solve_rows(desk, numbers, task.first_row)
    values = np.ascontiguousarray(rows.values, dtype=desk.layout.dtype)
    data = memoryview(values.reshape(-1).view(np.uint8))
    if task.path:
        with room_in_state_folder():
            write_durably(Path(task.path), data)
    return ChunkAnswer(
        statuses=rows.statuses,
        reasons=rows.reasons,
        size_bytes=len(data),
        sha256=hashlib.sha256(data).hexdigest(),
        values=b"" if task.path else bytes(data),
    )


def summary_frames(
    folder: str, chunks: tuple[StoredRows, ...], levels: tuple[float, ...], extreme_count: int
) -> list[bytes]:
    """Summarize the rows of a batch; return the response messages, serialized."""
    submission = _submission((Path(folder) / "recipe").read_bytes())
    layout = layout_of(submission.network, submission.analysis)
    summary = summarize(Path(folder), chunks, layout, levels, extreme_count)
    return [frame.SerializeToString() for frame in summary_to_messages(summary)]


def recipe_of(overrides: Overrides, analysis: Analysis) -> bytes:
    """Return all of a submission but the numbers that vary, the same bytes for the same content."""
    message = submission_to_message(Submission(overrides.network, analysis, overrides.heads))
    message.ClearField("size")
    return bytes(message.SerializeToString(deterministic=True))


@functools.lru_cache(maxsize=4)
def _desk(recipe: bytes) -> Desk:
    submission = _submission(recipe)
    return desk_of(Overrides(submission.network, submission.columns), submission.analysis)


def _submission(recipe: bytes) -> Submission:
    return submission_from_message(batch_service_pb2.SubmitBatchRequest.FromString(recipe))


def _write_down(folder: Path, recipe: bytes, columns: bytes) -> None:
    """Make the folder of a submission durable, or leave none."""
    try:
        with room_in_state_folder():
            folder.mkdir(mode=0o700)
            write_durably(folder / "recipe", recipe)
            write_durably(folder / "columns", columns)
            sync_folder(folder)
    except Overloaded:
        shutil.rmtree(folder, ignore_errors=True)
        raise


def _seconds(desk: Desk, numbers: Any) -> tuple[float, float]:
    """Time some variants from all over the batch: return the seconds of a call, and of each row in it.

    In processor time, for others may keep the machine busy. The first look pays for what a worker loads once; more
    rows are tried while that is quick. What a stack does not answer is tried at some of its points only, so that a
    heavy variant does not keep the caller waiting; one row at more of them then parts what each point costs from what
    a variant costs once.
    """
    whole, points_share = desk, 1.0
    if desk.stack is None:
        analysis, points_share = shortened(desk.analysis, BATCH_FORECAST_POINTS)
        desk = desk_of(desk.overrides, analysis)
    call_s = row_s = first_s = 0.0
    for look, count in enumerate((1, 1, *BATCH_FORECAST_ROWS)):
        rows = numbers[np.linspace(0, len(numbers), min(count, len(numbers)) + 1)[1:].astype(np.int64) - 1]
        began_s = time.process_time()
        solve_rows(desk, rows, 0)
        spent_s = max(time.process_time() - began_s, BATCH_FORECAST_TICK_S)
        if len(rows) == 1:
            first_s = row_s = spent_s
        else:
            row_s = max(spent_s - first_s, spent_s / 10) / len(rows)
            call_s = max(spent_s - row_s * len(rows), 0.0)
        if spent_s > (BATCH_FORECAST_S if look else BATCH_FORECAST_COLD_S):
            break
    if points_share <= 1.0:
        return call_s, row_s
    times = BATCH_FORECAST_TIMES if BATCH_FORECAST_TIMES * row_s < BATCH_FORECAST_S else 2
    longer, longer_share = shortened(whole.analysis, times * BATCH_FORECAST_POINTS)
    began_s = time.process_time()
    solve_rows(desk_of(whole.overrides, longer), numbers[:1], 0)
    more_s = max(time.process_time() - began_s - row_s, 0.0)
    return call_s, row_s + more_s * (points_share - 1.0) / max(points_share / longer_share - 1.0, 1.0)


def _header(layout: Layout, variant_count: int) -> bytes:
    message = batch_service_pb2.BatchResultHeader(
        variant_count=variant_count,
        columns=observables_to_messages(layout.observables, "observe"),
        dtype=array_pb2.DTYPE_COMPLEX128 if layout.dtype.kind == "c" else array_pb2.DTYPE_FLOAT64,
        point_count=layout.points.size,
        point_name=layout.point_name,
        points=array_to_message(layout.points),
    )
    return bytes(message.SerializeToString())
