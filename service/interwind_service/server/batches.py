"""BatchService: batches are planned and computed by workers, kept by the store, and streamed from its files."""

from __future__ import annotations

import asyncio
import contextlib
import os
import uuid
from collections.abc import AsyncIterator, Callable, Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

from google.protobuf.message import DecodeError

from interwind.codec.batch import progress_to_message
from interwind.errors import Cancelled, DataLoss, InvalidRequest, NotReady, OutOfRange
from interwind.model.batch import BatchProgress
from interwind.v1 import batch_pb2, response_pb2
from interwind.v1 import batch_service_pb2 as messages
from interwind_service.batch.folder import prove, rows_name
from interwind_service.batch.rows import Chunk
from interwind_service.batch.schema import PENDING
from interwind_service.batch.summary import StoredRows
from interwind_service.batch.work import CANCELLED_CODE
from interwind_service.server.admission import Admission
from interwind_service.server.batch_room import BatchRoom
from interwind_service.server.batch_work import plan_submission, summary_frames
from interwind_service.server.boundary import Call, Rpc
from interwind_service.server.limits import read_size, size_header
from interwind_service.tolerances import BATCH_PAGE_LIMIT, BATCH_PAGE_SIZE, MAX_ARRAY_PART_BYTES
from interwind_service.workers.arrays import ArrayFolder
from interwind_service.workers.estimate import compute_bytes
from interwind_service.workers.pool import WorkerPool

SERVICE = "/interwind.v1.BatchService/"


