"""The state folder: one server at a time, and every file in it either whole or not there."""

from __future__ import annotations

import errno
import fcntl
import hashlib
import os
import shutil
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from pathlib import Path

from interwind.errors import DataLoss, Overloaded, Unavailable
from interwind_service.tolerances import BATCH_STORE_RETRY_S

FULL_DISK = (errno.ENOSPC, errno.EDQUOT, errno.EFBIG)
READ_BYTES = 1 << 20


class StateFolder:
    """``path`` with its lock, held until `close` or until the process ends, however it ends."""

    def __init__(self, path: str | Path) -> None:
        self.path = Path(path)
        self.batches = self.path / "batches"
        self.incoming = self.path / "incoming"
        for folder in (self.path, self.batches, self.incoming):
            folder.mkdir(mode=0o700, parents=True, exist_ok=True)
        self._lock = os.open(self.path / "lock", os.O_RDWR | os.O_CREAT | os.O_CLOEXEC, 0o600)
        try:
            fcntl.flock(self._lock, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except OSError as error:
            os.close(self._lock)
            raise Unavailable(
                f"the state folder {self.path} is in use by another server; stop that one or give each its own",
                reason="STATE_FOLDER_IN_USE",
            ) from error

    @property
    def database(self) -> Path:
        """The file of the database."""
        return self.path / "batches.sqlite3"

    def batch(self, batch_id: str) -> Path:
        """The folder of one batch."""
        return self.batches / batch_id

    def close(self) -> None:
        """Free the lock."""
        os.close(self._lock)

    def sweep(self, keep: Iterable[str]) -> None:
        """Delete what no batch of ``keep`` owns: half-made submissions and rows, folders of deleted batches."""
        kept = set(keep)
        for leftover in self.incoming.iterdir():
            shutil.rmtree(leftover, ignore_errors=True)
        for folder in self.batches.iterdir():
            if folder.name not in kept:
                shutil.rmtree(folder, ignore_errors=True)
            else:
                for part in folder.glob("*.part"):
                    part.unlink(missing_ok=True)


def rows_name(first_row: int | str, row_count: int | str) -> str:
    """Return the name of the file that holds the numbers of these rows; of all files of rows for "*", "*"."""
    return f"rows-{first_row}-{row_count}"


@contextmanager
def room_in_state_folder() -> Iterator[None]:
    """Turn a full disk, met inside, into `Overloaded`; nothing was stored."""
    try:
        yield
    except OSError as error:
        if error.errno not in FULL_DISK:
            raise
        raise no_room() from error


def no_room() -> Overloaded:
    """Return what a caller is told when the state folder cannot be written to."""
    return Overloaded(
        "the state folder cannot be written to (is its disk full?); nothing was stored, try again later",
        reason="STATE_FOLDER_FULL",
        retry_after_s=BATCH_STORE_RETRY_S,
    )


def write_durably(path: Path, data: bytes | memoryview) -> None:
    """Write a whole new file and see it on the disk, or leave none; its name is durable after `sync_folder`."""
    handle = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_TRUNC | os.O_CLOEXEC, 0o600)
    try:
        view = memoryview(data).cast("B") if len(data) else memoryview(b"")
        while view:
            view = view[os.write(handle, view) :]
        os.fsync(handle)
    except OSError:
        path.unlink(missing_ok=True)  # a part of it would take up the room that others wait for
        raise
    finally:
        os.close(handle)


def sync_folder(path: Path) -> None:
    """See the names in a folder on the disk."""
    handle = os.open(path, os.O_RDONLY | os.O_DIRECTORY | os.O_CLOEXEC)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def file_sha256(path: Path) -> str:
    """Return the SHA-256 of a file, 64 hexadecimal digits, read in parts."""
    digest = hashlib.sha256()
    with path.open("rb") as file:
        while part := file.read(READ_BYTES):
            digest.update(part)
    return digest.hexdigest()


def prove(path: Path, size_bytes: int, sha256: str) -> None:
    """Refuse a file that is not, byte for byte, what was written."""
    try:
        found = path.stat().st_size
        if found == size_bytes and file_sha256(path) == sha256:
            return
    except FileNotFoundError:
        found = 0
    raise DataLoss(
        f"a stored result fails its checksum ({found} of {size_bytes} bytes found); it is computed again, ask anew",
        reason="RESULT_DAMAGED",
        metadata={"size_bytes": str(size_bytes), "found_bytes": str(found)},
    )
