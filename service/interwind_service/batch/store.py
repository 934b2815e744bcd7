"""The store of batches: what was submitted, and each row once.

Numbers stand in files beside the database: a file is on the disk, under its final name, before the row that tells its
checksum is committed. So after any death a chunk is either there, whole and provable, or pending; computing it again
gives the same bytes.
"""

from __future__ import annotations

import secrets
import shutil
import sqlite3
import time
from collections.abc import Callable

from interwind.errors import InvalidRequest, NotFound, OutOfRange, Overloaded
from interwind.model.batch import BatchProgress, BatchState
from interwind_service.batch import folder as files
from interwind_service.batch.age import FolderAge
from interwind_service.batch.chunks import ChunkLedger
from interwind_service.batch.journal import Journal
from interwind_service.batch.rows import Chunk, Ingredients, chunk_of, progress_of
from interwind_service.batch.schema import CANCELLED, PENDING
from interwind_service.batch.work import Plan


class Store:
    """Batches in a `StateFolder`, kept ``retain_s`` after they are done.

    ``at`` is called with the name of each point between two steps that a death could part; the crash tests die there.
    """

    def __init__(
        self,
        folder: files.StateFolder,
        *,
        retain_s: float,
        at: Callable[[str], None] = lambda name: None,
        wall_s: Callable[[], float] = time.time,
    ) -> None:
        self.folder = folder
        self._retain_s = retain_s
        self._wall_s = wall_s
        self._journal = Journal(folder.database, at=at)
        self._age = FolderAge(self._journal, retain_s, wall_s)
        self.chunks = ChunkLedger(self._journal, folder, self._ended)
        folder.sweep(row["batch_id"] for row in self._journal.read("SELECT batch_id FROM batch"))

    def listen(self, listener: Callable[[frozenset[str]], None]) -> Callable[[], None]:
        """Call ``listener`` with the names of changed batches, from the writer's thread; return how to stop that."""
        return self._journal.listen(listener)

    def close(self) -> None:
        """Write what waits, then let go of the database and of the folder."""
        self._journal.write(self._age.keep)
        self._journal.close()
        self.folder.close()

    def create(self, plan: Plan, owner: str = "") -> BatchProgress:
        """Store a planned submission; a ``request_id`` used before, with the same content, is the batch it made."""

        def job(connection: sqlite3.Connection) -> str:
            known = connection.execute(
                "SELECT batch_id, content_sha256 FROM batch WHERE owner = ? AND request_id = ?",
                (owner, plan.request_id or None),
            ).fetchone()
            if known is not None:
                shutil.rmtree(self.folder.incoming / plan.folder, ignore_errors=True)
                if known["content_sha256"] != plan.content_sha256:
                    raise InvalidRequest.at(
                        "request_id",
                        f"{plan.request_id!r} was used for another batch ({known['batch_id']}); take a new one",
                        reason="REQUEST_ID_REUSED",
                        batch_id=known["batch_id"],
                    )
                return str(known["batch_id"])
            free = shutil.disk_usage(self.folder.path).free
            if plan.forecast.result_bytes > free:
                shutil.rmtree(self.folder.incoming / plan.folder, ignore_errors=True)
                raise Overloaded(
                    f"the results need {plan.forecast.result_bytes} bytes, the state folder has {free} left; observe"
                    " less, delete batches that are done, or submit the variants in parts",
                    reason="STATE_FOLDER_FULL",
                    metadata={"result_bytes": str(plan.forecast.result_bytes), "free_bytes": str(free)},
                )
            batch_id = secrets.token_hex(8)
            (self.folder.incoming / plan.folder).rename(self.folder.batch(batch_id))
            files.sync_folder(self.folder.batches)
            forecast = plan.forecast
            key = connection.execute(
                "INSERT INTO batch (batch_id, owner, request_id, content_sha256, recipe_sha256, columns_sha256, width,"
                " variant_count, chunk_rows, header, duration_s, result_bytes, memory_bytes, chunk_count, state,"
                " create_time_s) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)",
                (
                    batch_id, owner, plan.request_id or None, plan.content_sha256, plan.recipe_sha256,
                    plan.columns_sha256, plan.width, plan.variant_count, plan.chunk_rows, plan.header,
                    forecast.duration_s, forecast.result_bytes, forecast.memory_bytes, forecast.chunk_count,
                    BatchState.WAITING.value, self._wall_s(),
                ),
            ).lastrowid  # fmt: skip
            connection.executemany(
                "INSERT INTO chunk (batch, first_row, row_count) VALUES (?, ?, ?)",
                (
                    (key, first, min(plan.chunk_rows, plan.variant_count - first))
                    for first in range(0, plan.variant_count, plan.chunk_rows)
                ),
            )
            self._journal.touch(batch_id)
            return batch_id

        return self.progress(self._journal.write(job).result(), owner)

    def progress(self, batch_id: str, owner: str | None = None) -> BatchProgress:
        """Return how far a batch has come; one that is not there, or is another's, is `NotFound`."""
        return progress_of(self._row(batch_id, owner))

    def page(self, owner: str | None, size: int, token: str) -> tuple[list[BatchProgress], str]:
        """Return up to ``size`` batches, newest first, and the token of the next page ("" at the end)."""
        before = 2**62
        if token:
            if not token.isdecimal() or len(token) > 18:
                raise OutOfRange(f"page_token: {token!r} found; use the next_page_token of the page before")
            before = int(token)
        rows = self._journal.read(
            "SELECT * FROM batch WHERE key < ? AND (? IS NULL OR owner = ?) ORDER BY key DESC LIMIT ?",
            before, owner, owner, size + 1,
        )  # fmt: skip
        following = str(rows[size - 1]["key"]) if len(rows) > size else ""
        return [progress_of(row) for row in rows[:size]], following

    def cancel(self, batch_id: str, owner: str | None = None) -> BatchProgress:
        """Give up the chunks that have no rows yet; a batch that is done stays as it is."""
        key = self._row(batch_id, owner)["key"]

        def job(connection: sqlite3.Connection) -> None:
            (rows,) = connection.execute(
                "SELECT coalesce(sum(row_count), 0) FROM chunk WHERE batch = ? AND state = ?", (key, PENDING)
            ).fetchone()
            if rows:
                connection.execute(
                    "UPDATE chunk SET state = ? WHERE batch = ? AND state = ?", (CANCELLED, key, PENDING)
                )
                connection.execute(
                    "UPDATE batch SET cancelled_count = cancelled_count + ?, sequence = sequence + 1, state = ?,"
                    " done_time_s = ?, expire_time_s = ?, expire_age_s = ? WHERE key = ?",
                    (rows, BatchState.CANCELLED.value, *self._ended(), key),
                )
                self._journal.touch(batch_id)

        self._journal.write(job).result()
        return self.progress(batch_id, owner)

    def delete(self, batch_id: str, owner: str | None = None) -> None:
        """Delete a batch, whatever its state, and its results; on a full disk they make the room to say so."""
        key = self._row(batch_id, owner)["key"]

        def job(connection: sqlite3.Connection) -> None:
            connection.execute("DELETE FROM batch WHERE key = ?", (key,))
            self._journal.touch(batch_id)

        try:
            self._journal.write(job).result()
        except Overloaded:
            for rows in self.folder.batch(batch_id).glob(files.rows_name("*", "*")):
                rows.unlink(missing_ok=True)
            self._journal.write(job).result()
        shutil.rmtree(self.folder.batch(batch_id), ignore_errors=True)

    def item_counts(self) -> dict[str, int]:
        """Return the rows of all batches held, by state."""
        states = ("ok", "invalid", "failed", "cancelled")
        sums = ", ".join(f"total({state}_count)" for state in states)
        (row,) = self._journal.read(f"SELECT {sums}, total(variant_count) FROM batch")
        counts = {state: int(count) for state, count in zip(states, row, strict=False)}
        return counts | {"pending": int(row[-1]) - sum(counts.values())}

    def expire(self) -> None:
        """Delete the batches that are done and whose time has come."""

        def job(connection: sqlite3.Connection) -> list[str]:
            self._age.keep(connection)
            rows = connection.execute(
                "DELETE FROM batch WHERE expire_age_s < ? RETURNING batch_id", (self._age.now_s(),)
            )
            expired = [row["batch_id"] for row in rows]
            for batch_id in expired:
                self._journal.touch(batch_id)
            return expired

        for batch_id in self._journal.write(job).result():
            shutil.rmtree(self.folder.batch(batch_id), ignore_errors=True)

    def ingredients(self, batch_id: str, owner: str | None = None) -> Ingredients:
        """Return where the submitted numbers of a batch stand."""
        row = self._row(batch_id, owner)
        return Ingredients(
            self.folder.batch(batch_id), row["recipe_sha256"], row["columns_sha256"], row["width"], row["header"]
        )

    def chunk_at(self, batch_id: str, row: int) -> Chunk | None:
        """Return the chunk that holds a row, None past the last one."""
        rows = self._journal.read(
            "SELECT chunk.*, batch_id FROM chunk JOIN batch ON batch.key = chunk.batch"
            " WHERE batch_id = ? AND first_row <= ? ORDER BY first_row DESC LIMIT 1",
            batch_id, row,
        )  # fmt: skip
        found = [chunk_of(item) for item in rows if row < item["first_row"] + item["row_count"]]
        return found[0] if found else None

    def _ended(self) -> tuple[float, float, float]:
        """Return, for a batch done now, the two dates that are told, and the age of the folder at which it leaves."""
        now_s = self._wall_s()
        return now_s, now_s + self._retain_s, self._age.now_s() + self._retain_s

    def _row(self, batch_id: str, owner: str | None) -> sqlite3.Row:
        rows = self._journal.read(
            "SELECT * FROM batch WHERE batch_id = ? AND (? IS NULL OR owner = ?)", batch_id, owner, owner
        )
        if not rows:
            raise NotFound(
                f"no batch {batch_id!r} is here; it was deleted, has expired, or belongs to another token",
                metadata={"batch_id": batch_id},
            )
        return rows[0]