class BatchDoor:
    """Answers BatchService. Files and the database are touched beside the event loop."""

    def __init__(self, *, room: BatchRoom, pool: WorkerPool, admission: Admission, arrays: ArrayFolder) -> None:
        self._store = room.store
        self._runner = room.runner
        self._pool = pool
        self._admission = admission
        self._arrays = arrays

    def rpcs(self) -> list[Rpc]:
        """Return the RPCs of BatchService."""
        answers = {
            "SubmitBatch": self._submit, "GetBatch": self._get, "ListBatches": self._list,
            "CancelBatch": self._cancel, "DeleteBatch": self._delete,
        }  # fmt: skip
        streams = {
            "WatchBatch": self._watch, "StreamBatchResults": self._results, "SummarizeBatch": self._summarize,
        }  # fmt: skip
        return [Rpc(SERVICE + name, answer) for name, answer in answers.items()] + [
            Rpc(SERVICE + name, stream, streaming=True) for name, stream in streams.items()
        ]

    async def _submit(self, request: bytes, call: Call) -> bytes:
        size = read_size(size_header(request))
        needed = compute_bytes(size, len(request)) if size.variant_count else len(request)
        incoming = str(self._store.folder.incoming / uuid.uuid4().hex)
        plan = await self._at_work(call, needed, plan_submission, request, incoming, self._arrays)
        if plan.folder:
            progress = await asyncio.to_thread(self._store.create, plan, _owner(call))
            return _wrapped(messages.SubmitBatchResponse, progress)
        batch = batch_pb2.Batch(variant_count=plan.variant_count)
        batch.forecast.duration_s = plan.forecast.duration_s
        batch.forecast.result_bytes = plan.forecast.result_bytes
        batch.forecast.memory_bytes = plan.forecast.memory_bytes
        batch.forecast.chunk_count = plan.forecast.chunk_count
        return bytes(messages.SubmitBatchResponse(batch=batch).SerializeToString())

    async def _get(self, request: bytes, call: Call) -> bytes:
        message = _parse(messages.GetBatchRequest, request)
        progress = await asyncio.to_thread(self._store.progress, message.batch_id, _owner(call))
        return _wrapped(messages.GetBatchResponse, self._with_hold(progress))

    async def _list(self, request: bytes, call: Call) -> bytes:
        message = _parse(messages.ListBatchesRequest, request)
        if message.page_size < 0:
            raise InvalidRequest.at("page_size", f"{message.page_size} found; a number from 0 on is expected")
        size = min(message.page_size or BATCH_PAGE_SIZE, BATCH_PAGE_LIMIT)
        page, following = await asyncio.to_thread(self._store.page, _owner(call), size, message.page_token)
        answer = messages.ListBatchesResponse(
            batches=[progress_to_message(self._with_hold(progress)) for progress in page], next_page_token=following
        )
        return bytes(answer.SerializeToString())

    async def _cancel(self, request: bytes, call: Call) -> bytes:
        message = _parse(messages.CancelBatchRequest, request)
        progress = await asyncio.to_thread(self._runner.cancel, message.batch_id, _owner(call))
        return _wrapped(messages.CancelBatchResponse, progress)

    async def _delete(self, request: bytes, call: Call) -> bytes:
        message = _parse(messages.DeleteBatchRequest, request)
        await asyncio.to_thread(self._runner.delete, message.batch_id, _owner(call))
        return bytes(messages.DeleteBatchResponse().SerializeToString())

    async def _watch(self, request: bytes, call: Call) -> AsyncIterator[bytes]:
        message = _parse(messages.WatchBatchRequest, request)
        after = message.after_sequence
        with self._changes(message.batch_id) as changed:
            while True:
                changed.clear()
                progress = await asyncio.to_thread(self._store.progress, message.batch_id, _owner(call))
                if progress.sequence > after:
                    after = progress.sequence
                    yield _wrapped(messages.WatchBatchResponse, self._with_hold(progress))
                if progress.done:
                    return
                await changed.wait()

    async def _results(self, request: bytes, call: Call) -> AsyncIterator[bytes]:
        message = _parse(messages.StreamBatchResultsRequest, request)
        progress = await asyncio.to_thread(self._store.progress, message.batch_id, _owner(call))
        if not 0 <= message.start_row <= progress.variant_count:
            raise OutOfRange(f"start_row: {message.start_row} found; the batch has {progress.variant_count} rows")
        if not (progress.done or message.wait):
            raise NotReady(
                f"{progress.done_count} of {progress.variant_count} rows are there; set wait, or ask when it is done"
            )
        known = await asyncio.to_thread(self._store.ingredients, message.batch_id)
        header = messages.BatchResultHeader.FromString(known.header)
        yield bytes(messages.StreamBatchResultsResponse(header=header).SerializeToString())
        row = message.start_row
        with self._changes(message.batch_id) as changed:
            while row < progress.variant_count:
                changed.clear()
                chunk = await asyncio.to_thread(self._store.chunk_at, message.batch_id, row)
                if chunk is None:
                    raise Cancelled("the batch was deleted")
                if chunk.state == PENDING:
                    await changed.wait()
                    continue
                for part in await asyncio.to_thread(self._proven, known.folder, chunk):
                    yield part
                row = chunk.first_row + chunk.row_count

    def _with_hold(self, progress: BatchProgress) -> BatchProgress:
        return progress if progress.done else replace(progress, held_reason=self._runner.held_reason)

    def _proven(self, folder: Path, chunk: Chunk) -> Iterator[bytes]:
        """Return the messages of a chunk, its file proven before the first; a damaged one is computed again."""
        statuses = chunk.statuses or bytes([CANCELLED_CODE]) * chunk.row_count
        head = messages.BatchChunk(
            first_row=chunk.first_row,
            row_count=chunk.row_count,
            statuses=list(statuses),
            reasons=[messages.VariantReason(row=r.row, code=r.code, message=r.message) for r in chunk.reasons],
            size_bytes=chunk.size_bytes,
            sha256=chunk.sha256,
        )
        first = messages.StreamBatchResultsResponse(chunk=head).SerializeToString()
        if not chunk.size_bytes:
            return iter((first,))
        path = folder / rows_name(chunk.first_row, chunk.row_count)
        try:
            prove(path, chunk.size_bytes, chunk.sha256)
            handle = os.open(path, os.O_RDONLY | os.O_CLOEXEC)
        except DataLoss:
            self._runner.damaged(chunk)
            raise
        return _parts(first, handle, chunk.size_bytes)

    async def _summarize(self, request: bytes, call: Call) -> AsyncIterator[bytes]:
        message = _parse(messages.SummarizeBatchRequest, request)
        progress = await asyncio.to_thread(self._store.progress, message.batch_id, _owner(call))
        if not progress.done:
            raise NotReady(f"{progress.done_count} of {progress.variant_count} rows are there; ask when it is done")
        known = await asyncio.to_thread(self._store.ingredients, message.batch_id)
        chunks = await asyncio.to_thread(self._store.chunks.of_batch, message.batch_id)
        stored = tuple(StoredRows(c.first_row, c.row_count, c.statuses, c.size_bytes, c.sha256) for c in chunks)
        frames = await self._at_work(
            call, len(request), summary_frames, str(known.folder), stored,
            tuple(message.quantile_levels), message.extreme_count,
        )  # fmt: skip
        for frame in frames:
            yield frame

    async def _at_work(self, call: Call, needed_bytes: int, function: Callable[..., Any], *arguments: Any) -> Any:
        """Run a function in a worker, admitted like any call; leaving early ends the worker."""
        ticket = self._admission.enter(call.client, needed_bytes, 0)
        try:
            job = self._pool.call(function, *arguments)
            try:
                return await asyncio.wrap_future(job)
            finally:
                job.end(Cancelled("the caller left"))
                if job.trace and (error := job.exception()) is not None:
                    error.add_note(job.trace)  # for the log alone
        finally:
            self._admission.leave(ticket)

    @contextlib.contextmanager
    def _changes(self, batch_id: str) -> Iterator[asyncio.Event]:
        """Hold an event that is set whenever the batch has changed."""
        loop, changed = asyncio.get_running_loop(), asyncio.Event()

        def listener(touched: frozenset[str]) -> None:
            if batch_id in touched:
                loop.call_soon_threadsafe(changed.set)

        stop = self._store.listen(listener)
        try:
            yield changed
        finally:
            stop()


def _parts(first: bytes, handle: int, size_bytes: int) -> Iterator[bytes]:
    try:
        yield first
        for offset in range(0, size_bytes, MAX_ARRAY_PART_BYTES):
            data = response_pb2.ResultChunk(
                offset_bytes=offset, data=os.pread(handle, min(MAX_ARRAY_PART_BYTES, size_bytes - offset), offset)
            )
            yield messages.StreamBatchResultsResponse(data=data).SerializeToString()
    finally:
        os.close(handle)


def _owner(call: Call) -> str:
    """Return whose batches a caller sees: those of its token or certificate; without one, those of nobody."""
    return call.client if call.client.startswith(("token-", "name-")) else ""


def _wrapped(response: Any, progress: BatchProgress) -> bytes:
    return bytes(response(batch=progress_to_message(progress)).SerializeToString())


def _parse(message_class: Any, request: bytes) -> Any:
    try:
        return message_class.FromString(request)
    except DecodeError as error:
        raise InvalidRequest(
            f"the bytes are no {message_class.DESCRIPTOR.full_name}; rebuild the caller", reason="MALFORMED_MESSAGE"
        ) from error
