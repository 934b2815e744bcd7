"""How an answer travels from the worker to the front: frames, few of them by the pipe, many of them by a file.

A frame is one serialized response message behind its length (four bytes, big-endian). The front reads the file while
the worker still writes it, whole frames only; the file has a name for a few milliseconds at most.
"""

from __future__ import annotations

import errno
import os
import struct
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass

from interwind.errors import Overloaded
from interwind_service.tolerances import INLINE_ANSWER_BYTES, SPOOL_FULL_RETRY_S

LENGTH = struct.Struct(">I")


@dataclass(frozen=True, slots=True)
class Spooled:
    """So many bytes of whole frames stand in the file."""

    size_bytes: int


@contextmanager
def room_in_spool() -> Iterator[None]:
    """Turn a full disk, met inside, into `Overloaded`: room comes back as answers are read."""
    try:
        yield
    except OSError as error:
        if error.errno not in (errno.ENOSPC, errno.EDQUOT, errno.EFBIG):
            raise
        raise Overloaded(
            "the server has no room for arrays and results right now; try again",
            reason="SPOOL_FULL",
            retry_after_s=SPOOL_FULL_RETRY_S,
        ) from error


class SpoolWriter:
    """The worker's end: `write` frames; ``frames`` holds them all unless the file was begun."""

    def __init__(self, path: str, notify: Callable[[Spooled], None]) -> None:
        self._path = path
        self._notify = notify
        self._file = -1
        self.frames: list[bytes] = []
        self.size_bytes = 0

    def write(self, frame: bytes) -> None:
        """Add one frame."""
        self.size_bytes += LENGTH.size + len(frame)
        if self._file < 0 and self.size_bytes <= INLINE_ANSWER_BYTES:
            self.frames.append(frame)
            return
        if self._file < 0:
            self._file = os.open(self._path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600)
            for earlier in self.frames:
                self._append(earlier)
            self.frames = []
        self._append(frame)
        self._notify(Spooled(self.size_bytes))

    def _append(self, frame: bytes) -> None:
        buffers = [memoryview(LENGTH.pack(len(frame))), memoryview(frame)]
        while buffers:
            written = os.writev(self._file, buffers)
            while buffers and written >= len(buffers[0]):
                written -= len(buffers.pop(0))
            if buffers:
                buffers[0] = buffers[0][written:]

    def close(self) -> None:
        """Let go of the file; the front has it open by now or will never want it."""
        if self._file >= 0:
            os.close(self._file)


class SpoolReader:
    """The front's end: opens the file, takes its name away, and returns the frames that are whole."""

    def __init__(self, path: str) -> None:
        self._file = os.open(path, os.O_RDONLY)
        os.unlink(path)
        self._offset = 0

    def frames(self, size_bytes: int) -> Iterator[bytes]:
        """Return the frames that stand before ``size_bytes`` and were not returned yet."""
        while self._offset < size_bytes:
            (length,) = LENGTH.unpack(os.pread(self._file, LENGTH.size, self._offset))
            frame = os.pread(self._file, length, self._offset + LENGTH.size)
            self._offset += LENGTH.size + length
            yield frame

    def close(self) -> None:
        """Close the file; without a name it is gone."""
        os.close(self._file)
