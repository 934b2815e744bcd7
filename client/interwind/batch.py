"""The handle of a batch: it outlives the call, the client and the server process; any client takes it up by its id."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Generator, Iterator, Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from interwind.calling import Caller, Deadline
from interwind.channel import DEFAULT_TIMEOUT_S
from interwind.codec.array import DTYPES, ArrayStore, stored_arrays
from interwind.codec.batch import (
    Submission,
    header_from_message,
    progress_from_message,
    statuses_from_message,
    submission_to_message,
    summary_from_messages,
)
from interwind.errors import DataLoss, DeadlineExceeded, InterwindError
from interwind.model.batch import BatchProgress, BatchResult, BatchRow, BatchSummary
from interwind.model.frozen import FloatArray
from interwind.model.observables import Observable
from interwind.v1 import batch_service_pb2 as messages

SERVICE = "/interwind.v1.BatchService/"
STREAM_TIMEOUT_S = 600.0  # one stream of rows; a longer wait goes on with the next one
DAMAGE_LIMIT = 3  # a chunk whose stored numbers were torn is computed again; more than this is no accident

Told = Callable[[int, int], None]


class Batch:
    """Variants of one network being computed by the service. Safe to share between threads."""

    def __init__(self, caller: Caller, batch_id: str) -> None:
        self._caller = caller
        self.id = batch_id

    def __repr__(self) -> str:
        return f"Batch({self.id!r})"

    def progress(self, *, timeout_s: float = DEFAULT_TIMEOUT_S) -> BatchProgress:
        """Return how far the batch has come."""
        answer = self._unary("GetBatch", messages.GetBatchRequest(batch_id=self.id), timeout_s)
        return progress_from_message(answer.batch)

    def done(self) -> bool:
        """Say whether every variant has its row."""
        return self.progress().done

    def watch(self, *, timeout_s: float | None = None) -> Iterator[BatchProgress]:
        """Yield the progress now and after every change, until the batch is done; a broken connection goes on."""
        seen = 0
        request = messages.WatchBatchRequest(batch_id=self.id)

        def attempt(deadline: Deadline) -> Generator[BatchProgress]:
            nonlocal seen
            request.after_sequence = seen
            for message in self._stream("WatchBatch", request, deadline):
                progress = progress_from_message(message.batch)
                seen = progress.sequence
                yield progress
                if progress.done:
                    return

        yield from self._resumed(attempt, timeout_s, lambda: self.progress().done and seen > 0)

    def cancel(self, *, timeout_s: float = DEFAULT_TIMEOUT_S) -> BatchProgress:
        """Give up the variants that have no row yet; rows that are there stay."""
        answer = self._unary("CancelBatch", messages.CancelBatchRequest(batch_id=self.id), timeout_s)
        return progress_from_message(answer.batch)

    def delete(self, *, timeout_s: float = DEFAULT_TIMEOUT_S) -> None:
        """Delete the batch and its results, whatever its state."""
        self._unary("DeleteBatch", messages.DeleteBatchRequest(batch_id=self.id), timeout_s)

    def result(self, timeout_s: float | None = None, *, progress: Told | None = None) -> BatchResult:
        """Wait until the batch is done and return every row; None waits as long as it takes."""
        table = _Table()
        for chunk, values in self._chunks(table, timeout_s):
            table.put(chunk, values)
            if progress is not None:
                progress(chunk.first_row + chunk.row_count, table.header.variant_count)
        return table.result()

    def __iter__(self) -> Iterator[BatchRow]:
        """Yield the rows in order, each as soon as it is there."""
        table = _Table()
        for chunk, values in self._chunks(table, None):
            reasons = {reason.row: reason.message for reason in chunk.reasons}
            statuses = statuses_from_message(chunk.statuses)
            for k in range(chunk.row_count):
                row = chunk.first_row + k
                numbers = {key: values[column, k] for column, key in enumerate(table.keys)}
                yield BatchRow(row, statuses[k], reasons.get(row, ""), numbers)

    def summary(
        self,
        levels: Sequence[float] = (0.05, 0.5, 0.95),
        extreme_count: int = 5,
        *,
        timeout_s: float = DEFAULT_TIMEOUT_S,
    ) -> BatchSummary:
        """Return quantiles and extreme rows of a batch that is done, computed by the service."""
        request = messages.SummarizeBatchRequest(
            batch_id=self.id, quantile_levels=[float(level) for level in levels], extreme_count=extreme_count
        )
        deadline = Deadline(timeout_s)
        return self._caller.repeatedly(
            lambda: summary_from_messages(self._stream("SummarizeBatch", request, deadline)), deadline
        )

    def _unary(self, name: str, request: Any, timeout_s: float) -> Any:
        return unary(self._caller, name, request, Deadline(timeout_s))

    def _stream(self, name: str, request: Any, deadline: Deadline) -> Generator[Any]:
        return self._caller.stream(SERVICE + name, request, getattr(messages, f"{name}Response"), deadline)

    def _chunks(self, table: _Table, timeout_s: float | None) -> Iterator[tuple[Any, NDArray[Any]]]:
        """Yield each chunk with its numbers, proven; after a break go on behind the last whole chunk."""
        row = 0
        damages = 0

        def attempt(deadline: Deadline) -> Generator[tuple[Any, NDArray[Any]]]:
            nonlocal row
            request = messages.StreamBatchResultsRequest(batch_id=self.id, start_row=row, wait=True)
            head: Any = None
            data = bytearray()
            for message in self._stream("StreamBatchResults", request, deadline):
                part = message.WhichOneof("part")
                if part == "header":
                    table.begin(message.header)
                elif part == "chunk":
                    head, data = message.chunk, bytearray()
                else:
                    data += message.data.data
                if head is not None and len(data) == head.size_bytes:
                    values = table.numbers(head, data)
                    row = head.first_row + head.row_count
                    yield head, values
                    head = None

        def done() -> bool:
            return table.begun and row >= table.header.variant_count

        while True:
            try:
                yield from self._resumed(attempt, timeout_s, done)
                return
            except DataLoss:
                damages += 1
                if damages > DAMAGE_LIMIT:
                    raise

    def _resumed(
        self, attempt: Callable[[Deadline], Generator[Any]], timeout_s: float | None, done: Callable[[], bool]
    ) -> Iterator[Any]:
        """Yield what ``attempt`` yields, beginning it anew, where it stopped, while the retry policy allows."""
        whole = None if timeout_s is None else Deadline(timeout_s)
        while True:
            left_s = STREAM_TIMEOUT_S if whole is None else min(STREAM_TIMEOUT_S, max(whole.remaining_s(), 1e-3))
            deadline = Deadline(left_s)
            parts: Generator[Any] | None = None
            failure: InterwindError | None = None

            def start(deadline: Deadline = deadline) -> tuple[Generator[Any], Any]:
                begun = attempt(deadline)
                return begun, next(begun, None)

            try:
                parts, item = self._caller.repeatedly(start, deadline)
                while item is not None:
                    yield item
                    item = next(parts, None)
            except DeadlineExceeded as error:
                failure = error
            except InterwindError as error:
                if error.code != "UNAVAILABLE" or not self._caller.retries:
                    raise
                failure = error
            finally:
                if parts is not None:
                    parts.close()
            if done():
                return
            if failure is None or (whole is not None and whole.remaining_s() == 0.0):
                raise failure or DataLoss("the stream ended before the batch was done; repeat the call")


def unary(caller: Caller, name: str, request: Any, deadline: Deadline) -> Any:
    """Make one unary call of BatchService; each of them may be repeated."""
    kind = getattr(messages, f"{name}Response")
    return caller.repeatedly(lambda: caller.unary(SERVICE + name, request, kind, deadline), deadline)


def submit(
    caller: Caller, submission: Submission, arrays: Callable[[Deadline], ArrayStore], deadline: Deadline
) -> BatchProgress:
    """Send a submission, its large arrays beside it."""

    def attempt() -> Any:
        with stored_arrays(arrays(deadline)):
            request = submission_to_message(submission)
        return caller.unary(SERVICE + "SubmitBatch", request, messages.SubmitBatchResponse, deadline)

    return progress_from_message(caller.repeatedly(attempt, deadline).batch)


def list_batches(caller: Caller, deadline: Deadline) -> Iterator[BatchProgress]:
    """Yield every batch, newest first, page by page."""
    token = ""
    while True:
        page = unary(caller, "ListBatches", messages.ListBatchesRequest(page_token=token), deadline)
        yield from map(progress_from_message, page.batches)
        token = page.next_page_token
        if not token:
            return


class _Table:
    """Rows as they come in."""

    def __init__(self) -> None:
        self.begun = False
        self.header: Any = None
        self.keys: tuple[Observable | str, ...] = ()
        self.points: FloatArray = np.empty(0)
        self._status: NDArray[np.object_] = np.empty(0, dtype=object)
        self._reason: NDArray[np.object_] = np.empty(0, dtype=object)
        self._columns: list[NDArray[Any]] = []

    def begin(self, header: Any) -> None:
        """Take the header; a stream begun anew repeats it."""
        if self.begun:
            return
        self.begun, self.header = True, header
        self.keys, self.points = header_from_message(header)

    def numbers(self, chunk: Any, data: bytearray) -> NDArray[Any]:
        """Return the numbers of a chunk, shape (columns, rows, points); `DataLoss` when they are not what was sent."""
        dtype = DTYPES[self.header.dtype]
        shape = (len(self.keys), chunk.row_count, self.points.size)
        if not chunk.size_bytes:
            return np.full(shape, np.nan, dtype=dtype)
        if hashlib.sha256(data).hexdigest() != chunk.sha256 or len(data) != np.prod(shape) * dtype.itemsize:
            raise DataLoss(f"rows from {chunk.first_row} on do not match their checksum; repeat the call")
        return np.frombuffer(data, dtype).reshape(shape)

    def put(self, chunk: Any, values: NDArray[Any]) -> None:
        """Give the rows of a chunk their place."""
        if not self._columns:
            count = self.header.variant_count
            self._status, self._reason = np.empty(count, dtype=object), np.full(count, "", dtype=object)
            self._columns = [np.empty((count, self.points.size), dtype=values.dtype) for _ in self.keys]
        rows = slice(chunk.first_row, chunk.first_row + chunk.row_count)
        self._status[rows] = statuses_from_message(chunk.statuses)
        for reason in chunk.reasons:
            self._reason[reason.row] = reason.message
        for column, numbers in zip(self._columns, values, strict=True):
            column[rows] = numbers

    def result(self) -> BatchResult:
        """Return the whole."""
        table: Mapping[Observable | str, Any] = dict(zip(self.keys, self._columns, strict=True))
        for array in (self._status, self._reason, *self._columns):
            array.setflags(write=False)
        return BatchResult(self._status, self._reason, self.points, table)
