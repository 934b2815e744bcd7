"""Streamed answers: arrays cut into chunks between a header and a trailer, and put together again.

A response message of any streaming call has the parts progress, header, chunk and trailer; the bytes of all arrays
stand one after the other, and the trailer proves them by SHA-256.
"""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from interwind.codec.array import DTYPES, dtype_code
from interwind.codec.finding import caution_to_message, evidence_to_message, finding_to_message
from interwind.codec.observable import observable_from_message, observable_to_message
from interwind.errors import DataLoss
from interwind.model.observables import Observable
from interwind.v1 import response_pb2

CHUNK_BYTES = 1 << 20  # 2.3 to 2.9 times faster than 64 KiB, and within every language's default limit


@dataclass(frozen=True, slots=True, eq=False)
class NamedArray:
    """One array of a streamed answer; ``columns`` are its observables, where it has them."""

    name: str
    array: NDArray[Any]
    columns: tuple[Observable, ...] = ()
    port_names: tuple[str, ...] = ()


def header_of(arrays: Sequence[NamedArray], shapes: Sequence[tuple[int, ...]] | None = None) -> Any:
    """Return the header that announces the arrays; ``shapes`` replaces their own where rows are still being made."""
    return response_pb2.ResultHeader(
        arrays=[
            response_pb2.ResultArray(
                name=item.name,
                shape=item.array.shape if shapes is None else shapes[position],
                dtype=dtype_code(item.array),  # type: ignore[arg-type]
                columns=[observable_to_message(column) for column in item.columns],
                port_names=item.port_names,
            )
            for position, item in enumerate(arrays)
        ]
    )


class ChunkWriter:
    """Cuts bytes into chunk messages and keeps their checksum."""

    def __init__(self, part: type[Any]) -> None:
        self._part = part
        self._hash = hashlib.sha256()
        self._offset = 0

    def chunks(self, *arrays: NDArray[Any]) -> Iterator[Any]:
        """Yield the response messages that carry the bytes of arrays, all in one where one holds them."""
        views = [_bytes_of(array) for array in arrays]
        if sum(map(len, views)) <= CHUNK_BYTES:
            views = [memoryview(b"".join(views))]
        for view in views:
            for start in range(0, len(view), CHUNK_BYTES):
                piece = bytes(view[start : start + CHUNK_BYTES])
                self._hash.update(piece)
                part = self._part()
                part.chunk.offset_bytes, part.chunk.data = self._offset, piece  # a constructor would copy twice
                yield part
                self._offset += len(piece)

    def trailer(self, value: Any) -> Any:
        """Return the message that ends the stream: evidence, findings and cautions of ``value``, and the checksum."""
        return self._part(
            trailer=response_pb2.ResultTrailer(
                evidence=evidence_to_message(value.evidence),
                findings=[finding_to_message(finding) for finding in value.findings],
                cautions=[caution_to_message(caution) for caution in value.cautions],
                size_bytes=self._offset,
                sha256=self._hash.hexdigest(),
            )
        )


def encode_stream(
    part: type[Any], arrays: Sequence[NamedArray], value: Any, finish: Callable[[Any], None] | None = None
) -> Iterator[Any]:
    """Yield the response messages of a finished answer; ``finish`` may add to the trailer."""
    yield part(header=header_of(arrays))
    writer = ChunkWriter(part)
    yield from writer.chunks(*(item.array for item in arrays))
    trailer = writer.trailer(value)
    if finish is not None:
        finish(trailer.trailer)
    yield trailer


def _bytes_of(array: NDArray[Any]) -> memoryview:
    little = np.ascontiguousarray(array, dtype=DTYPES[dtype_code(array)])
    return memoryview(little.reshape(-1).view(np.uint8).data)


class RowStream:
    """A time response that goes out row by row while it is made: header, samples, then times and trailer."""

    def __init__(self, part: type[Any], send: Callable[[Any], None]) -> None:
        self._part, self._send = part, send
        self._writer = ChunkWriter(part)
        self._rows = 0
        self.begun = False

    def begin(self, columns: Sequence[Observable], rows: int) -> None:
        """Announce the table."""
        self.begun, self._rows = True, rows
        table = NamedArray("samples", np.empty((0, len(columns))), tuple(columns))
        header = header_of([table, NamedArray("time_s", np.empty(0))], [(rows, len(columns)), (rows,)])
        self._send(self._part(header=header))

    def add(self, first: int, samples: NDArray[np.float64]) -> None:
        """Send rows, in order; ``first`` is the place of the first one."""
        for message in self._writer.chunks(samples):
            self._send(message)

    def end(self, value: Any, step_s: float, finish: Callable[[Any], None]) -> None:
        """Send the times k step_s and the trailer of ``value``, to which ``finish`` may add."""
        for start in range(0, self._rows, CHUNK_BYTES):
            stop = min(self._rows, start + CHUNK_BYTES)
            for message in self._writer.chunks(step_s * np.arange(start, stop)):
                self._send(message)
        trailer = self._writer.trailer(value)
        finish(trailer.trailer)
        self._send(trailer)


@dataclass(slots=True, eq=False)
class StreamResult:
    """A streamed answer put together: arrays by name, their columns, and the trailer."""

    arrays: dict[str, NDArray[Any]] = field(default_factory=dict)
    columns: dict[str, tuple[Observable, ...]] = field(default_factory=dict)
    port_names: dict[str, tuple[str, ...]] = field(default_factory=dict)
    trailer: Any = None


def decode_stream(messages: Iterable[Any], progress: Callable[[int, int], None] | None = None) -> StreamResult:
    """Put a streamed answer together; `DataLoss` when a byte is missing or the checksum differs."""
    result = StreamResult()
    buffer = np.empty(0, np.uint8)
    proof = hashlib.sha256()
    received = 0
    header: Any = None
    for message in messages:
        kind = message.WhichOneof("part")
        if kind == "progress":
            if progress is not None:
                progress(message.progress.done_count, message.progress.total_count)
        elif kind == "header":
            header = message.header
            buffer = np.empty(sum(_size(array) for array in header.arrays), np.uint8)
        elif kind == "chunk":
            start, data = message.chunk.offset_bytes, message.chunk.data  # each look at the bytes copies them
            if header is None or start != received or received + len(data) > len(buffer):
                raise DataLoss(f"chunk at byte {start} found, byte {received} expected; repeat the call")
            buffer[received : received + len(data)] = np.frombuffer(data, np.uint8)
            proof.update(data)
            received += len(data)
        elif kind == "trailer":
            result.trailer = message.trailer
    if result.trailer is None or header is None:
        raise DataLoss("the answer ended before its trailer; repeat the call")
    if received != result.trailer.size_bytes or proof.hexdigest() != result.trailer.sha256:
        raise DataLoss(f"{received} bytes received do not match the checksum of the answer; repeat the call")
    offset = 0
    for array in header.arrays:
        end = offset + _size(array)
        numbers = np.frombuffer(buffer, DTYPES[array.dtype], count=(end - offset) // _itemsize(array), offset=offset)
        numbers = numbers.reshape(tuple(array.shape))
        numbers.setflags(write=False)
        result.arrays[array.name] = numbers
        result.columns[array.name] = tuple(observable_from_message(column) for column in array.columns)
        result.port_names[array.name] = tuple(array.port_names)
        offset = end
    return result


def _itemsize(array: Any) -> int:
    return DTYPES[array.dtype].itemsize


def _size(array: Any) -> int:
    count = _itemsize(array)
    for length in array.shape:
        count *= length
    return int(count)
