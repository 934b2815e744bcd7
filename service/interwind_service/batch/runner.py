"""The runner: hands pending chunks to an executor and their rows to the store, until nothing is pending.

It keeps no state of its own that matters: kill it anywhere and the store still says what is to be done. What a chunk
yields depends on the chunk alone, so neither the order nor the number of workers nor an interruption shows in a row.
"""

from __future__ import annotations

import queue
import sqlite3
import threading
import time
import uuid
from collections import OrderedDict
from collections.abc import Callable
from concurrent.futures import CancelledError, Executor, Future
from contextlib import suppress
from dataclasses import dataclass
from typing import Any

from interwind.errors import (
    Cancelled,
    DataLoss,
    DeadlineExceeded,
    InterwindError,
    NotFound,
    Overloaded,
    Unavailable,
)
from interwind.model.batch import BatchProgress, CostForecast
from interwind_service.batch import folder as files
from interwind_service.batch.outcome import INPUT_GONE, draining, end, verdict
from interwind_service.batch.rows import Chunk
from interwind_service.batch.store import Store
from interwind_service.batch.work import ChunkAnswer, ChunkTask, Solve
from interwind_service.tolerances import (
    BATCH_EXPIRE_EVERY_S,
    BATCH_LOOK_EVERY_S,
    BATCH_OPEN_COUNT,
    BATCH_PATIENCE_FACTOR,
    BATCH_PATIENCE_S,
    BATCH_PROVE_COUNT,
    BATCH_STORE_RETRY_S,
)


@dataclass(slots=True)
class _Running:
    """A chunk on its way: with a worker, or with the store."""

    chunk: Chunk
    path: str
    patience_s: float
    begun_s: float
    future: Future[ChunkAnswer] | None = None


