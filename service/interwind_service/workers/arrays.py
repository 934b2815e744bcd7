"""A folder of arrays, each a file named by the SHA-256 of its bytes; the least recently used leave for new ones."""

from __future__ import annotations

import fcntl
import os
import tempfile
import time
from contextlib import suppress
from pathlib import Path

from interwind.codec.array import content_hash
from interwind.errors import ArrayEvicted, InvalidRequest, Overloaded
from interwind_service.tolerances import SPOOL_FULL_RETRY_S

PART = "part-"  # how the file of an unfinished array begins


class ArrayFolder:
    """The arrays under ``folder``, at most ``budget_bytes`` of them. Any number of processes may share it."""

    def __init__(self, folder: str | Path, budget_bytes: int) -> None:
        self.folder = Path(folder)
        self.budget_bytes = budget_bytes

    def path(self, name: str) -> Path | None:
        """Return the file of that hash and count it as used; None when it is not held."""
        path = self.folder / name
        now_ns = time.monotonic_ns()  # no jump of the wall clock makes the array just used the oldest
        try:
            os.utime(path, ns=(now_ns, now_ns))
        except FileNotFoundError:
            return None
        return path

    def get(self, content_hash: str) -> bytes:
        """Return the bytes of that hash."""
        path = self.path(content_hash)
        try:
            if path is not None:
                return path.read_bytes()
        except FileNotFoundError:  # it left between the look and the read
            pass
        raise ArrayEvicted(
            f"no array {content_hash} is held; upload it with PutArray and repeat the call",
            metadata={"content_hash": content_hash},
        )

    def put(self, data: bytes, shape: tuple[int, ...], dtype: int) -> str:
        """Keep the bytes and return their hash."""
        name = content_hash(data)
        if self.path(name) is None:
            handle, part = self.begin(len(data))
            self.make_room(len(data))
            with os.fdopen(handle, "wb") as file:
                file.write(data)
                file.flush()
                self.settle(part, name)
        return name

    def begin(self, size_bytes: int) -> tuple[int, Path]:
        """Open a file for an array of ``size_bytes``, for `settle` once it is whole; its lock says that it is alive."""
        if size_bytes > self.budget_bytes:
            raise InvalidRequest.at(
                "shape",
                f"an array of {size_bytes} bytes found, the store holds {self.budget_bytes}; split it",
                reason="ARRAY_TOO_LARGE",
            )
        while True:
            handle, part = tempfile.mkstemp(prefix=PART, dir=self.folder)
            fcntl.flock(handle, fcntl.LOCK_EX)
            if os.fstat(handle).st_nlink:
                return handle, Path(part)
            os.close(handle)  # taken for a dead one's before it was locked

    def settle(self, part: Path, name: str) -> None:
        """Give a whole array, still open, the name of its hash; it counts as used."""
        part.replace(self.folder / name)
        self.path(name)

    def make_room(self, size_bytes: int) -> None:
        """Let the least recently used arrays go until ``size_bytes`` more fit the budget."""
        held = []
        for entry in os.scandir(self.folder):
            with suppress(FileNotFoundError):
                status, whole = entry.stat(), not entry.name.startswith(PART)
                held.append((whole, status.st_mtime_ns, status.st_size, entry))
        total = size_bytes + sum(size for _, _, size, _ in held)
        for whole, _, size, entry in sorted(held, key=lambda item: item[:2]):
            if total <= self.budget_bytes:
                return
            if whole or _dead(entry.path):
                Path(entry.path).unlink(missing_ok=True)
                total -= size
        if total > self.budget_bytes:
            raise Overloaded(
                "the array store is full of unfinished uploads; try again",
                reason="ARRAYS_FULL",
                retry_after_s=SPOOL_FULL_RETRY_S,
            )


def _dead(part: str) -> bool:
    """Say whether whoever wrote this unfinished array is gone."""
    try:
        with open(part, "rb") as file:
            fcntl.flock(file, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except OSError:
        return False
    return True
