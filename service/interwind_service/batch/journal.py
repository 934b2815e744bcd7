"""The database with its one writer: everything that waits goes into one transaction (group commit); anybody reads."""

from __future__ import annotations

import queue
import sqlite3
import threading
from collections.abc import Callable, Iterator
from concurrent.futures import Future
from contextlib import contextmanager
from pathlib import Path
from typing import Any, TypeVar

from interwind.errors import InterwindError, Unavailable
from interwind_service.batch.folder import no_room
from interwind_service.batch.schema import connect, migrate
from interwind_service.tolerances import BATCH_GROUP_COMMIT_COUNT

T = TypeVar("T")
_Job = tuple[Callable[[sqlite3.Connection], Any], "Future[Any]"]


class Journal:
    """The database at ``path``. ``at`` is called with the name of each point that a death could part from the next."""

    def __init__(self, path: Path, *, at: Callable[[str], None] = lambda name: None) -> None:
        self.at = at
        self._own = connect(str(path))
        migrate(self._own)
        self._reader = connect(str(path))
        self._reading = threading.Lock()
        self._listeners: list[Callable[[frozenset[str]], None]] = []
        self._touched: set[str] = set()
        self._jobs: queue.SimpleQueue[_Job | None] = queue.SimpleQueue()
        self._closed = False
        self._writer = threading.Thread(target=self._write_groups, name="batch-writer", daemon=True)
        self._writer.start()

    def read(self, statement: str, *arguments: Any) -> list[sqlite3.Row]:
        """Return the rows of a query."""
        with self._reading:
            return self._reader.execute(statement, arguments).fetchall()

    def write(self, job: Callable[[sqlite3.Connection], T]) -> Future[T]:
        """Let the writer run ``job`` in its next transaction; the future is settled once that is on the disk.

        A job may raise an `InterwindError` before it changes anything; `Overloaded` says that nothing could be
        written.
        """
        future: Future[T] = Future()
        if self._closed:
            future.set_exception(Unavailable("the server is stopping; send the call again", reason="DRAINING"))
        else:
            self._jobs.put((job, future))
        return future

    def touch(self, batch_id: str) -> None:
        """Tell the listeners of this batch once the running transaction is committed; for jobs only."""
        self._touched.add(batch_id)

    def listen(self, listener: Callable[[frozenset[str]], None]) -> Callable[[], None]:
        """Call ``listener`` with the names of changed batches, from the writer's thread; return how to stop that."""
        self._listeners.append(listener)
        return lambda: self._listeners.remove(listener)

    def close(self) -> None:
        """Write what waits, then let go of the database."""
        if not self._closed:
            self._closed = True
            self._jobs.put(None)
            self._writer.join()
            self._own.close()
            self._reader.close()

    def _write_groups(self) -> None:
        going = True
        while going:
            group = [self._jobs.get()]
            while len(group) < BATCH_GROUP_COMMIT_COUNT and not self._jobs.empty():
                group.append(self._jobs.get())
            going = None not in group
            self._write_group([item for item in group if item is not None])

    def _write_group(self, group: list[_Job]) -> None:
        outcomes: list[Callable[[], None]] = []
        self._touched.clear()
        try:
            with _transaction(self._own, self.at):
                for job, future in group:
                    try:
                        result = job(self._own)
                        outcomes.append(lambda future=future, result=result: future.set_result(result))  # type: ignore[misc]
                    except InterwindError as error:  # raised before the job changed anything
                        outcomes.append(lambda future=future, error=error: future.set_exception(error))  # type: ignore[misc]
        except (sqlite3.Error, OSError) as error:
            refusal = no_room()
            refusal.__cause__ = error
            for _, future in group:
                future.set_exception(refusal)
            return
        self.at("committed")
        touched = frozenset(self._touched)
        for settle in outcomes:
            settle()
        if touched:
            for listener in tuple(self._listeners):
                listener(touched)


@contextmanager
def _transaction(connection: sqlite3.Connection, at: Callable[[str], None]) -> Iterator[None]:
    connection.execute("BEGIN IMMEDIATE")
    try:
        yield
        at("before commit")
        connection.execute("COMMIT")
    except BaseException:
        if connection.in_transaction:
            connection.execute("ROLLBACK")
        raise
