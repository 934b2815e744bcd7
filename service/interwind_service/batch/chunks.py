"""The chunks of the store: which are to be computed, and what became of each, once."""

from __future__ import annotations

import itertools
import json
import sqlite3
from collections.abc import Callable, Iterator
from concurrent.futures import Future
from pathlib import Path

from interwind.model.batch import BatchState
from interwind_service.batch import folder as files
from interwind_service.batch.journal import Journal
from interwind_service.batch.rows import Chunk, chunk_of, reasons_text
from interwind_service.batch.schema import DONE, PENDING
from interwind_service.batch.work import FAILED_CODE, STATUS_CODE, STATUSES, ChunkAnswer
from interwind_service.tolerances import BATCH_CHUNK_TRIES, BATCH_SPLIT

COUNTED = STATUSES[:3]  # cancelled rows are counted where a batch is cancelled


class ChunkLedger:
    """The chunks of every batch in ``journal``; their numbers stand in ``folder``.

    ``ended`` tells, of a batch done now, when that is, when it expires, and at which age of the folder.
    """

    def __init__(
        self, journal: Journal, folder: files.StateFolder, ended: Callable[[], tuple[float, float, float]]
    ) -> None:
        self._journal = journal
        self._folder = folder
        self._ended = ended
        (last,) = journal.read("SELECT coalesce(max(stored_number), 0) AS number FROM chunk")
        self._stored = itertools.count(last["number"] + 1)

    def pending(self, limit: int) -> list[Chunk]:
        """Return up to ``limit`` chunks to compute of every batch that has any, in turns, the oldest batch first."""
        batches = self._journal.read(
            "SELECT key, batch_id FROM batch"
            " WHERE EXISTS (SELECT 1 FROM chunk WHERE chunk.batch = batch.key AND state = 0) ORDER BY key"
        )
        turns: list[tuple[int, int, Chunk]] = []
        for batch in batches:
            rows = self._journal.read(
                "SELECT *, ? AS batch_id FROM chunk WHERE batch = ? AND state = 0 ORDER BY first_row LIMIT ?",
                batch["batch_id"], batch["key"], limit,
            )  # fmt: skip
            turns += [(turn, batch["key"], chunk_of(row)) for turn, row in enumerate(rows)]
        return [chunk for _, _, chunk in sorted(turns, key=lambda item: item[:2])]

    def done(self) -> Iterator[Chunk]:
        """Yield every chunk whose numbers stand in a file, the latest stored first."""
        for row in self._journal.read(
            "SELECT chunk.*, batch_id FROM chunk JOIN batch ON batch.key = chunk.batch"
            " WHERE chunk.state = ? AND size_bytes > 0 ORDER BY stored_number DESC", DONE,
        ):  # fmt: skip
            yield chunk_of(row)

    def of_batch(self, batch_id: str) -> list[Chunk]:
        """Return the chunks of a batch in the order of their rows."""
        rows = self._journal.read(
            "SELECT chunk.*, batch_id FROM chunk JOIN batch ON batch.key = chunk.batch"
            " WHERE batch_id = ? ORDER BY first_row", batch_id,
        )  # fmt: skip
        return [chunk_of(row) for row in rows]

    def finish(self, chunk: Chunk, answer: ChunkAnswer, part: Path) -> Future[bool]:
        """Give the rows of a chunk, their numbers durable in ``part``, a place; True when they were the first."""

        def job(connection: sqlite3.Connection) -> bool:
            row = connection.execute("SELECT batch, state FROM chunk WHERE key = ?", (chunk.key,)).fetchone()
            if row is None or row["state"] != PENDING:  # cancelled, deleted or already there
                part.unlink(missing_ok=True)
                return False
            final = self._folder.batch(chunk.batch_id) / files.rows_name(chunk.first_row, chunk.row_count)
            part.replace(final)
            self._journal.at("renamed")
            files.sync_folder(final.parent)
            connection.execute(
                "UPDATE chunk SET state = ?, statuses = ?, reasons = ?, size_bytes = ?, sha256 = ?, stored_number = ?"
                " WHERE key = ?",
                (
                    DONE, answer.statuses, reasons_text(answer), answer.size_bytes, answer.sha256, next(self._stored),
                    chunk.key,
                ),
            )  # fmt: skip
            self._count(connection, row["batch"], answer.statuses, 1)
            self._journal.touch(chunk.batch_id)
            return True

        return self._journal.write(job)

    def lost(self, chunk: Chunk, code: str, message: str) -> Future[None]:
        """A worker died of, or broke at, this chunk: try again; the second time split it, or fail the single row."""

        def job(connection: sqlite3.Connection) -> None:
            row = connection.execute("SELECT * FROM chunk WHERE key = ? AND state = ?", (chunk.key, PENDING)).fetchone()
            if row is None:
                return
            if row["lost_count"] + 1 < BATCH_CHUNK_TRIES:
                connection.execute("UPDATE chunk SET lost_count = lost_count + 1 WHERE key = ?", (chunk.key,))
            elif chunk.row_count > 1:
                step = -(-chunk.row_count // BATCH_SPLIT)
                connection.execute("DELETE FROM chunk WHERE key = ?", (chunk.key,))
                connection.executemany(
                    "INSERT INTO chunk (batch, first_row, row_count) VALUES (?, ?, ?)",
                    (
                        (row["batch"], chunk.first_row + start, min(step, chunk.row_count - start))
                        for start in range(0, chunk.row_count, step)
                    ),
                )
            else:
                self._fail(connection, row, chunk, code, message)

        return self._journal.write(job)

    def fail(self, chunk: Chunk, code: str, message: str) -> Future[None]:
        """Give every row of a chunk the status FAILED: it can never be computed."""

        def job(connection: sqlite3.Connection) -> None:
            row = connection.execute("SELECT * FROM chunk WHERE key = ? AND state = ?", (chunk.key, PENDING)).fetchone()
            if row is not None:
                self._fail(connection, row, chunk, code, message)

        return self._journal.write(job)

    def damaged(self, chunk: Chunk) -> Future[None]:
        """A chunk's file failed its checksum: its rows are to be computed again."""

        def job(connection: sqlite3.Connection) -> None:
            row = connection.execute("SELECT * FROM chunk WHERE key = ? AND state = ?", (chunk.key, DONE)).fetchone()
            if row is not None:
                connection.execute(
                    "UPDATE chunk SET state = ?, statuses = NULL, reasons = NULL, size_bytes = NULL, sha256 = NULL"
                    " WHERE key = ?",
                    (PENDING, chunk.key),
                )
                self._count(connection, row["batch"], row["statuses"], -1)
                self._journal.touch(chunk.batch_id)

        return self._journal.write(job)

    def _fail(self, connection: sqlite3.Connection, row: sqlite3.Row, chunk: Chunk, code: str, message: str) -> None:
        statuses = bytes([FAILED_CODE]) * chunk.row_count
        reasons = json.dumps([[chunk.first_row + k, code, message] for k in range(chunk.row_count)])
        connection.execute(
            "UPDATE chunk SET state = ?, statuses = ?, reasons = ?, size_bytes = 0, sha256 = '' WHERE key = ?",
            (DONE, statuses, reasons, chunk.key),
        )
        self._count(connection, row["batch"], statuses, 1)
        self._journal.touch(chunk.batch_id)

    def _count(self, connection: sqlite3.Connection, batch: int, statuses: bytes, sign: int) -> None:
        counts = [sign * statuses.count(STATUS_CODE[status]) for status in COUNTED]
        connection.execute(
            "UPDATE batch SET ok_count = ok_count + ?, invalid_count = invalid_count + ?,"
            " failed_count = failed_count + ?, sequence = sequence + 1 WHERE key = ?",
            (*counts, batch),
        )
        row = connection.execute("SELECT * FROM batch WHERE key = ?", (batch,)).fetchone()
        done = sum(row[f"{name}_count"] for name in ("ok", "invalid", "failed", "cancelled")) == row["variant_count"]
        if row["cancelled_count"]:
            state = BatchState.CANCELLED
        else:
            state = BatchState.DONE if done else BatchState.RUNNING
        connection.execute(
            "UPDATE batch SET state = ?, done_time_s = ?, expire_time_s = ?, expire_age_s = ? WHERE key = ?",
            (state.value, *(self._ended() if done else (None, None, None)), batch),
        )
