"""ArrayService: large arrays come in by parts under the hash of their content, and go out by parts."""

from __future__ import annotations

import asyncio
import hashlib
import os
import time
from collections.abc import AsyncIterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from google.protobuf.message import DecodeError

from interwind.codec.array import DTYPES
from interwind.errors import ArrayEvicted, InvalidRequest, OutOfRange
from interwind.v1 import array_service_pb2 as messages
from interwind_service.server.boundary import Call, Rpc
from interwind_service.tolerances import ARRAY_UPLOAD_IDLE_S, MAX_ARRAY_PART_BYTES, MAX_OPEN_UPLOADS
from interwind_service.workers.arrays import ArrayFolder
from interwind_service.workers.spool import room_in_spool

HASH_CHARACTERS = set("0123456789abcdef")


@dataclass(slots=True)
class _Upload:
    """An array of which not all parts are here."""

    size_bytes: int
    file: Any
    part: Path
    hash: Any
    received_bytes: int = 0
    touched_s: float = 0.0

    def drop(self) -> None:
        self.file.close()
        self.part.unlink(missing_ok=True)


class ArrayDoor:
    """Takes and gives the arrays of an `ArrayFolder`. Hashing and files happen beside the event loop."""

    def __init__(self, folder: ArrayFolder) -> None:
        self._folder = folder
        self._uploads: dict[tuple[str, str], _Upload] = {}
        self._one_at_a_time = asyncio.Lock()  # parts of one array must not overtake each other

    def rpcs(self) -> list[Rpc]:
        """Return the RPCs of ArrayService."""
        return [
            Rpc("/interwind.v1.ArrayService/PutArray", self._put),
            Rpc("/interwind.v1.ArrayService/GetArray", self._get, streaming=True),
        ]

    async def _put(self, request: bytes, call: Call) -> bytes:
        if len(request) > MAX_ARRAY_PART_BYTES + 1024:
            raise InvalidRequest.at(
                "data", f"{len(request)} bytes found, at most {MAX_ARRAY_PART_BYTES} are taken; send smaller parts"
            )
        async with self._one_at_a_time:
            with room_in_spool():
                return await asyncio.to_thread(self._put_now, request, call.client)

    def _put_now(self, request: bytes, client: str) -> bytes:
        part = _parse(messages.PutArrayRequest, request)
        name = _checked_hash(part.content_hash)
        if self._folder.path(name) is not None:
            return _answer(_stated_bytes(part), complete=True)
        self._forget_idle()
        upload = self._uploads.get((client, name)) or self._begin(client, name, part)
        if part.offset_bytes > upload.received_bytes or part.offset_bytes < 0:
            raise OutOfRange(
                f"offset_bytes: {part.offset_bytes} found, {upload.received_bytes} are here; go on from there",
                metadata={"received_bytes": str(upload.received_bytes)},
            )
        data = part.data[upload.received_bytes - part.offset_bytes :]
        if upload.received_bytes + len(data) > upload.size_bytes:
            raise InvalidRequest.at(
                "data", f"{upload.received_bytes + len(data)} bytes found, shape and dtype say {upload.size_bytes}"
            )
        self._folder.make_room(len(data))
        while data:  # an unbuffered file may take less than all
            taken = upload.file.write(data)
            upload.hash.update(data[:taken])
            upload.received_bytes += taken
            data = data[taken:]
        upload.touched_s = time.monotonic()
        if upload.received_bytes < upload.size_bytes:
            return _answer(upload.received_bytes, complete=False)
        del self._uploads[client, name]
        if upload.hash.hexdigest() != name:
            upload.drop()
            raise InvalidRequest.at(
                "content_hash", f"{upload.hash.hexdigest()} is the hash of what arrived; send all parts again"
            )
        self._folder.settle(upload.part, name)
        upload.file.close()
        return _answer(upload.size_bytes, complete=True)

    def _begin(self, client: str, name: str, part: Any) -> _Upload:
        size_bytes = _stated_bytes(part)
        handle, path = self._folder.begin(size_bytes)
        upload = _Upload(size_bytes, os.fdopen(handle, "wb", buffering=0), path, hashlib.sha256())
        self._uploads[client, name] = upload
        return upload

    def _forget_idle(self) -> None:
        stale = time.monotonic() - ARRAY_UPLOAD_IDLE_S
        by_age = sorted(self._uploads, key=lambda key: self._uploads[key].touched_s)
        excess = len(by_age) - MAX_OPEN_UPLOADS + 1
        for position, key in enumerate(by_age):
            if position < excess or self._uploads[key].touched_s < stale:
                self._uploads.pop(key).drop()

    async def _get(self, request: bytes, call: Call) -> AsyncIterator[bytes]:
        message = _parse(messages.GetArrayRequest, request)
        path = self._folder.path(_checked_hash(message.content_hash))
        if path is None:
            raise ArrayEvicted(f"no array {message.content_hash} is held; repeat the call that made it")
        with path.open("rb") as file:
            size, offset = os.fstat(file.fileno()).st_size, message.offset_bytes
            if not 0 <= offset <= size:
                raise OutOfRange(f"offset_bytes: {offset} found, the array has {size} bytes")
            while offset < size:
                data = os.pread(file.fileno(), MAX_ARRAY_PART_BYTES, offset)
                yield messages.GetArrayResponse(offset_bytes=offset, data=data).SerializeToString()
                offset += len(data)


def _parse(message_class: Any, request: bytes) -> Any:
    try:
        return message_class.FromString(request)
    except DecodeError as error:
        raise InvalidRequest(
            f"the bytes are no {message_class.DESCRIPTOR.full_name}", reason="MALFORMED_MESSAGE"
        ) from error


def _checked_hash(name: str) -> str:
    if len(name) != 64 or not set(name) <= HASH_CHARACTERS:
        raise InvalidRequest.at("content_hash", f"{name[:70]!r} found; 64 hexadecimal digits of a SHA-256 are expected")
    return name


def _stated_bytes(part: Any) -> int:
    if part.dtype not in DTYPES:
        raise InvalidRequest.at("dtype", f"{part.dtype} found; state DTYPE_FLOAT64 or DTYPE_COMPLEX128")
    size = DTYPES[part.dtype].itemsize
    for length in part.shape:
        if length < 0:
            raise InvalidRequest.at("shape", f"{list(part.shape)} found; no length is negative")
        size *= length
    return int(size)


def _answer(received_bytes: int, *, complete: bool) -> bytes:
    answer = messages.PutArrayResponse(received_bytes=received_bytes, complete=complete)
    return bytes(answer.SerializeToString())
