"""The tables of the store and how an older file becomes a newer one."""

from __future__ import annotations

import sqlite3

from interwind.errors import Unavailable

PENDING, DONE, CANCELLED = 0, 1, 2  # states of a chunk

MIGRATIONS = (
    """
    CREATE TABLE batch (
        key INTEGER PRIMARY KEY,
        batch_id TEXT NOT NULL UNIQUE,
        owner TEXT NOT NULL,
        request_id TEXT,
        content_sha256 TEXT NOT NULL,
        recipe_sha256 TEXT NOT NULL,
        columns_sha256 TEXT NOT NULL,
        width INTEGER NOT NULL,
        variant_count INTEGER NOT NULL,
        chunk_rows INTEGER NOT NULL,
        header BLOB NOT NULL,
        duration_s REAL NOT NULL,
        result_bytes INTEGER NOT NULL,
        memory_bytes INTEGER NOT NULL,
        chunk_count INTEGER NOT NULL,
        state TEXT NOT NULL,
        ok_count INTEGER NOT NULL DEFAULT 0,
        invalid_count INTEGER NOT NULL DEFAULT 0,
        failed_count INTEGER NOT NULL DEFAULT 0,
        cancelled_count INTEGER NOT NULL DEFAULT 0,
        sequence INTEGER NOT NULL DEFAULT 1,
        create_time_s REAL NOT NULL,
        done_time_s REAL,
        expire_time_s REAL,
        UNIQUE (owner, request_id)
    ) STRICT;
    CREATE TABLE chunk (
        key INTEGER PRIMARY KEY,
        batch INTEGER NOT NULL REFERENCES batch (key) ON DELETE CASCADE,
        first_row INTEGER NOT NULL,
        row_count INTEGER NOT NULL,
        state INTEGER NOT NULL DEFAULT 0,
        lost_count INTEGER NOT NULL DEFAULT 0,
        statuses BLOB,
        reasons TEXT,
        size_bytes INTEGER,
        sha256 TEXT,
        UNIQUE (batch, first_row)
    ) STRICT;
    CREATE INDEX chunk_pending ON chunk (batch, first_row) WHERE state = 0;
    """,
    # Retention on a clock of the folder's own, and the order in which chunks were stored; neither asks the wall clock.
    """
    CREATE TABLE clock (age_s REAL NOT NULL, wall_s REAL) STRICT;
    INSERT INTO clock VALUES (0.0, NULL);
    ALTER TABLE batch ADD COLUMN expire_age_s REAL;
    UPDATE batch SET expire_age_s = expire_time_s - done_time_s;
    ALTER TABLE chunk ADD COLUMN stored_number INTEGER;
    """,
)


def connect(path: str) -> sqlite3.Connection:
    """Open the database so that what it has committed survives a power cut."""
    connection = sqlite3.connect(path, isolation_level=None, check_same_thread=False, timeout=30.0)
    connection.row_factory = sqlite3.Row
    connection.execute("PRAGMA journal_mode = WAL")
    connection.execute("PRAGMA synchronous = FULL")
    connection.execute("PRAGMA foreign_keys = ON")
    return connection


def migrate(connection: sqlite3.Connection) -> None:
    """Bring the tables to this version; a file of a newer version is refused, not guessed at."""
    (version,) = connection.execute("PRAGMA user_version").fetchone()
    if version > len(MIGRATIONS):
        raise Unavailable(
            f"the state folder was written by a newer version (format {version}, this one knows {len(MIGRATIONS)}); "
            "start the newer one, or give this one a folder of its own",
            reason="STATE_FOLDER_TOO_NEW",
        )
    for number in range(version, len(MIGRATIONS)):
        connection.executescript(f"BEGIN IMMEDIATE; {MIGRATIONS[number]} PRAGMA user_version = {number + 1}; COMMIT;")
