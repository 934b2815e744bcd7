"""A batch whose rows are known beforehand: row r holds r² at three points. Also a program that dies computing it."""

from __future__ import annotations

import hashlib
import os
import signal
import sys
import time
import uuid
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import numpy as np

from interwind.model.batch import CostForecast
from interwind_service.batch.folder import StateFolder, rows_name, write_durably
from interwind_service.batch.runner import Runner
from interwind_service.batch.store import Store
from interwind_service.batch.work import OK_CODE, ChunkAnswer, ChunkTask, Plan

POINTS = 3


def solve(task: ChunkTask) -> ChunkAnswer:
    """Square the one number of each row."""
    numbers = np.frombuffer(task.columns, "<f8")
    data = np.repeat((numbers**2)[None, :, None], POINTS, axis=2).tobytes()
    if task.path:
        write_durably(Path(task.path), data)
    sha256 = hashlib.sha256(data).hexdigest()
    return ChunkAnswer(bytes([OK_CODE]) * task.row_count, (), len(data), sha256, b"" if task.path else data)


def plan(folder: StateFolder, count: int, chunk_rows: int, request_id: str = "", content: str = "content") -> Plan:
    """Write down a batch of ``count`` rows."""
    incoming = folder.incoming / uuid.uuid4().hex
    incoming.mkdir()
    parts = {"recipe": b"squares", "columns": np.arange(count, dtype="<f8").tobytes()}
    for name, data in parts.items():
        write_durably(incoming / name, data)
    recipe, columns = (hashlib.sha256(data).hexdigest() for data in parts.values())
    forecast = CostForecast(chunk_count=-(-count // chunk_rows))
    return Plan(incoming.name, request_id, content, recipe, columns, 1, count, chunk_rows, b"", forecast)


def rows_of(store: Store, batch_id: str) -> np.ndarray:
    """Read every row from the files, shape (rows,); each must be there once."""
    found = []
    for chunk in store.chunks.of_batch(batch_id):
        path = store.folder.batch(batch_id) / rows_name(chunk.first_row, chunk.row_count)
        data = path.read_bytes()
        assert chunk.sha256 == hashlib.sha256(data).hexdigest()
        found.append(np.frombuffer(data, "<f8").reshape(chunk.row_count, POINTS)[:, 0])
    return np.concatenate(found)


def wait_done(store: Store, batch_id: str, limit_s: float = 30.0):
    """Wait until the batch is done and return its progress."""
    end_s = time.monotonic() + limit_s
    while not (progress := store.progress(batch_id)).done:
        assert time.monotonic() < end_s, progress
        time.sleep(0.01)
    return progress


def main(path: str, point: str, count: int) -> None:
    """Go on with the batch under ``path``, or begin it; die by SIGKILL when ``point`` is passed ``count`` times."""
    passed = 0

    def at(name: str) -> None:
        nonlocal passed
        if name == point:
            passed += 1
            if passed == count:
                os.kill(os.getpid(), signal.SIGKILL)

    store = Store(StateFolder(path), retain_s=3600.0, at=at)
    progress = store.create(plan(store.folder, 400, 8, "the one"))
    runner = Runner(store, ThreadPoolExecutor(2), solve, depth=3)
    wait_done(store, progress.batch_id)
    runner.stop()
    store.close()


if __name__ == "__main__":
    main(sys.argv[1], sys.argv[2], int(sys.argv[3]))
