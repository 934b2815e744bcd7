"""A folder of arrays, each a file named by the SHA-256 of its bytes; the least recently used leave for new ones."""

from __future__ import annotations

import os
import tempfile
import time
from contextlib import suppress
from pathlib import Path

from interwind.codec.array import content_hash
from interwind.errors import ArrayEvicted, InvalidRequest, Overloaded
from interwind_service.tolerances import ARRAY_UPLOAD_IDLE_S, SPOOL_FULL_RETRY_S

PART = "part-"  # how the file of an unfinished array begins


class ArrayFolder:
    """The arrays under ``folder``, at most ``budget_bytes`` of them. Any number of processes may share it."""

    def __init__(self, folder: str | Path, budget_bytes: int) -> None:
        self.folder = Path(folder)
        self.budget_bytes = budget_bytes

    def path(self, name: str) -> Path | None:
        """Return the file of that hash and count it as used; None when it is not held."""
        path = self.folder / name
        try:
            os.utime(path)
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
            part.replace(self.folder / name)
        return name

    def begin(self, size_bytes: int) -> tuple[int, Path]:
        """Open a file for an array of ``size_bytes``, to be renamed to its hash once it is whole."""
        if size_bytes > self.budget_bytes:
            raise InvalidRequest.at(
                "shape",
                f"an array of {size_bytes} bytes found, the store holds {self.budget_bytes}; split it",
                reason="ARRAY_TOO_LARGE",
            )
        handle, part = tempfile.mkstemp(prefix=PART, dir=self.folder)
        return handle, Path(part)

    def make_room(self, size_bytes: int) -> None:
        """Let the least recently used arrays go until ``size_bytes`` more fit the budget."""
        held = []
        for entry in os.scandir(self.folder):
            with suppress(FileNotFoundError):
                status = entry.stat()
                held.append((status.st_mtime, status.st_size, entry))
        total = size_bytes + sum(size for _, size, _ in held)
        fresh = time.time() - ARRAY_UPLOAD_IDLE_S
        for used, size, entry in sorted(held, key=lambda item: item[0]):
            if total <= self.budget_bytes:
                return
            if not entry.name.startswith(PART) or used < fresh:
                Path(entry.path).unlink(missing_ok=True)
                total -= size
        if total > self.budget_bytes:
            raise Overloaded(
                "the array store is full of unfinished uploads; try again",
                reason="ARRAYS_FULL",
                retry_after_s=SPOOL_FULL_RETRY_S,
            )