class Runner:
    """Computes what ``store`` has pending by ``solve`` on ``executor``, ``depth`` chunks at a time.

    ``by_value``: the workers share no folder with the server, so numbers come back in the answer. ``tell`` is called
    with an event and its fields for the log.
    """

    def __init__(
        self,
        store: Store,
        executor: Executor,
        solve: Solve,
        *,
        depth: int,
        by_value: bool = False,
        tell: Callable[..., None] = lambda event, **fields: None,
    ) -> None:
        self._store = store
        self._executor = executor
        self._solve = solve
        self._depth = depth
        self._by_value = by_value
        self._tell = tell
        self._running: dict[int, _Running] = {}
        self._open: OrderedDict[str, tuple[bytes, Any, int]] = OrderedDict()
        self._events: queue.SimpleQueue[Callable[[], None]] = queue.SimpleQueue()
        self._stopping = False
        self.held_reason = ""  # why nothing could be stored the last time, as told in the progress of every batch
        self._pause_until_s = 0.0
        self._expire_at_s = 0.0
        self._stop_listening = store.listen(lambda touched: self.wake())
        self._thread = threading.Thread(target=self._run, name="batch-runner", daemon=True)
        self._thread.start()

    def wake(self) -> None:
        """Look for pending chunks now."""
        self._events.put(lambda: None)

    def cancel(self, batch_id: str, owner: str | None = None) -> BatchProgress:
        """Give up what is pending of a batch, and free the workers that compute it."""
        progress = self._store.cancel(batch_id, owner)
        self._withdraw(batch_id)
        return progress

    def delete(self, batch_id: str, owner: str | None = None) -> None:
        """Delete a batch, and free the workers that compute it."""
        self._store.delete(batch_id, owner)
        self._withdraw(batch_id)

    def stop(self) -> None:
        """Hand out nothing more and free the workers; what they were at stays pending."""
        if self._stopping:
            return
        self._stopping = True
        self._stop_listening()
        self.wake()
        self._thread.join()
        for running in list(self._running.values()):
            end(running.future, Unavailable("the server is stopping", reason="DRAINING"))
        for batch_id in list(self._open):
            self._forget(batch_id)

    def damaged(self, chunk: Chunk) -> None:
        """Have a chunk computed again whose file failed its checksum."""
        self._tell("batch_result_damaged", batch_id=chunk.batch_id, first_row=chunk.first_row)
        self._store.chunks.damaged(chunk).result()

    def _withdraw(self, batch_id: str) -> None:
        for running in list(self._running.values()):
            if running.chunk.batch_id == batch_id:
                end(running.future, Cancelled("the batch was cancelled"))
        self._events.put(lambda: self._forget(batch_id))

    def _run(self) -> None:
        proven = False
        while not self._stopping:
            try:
                self._fill()
                if not proven:
                    proven = True
                    self._prove_newest()
                self._expire()
                self._wait()
            except (InterwindError, OSError, sqlite3.Error) as error:  # the disk, mostly; what is pending stays so
                self._tell("batch_runner_held_up", error=repr(error))
                time.sleep(BATCH_STORE_RETRY_S)

    def _expire(self) -> None:
        now_s = time.monotonic()
        if now_s >= self._expire_at_s:
            self._expire_at_s = now_s + BATCH_EXPIRE_EVERY_S
            self._store.expire()

    def _wait(self) -> None:
        """Wait for something to happen, and deal with all that has."""
        now_s = time.monotonic()
        until_s = self._expire_at_s if self._pause_until_s <= now_s else self._pause_until_s
        if self._running:
            until_s = min(until_s, now_s + BATCH_LOOK_EVERY_S)
        try:
            event = self._events.get(timeout=max(until_s - now_s, 0.0))
        except queue.Empty:
            return
        event()
        while not self._events.empty():
            self._events.get()()

    def _fill(self) -> None:
        self._give_up_the_overdue()
        room = self._depth - sum(running.future is not None for running in self._running.values())
        if room <= 0 or self._stopping or time.monotonic() < self._pause_until_s:
            return
        for chunk in self._store.chunks.pending(room + len(self._running)):
            if room and chunk.key not in self._running:
                with suppress(NotFound, FileNotFoundError):  # the batch was deleted this very moment
                    room -= self._hand_out(chunk)

    def _give_up_the_overdue(self) -> None:
        """End chunks that take far longer than forecast; of a cluster, which cannot end them, ask anew."""
        now_s = time.monotonic()
        for key, running in list(self._running.items()):
            future = running.future
            began_s = getattr(future, "started_s", running.begun_s)  # None: it still waits for a worker
            if future is None or began_s is None or now_s - began_s < running.patience_s:
                continue
            self._tell("batch_chunk_overdue", batch_id=running.chunk.batch_id, first_row=running.chunk.first_row)
            if self._by_value:
                del self._running[key]
                future.cancel()  # a late answer is not needed any more
            else:
                end(future, DeadlineExceeded("the chunk took far longer than it was forecast to"))

    def _hand_out(self, chunk: Chunk) -> int:
        try:
            recipe, columns, width = self._ingredients(chunk.batch_id)
            columns.seek(8 * width * chunk.first_row)
            numbers = columns.read(8 * width * chunk.row_count)
        except DataLoss:
            self._store.chunks.fail(chunk, "INPUT_DAMAGED", INPUT_GONE).result()
            return 0
        part = self._store.folder.batch(chunk.batch_id) / f"{uuid.uuid4().hex}.part"
        task = ChunkTask(recipe, numbers, chunk.first_row, chunk.row_count, "" if self._by_value else str(part))
        forecast = self._store.progress(chunk.batch_id).forecast or CostForecast(chunk_count=1)
        patience_s = max(BATCH_PATIENCE_S, BATCH_PATIENCE_FACTOR * forecast.duration_s / forecast.chunk_count)
        running = _Running(chunk, str(part), patience_s, time.monotonic())
        self._running[chunk.key] = running
        try:
            running.future = self._executor.submit(self._solve, task)
        except Unavailable:  # the pool is being shut down
            del self._running[chunk.key]
            self._pause()
            return 0
        running.future.add_done_callback(lambda future: self._events.put(lambda: self._settle(running, future)))
        return 1

    def _ingredients(self, batch_id: str) -> tuple[bytes, Any, int]:
        if batch_id not in self._open:
            known = self._store.ingredients(batch_id)
            recipe, columns = known.folder / "recipe", known.folder / "columns"
            for path, sha256 in ((recipe, known.recipe_sha256), (columns, known.columns_sha256)):
                files.prove(path, path.stat().st_size, sha256)
            self._open[batch_id] = (recipe.read_bytes(), columns.open("rb"), known.width)
            while len(self._open) > BATCH_OPEN_COUNT:
                self._forget(next(iter(self._open)))
        self._open.move_to_end(batch_id)
        return self._open[batch_id]

    def _forget(self, batch_id: str) -> None:
        if batch_id in self._open:
            self._open.pop(batch_id)[1].close()

    def _settle(self, running: _Running, future: Future[ChunkAnswer]) -> None:
        if self._running.get(running.chunk.key) is not running:
            return  # given up before
        chunk, running.future = running.chunk, None
        error: BaseException | None = CancelledError() if future.cancelled() else future.exception()
        stored: Future[Any]
        if error is None:
            answer = future.result()
            part = self._store.folder.batch(chunk.batch_id) / running.path.rpartition("/")[2]
            if self._by_value:
                try:
                    with files.room_in_state_folder():
                        files.write_durably(part, answer.values)
                except (OSError, Overloaded) as refusal:
                    self._leave(chunk, refusal)
                    return
            stored = self._store.chunks.finish(chunk, answer, part)
        elif isinstance(error, Cancelled | CancelledError | OSError | Overloaded) or draining(error):
            self._leave(chunk, error)
            return
        else:
            code, message = verdict(error)
            self._tell("batch_chunk_lost", batch_id=chunk.batch_id, first_row=chunk.first_row, error=repr(error))
            stored = self._store.chunks.lost(chunk, code, message)
        stored.add_done_callback(lambda done: self._events.put(lambda: self._leave(chunk, done.exception())))

    def _leave(self, chunk: Chunk, error: BaseException | None) -> None:
        """Have done with a chunk: it is stored, or stays pending because of ``error``."""
        self._running.pop(chunk.key, None)
        if error is None:
            self._hold("")
        elif not isinstance(error, Cancelled | CancelledError | FileNotFoundError):  # not found: the batch was deleted
            if not draining(error):
                self._hold(getattr(error, "reason", "STATE_FOLDER_FAILED"))
            self._pause()

    def _hold(self, reason: str) -> None:
        if reason != self.held_reason:
            self.held_reason = reason
            self._tell("batches_held_up" if reason else "batches_go_on", reason=reason)

    def _pause(self) -> None:
        self._pause_until_s = time.monotonic() + BATCH_STORE_RETRY_S

    def _prove_newest(self) -> None:
        """Look at every stored file's size, and at every byte of the newest: those a power cut may have torn."""
        for position, chunk in enumerate(self._store.chunks.done()):
            if self._stopping:
                return
            path = self._store.folder.batch(chunk.batch_id) / files.rows_name(chunk.first_row, chunk.row_count)
            try:
                size_bytes = path.stat().st_size
            except FileNotFoundError:
                size_bytes = 0
            if size_bytes != chunk.size_bytes or position < BATCH_PROVE_COUNT:
                try:
                    files.prove(path, chunk.size_bytes, chunk.sha256)
                except DataLoss:
                    self.damaged(chunk)
