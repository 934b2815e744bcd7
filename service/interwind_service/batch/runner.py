"""The runner: hands pending chunks to an executor and their rows to the store, until nothing is pending.

It keeps no state of its own that matters: kill it anywhere and the store still says what is to be done. What a chunk
yields depends on the chunk alone, so neither the order nor the number of workers nor an interruption shows in a row.
"""

from __future__ import annotations

import queue
import threading
import time
import uuid
from collections import OrderedDict
from collections.abc import Callable
from concurrent.futures import CancelledError, Executor, Future
from dataclasses import dataclass
from math import inf
from typing import Any

from interwind.errors import Cancelled, DataLoss, Overloaded, Unavailable, WorkerLost
from interwind.model.batch import BatchProgress, CostForecast
from interwind_service.batch import folder as files
from interwind_service.batch.rows import Chunk
from interwind_service.batch.store import Store
from interwind_service.batch.work import ChunkAnswer, ChunkTask, Solve
from interwind_service.tolerances import (
    BATCH_EXPIRE_EVERY_S,
    BATCH_OPEN_COUNT,
    BATCH_PROVE_COUNT,
    BATCH_SILENCE_FACTOR,
    BATCH_SILENCE_S,
    BATCH_STORE_RETRY_S,
)

LOST = "a worker died twice at this variant; look at its size, and at the server's log for the signal"
DEFECT = "computing this variant broke the solver; report it with the batch and the row"
OUT_OF_MEMORY = "this variant needs more memory than one worker may use; ask for fewer points or observables"
INPUT_GONE = "the submitted numbers of this batch fail their checksum; delete it and submit it again"


@dataclass(slots=True)
class _Running:
    """A chunk on its way: with a worker, or with the store."""

    chunk: Chunk
    path: str
    silent_at_s: float = inf
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
            _end(running.future, Unavailable("the server is stopping", reason="DRAINING"))
        for batch_id in list(self._open):
            self._forget(batch_id)

    def damaged(self, chunk: Chunk) -> None:
        """Have a chunk computed again whose file failed its checksum."""
        self._tell("batch_result_damaged", batch_id=chunk.batch_id, first_row=chunk.first_row)
        self._store.chunks.damaged(chunk).result()

    def _withdraw(self, batch_id: str) -> None:
        for running in list(self._running.values()):
            if running.chunk.batch_id == batch_id:
                _end(running.future, Cancelled("the batch was cancelled"))
        self._events.put(lambda: self._forget(batch_id))

    def _run(self) -> None:
        self._fill()
        self._prove_newest()
        while not self._stopping:
            now_s = time.monotonic()
            if now_s >= self._expire_at_s:
                self._expire_at_s = now_s + BATCH_EXPIRE_EVERY_S
                self._store.expire()
            until_s = self._expire_at_s if self._pause_until_s <= now_s else self._pause_until_s
            until_s = min([until_s, *(running.silent_at_s for running in self._running.values())])
            try:
                event: Callable[[], None] | None = self._events.get(timeout=max(until_s - now_s, 0.0))
            except queue.Empty:
                event = None
            while event is not None:
                event()
                event = None if self._events.empty() else self._events.get()
            self._fill()

    def _fill(self) -> None:
        self._give_up_the_silent()
        room = self._depth - sum(running.future is not None for running in self._running.values())
        if room <= 0 or self._stopping or time.monotonic() < self._pause_until_s:
            return
        for chunk in self._store.chunks.pending(room + len(self._running)):
            if room and chunk.key not in self._running:
                room -= self._hand_out(chunk)

    def _give_up_the_silent(self) -> None:
        """Take back chunks of which a cluster has said nothing for too long; a late answer is not needed any more."""
        now_s = time.monotonic()
        for key, running in list(self._running.items()):
            if running.future is not None and running.silent_at_s < now_s:
                self._tell("batch_chunk_silent", batch_id=running.chunk.batch_id, first_row=running.chunk.first_row)
                del self._running[key]
                running.future.cancel()

    def _hand_out(self, chunk: Chunk) -> int:
        try:
            recipe, columns, width = self._ingredients(chunk.batch_id)
            columns.seek(8 * width * chunk.first_row)
            numbers = columns.read(8 * width * chunk.row_count)
        except DataLoss:
            self._store.chunks.fail(chunk, "INPUT_DAMAGED", INPUT_GONE).result()
            return 0
        except FileNotFoundError:  # the batch was deleted this very moment
            return 0
        part = self._store.folder.batch(chunk.batch_id) / f"{uuid.uuid4().hex}.part"
        task = ChunkTask(recipe, numbers, chunk.first_row, chunk.row_count, "" if self._by_value else str(part))
        running = _Running(chunk, str(part))
        if self._by_value:
            forecast = self._store.progress(chunk.batch_id).forecast or CostForecast(chunk_count=1)
            patience_s = max(BATCH_SILENCE_S, BATCH_SILENCE_FACTOR * forecast.duration_s / forecast.chunk_count)
            running.silent_at_s = time.monotonic() + patience_s
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
                    files.write_durably(part, answer.values)
                except OSError:
                    self._leave(chunk)
                    return
            stored = self._store.chunks.finish(chunk, answer, part)
        elif isinstance(error, Cancelled | CancelledError | OSError | Overloaded) or _draining(error):
            self._leave(chunk, pause=not isinstance(error, Cancelled | CancelledError))
            return
        else:
            code, message = _verdict(error)
            self._tell("batch_chunk_lost", batch_id=chunk.batch_id, first_row=chunk.first_row, error=repr(error))
            stored = self._store.chunks.lost(chunk, code, message)
        stored.add_done_callback(
            lambda done: self._events.put(lambda: self._leave(chunk, pause=done.exception() is not None))
        )

    def _leave(self, chunk: Chunk, *, pause: bool = True) -> None:
        self._running.pop(chunk.key, None)
        if pause:
            self._pause()

    def _pause(self) -> None:
        self._pause_until_s = time.monotonic() + BATCH_STORE_RETRY_S

    def _prove_newest(self) -> None:
        """Look at every stored file's size, and at every byte of the newest: those a power cut may have torn."""
        found = []
        for chunk in self._store.chunks.done():
            path = self._store.folder.batch(chunk.batch_id) / files.rows_name(chunk.first_row, chunk.row_count)
            try:
                stat = path.stat()
                found.append((stat.st_mtime, chunk, path, stat.st_size))
            except FileNotFoundError:
                found.append((float("inf"), chunk, path, 0))
        found.sort(key=lambda item: item[0], reverse=True)
        for position, (_, chunk, path, size_bytes) in enumerate(found):
            if self._stopping:
                return
            if size_bytes != chunk.size_bytes or position < BATCH_PROVE_COUNT:
                try:
                    files.prove(path, chunk.size_bytes, chunk.sha256)
                except DataLoss:
                    self.damaged(chunk)


def _end(future: Future[ChunkAnswer] | None, reason: Cancelled | Unavailable) -> None:
    """Free the worker at once where the executor can; elsewhere take the chunk from the queue."""
    if future is not None:
        end = getattr(future, "end", None)
        if end is not None:
            end(reason)
        else:
            future.cancel()


def _draining(error: BaseException) -> bool:
    return isinstance(error, Unavailable) and not isinstance(error, WorkerLost)


def _verdict(error: BaseException) -> tuple[str, str]:
    if isinstance(error, MemoryError):
        return "OUT_OF_MEMORY", OUT_OF_MEMORY
    if isinstance(error, WorkerLost) or type(error).__name__ == "KilledWorker":
        return "WORKER_LOST", LOST
    return "INTERNAL", DEFECT
