"""The way of a call through the front: size header, admission, worker, and its frames out as they are made."""

from __future__ import annotations

import asyncio
from collections.abc import AsyncIterator
from pathlib import Path
from typing import Any

from interwind.errors import Cancelled
from interwind_service.server.admission import Admission, Ticket
from interwind_service.server.boundary import Call, PackedError
from interwind_service.server.limits import read_size, size_header
from interwind_service.workers.arrays import ArrayFolder
from interwind_service.workers.estimate import compute_bytes, result_bytes
from interwind_service.workers.job import CallAnswer, CallWork, Early, run_call
from interwind_service.workers.pool import Job, WorkerPool
from interwind_service.workers.spool import Spooled, SpoolReader


class Compute:
    """Answers every compute RPC alike; what they compute is the worker's business."""

    def __init__(self, *, pool: WorkerPool, admission: Admission, arrays: ArrayFolder, spool: Path) -> None:
        self._pool = pool
        self._admission = admission
        self._arrays = arrays
        self._spool = spool

    async def frames(self, request: bytes, call: Call) -> AsyncIterator[bytes]:
        """Yield the serialized responses. Leaving early, for whatever reason, ends the worker that computes them."""
        header = size_header(request)
        size = read_size(header)
        needed = compute_bytes(size, len(request), call.method)
        ticket = self._admission.enter(call.client, needed, result_bytes(size))
        path = self._spool / call.id
        try:
            work = CallWork(call.method, request, header, str(path), self._arrays)
            job, notes = self._start(work, ticket)
            reader: SpoolReader | None = None
            try:
                while isinstance(note := await notes.get(), Spooled | Early):
                    if isinstance(note, Early):
                        yield note.frame
                        continue
                    reader = reader or SpoolReader(str(path))
                    for frame in reader.frames(note.size_bytes):
                        yield frame
                answer = _answer(job, call)
                for frame in answer.frames:
                    yield frame
            finally:
                job.end(Cancelled("the caller left"))
                if reader is not None:
                    reader.close()
                job.add_done_callback(lambda _: path.unlink(missing_ok=True))
        finally:
            self._admission.leave(ticket)

    def _start(self, work: CallWork, ticket: Ticket) -> tuple[Job, asyncio.Queue[Any]]:
        loop = asyncio.get_running_loop()
        notes: asyncio.Queue[Any] = asyncio.Queue()

        def tell(note: Any) -> None:
            loop.call_soon_threadsafe(notes.put_nowait, note)

        def over(job: Job) -> None:
            """The worker is free, whether or not the caller has read its answer."""
            spooled = 0 if job.cancelled() or job.exception() else job.result().spooled_bytes
            loop.call_soon_threadsafe(self._admission.computed, ticket, spooled)
            tell(job)

        job = self._pool.call(run_call, work, on_note=tell)
        job.add_done_callback(over)
        return job, notes


def _answer(job: Job, call: Call) -> CallAnswer:
    """Return the answer of a job that is over; raise what it ended with instead."""
    if job.cancelled():
        raise job.reason or Cancelled("the call was withdrawn")
    if job.started_s is not None:
        call.log["queue_s"] = round(job.started_s - job.submitted_s, 6)
    error = job.exception()
    if error is not None:
        if job.trace:
            error.add_note(job.trace)
        raise error
    answer: CallAnswer = job.result()
    call.log["solve_s"] = round(answer.solve_s, 6)
    if answer.status:
        if answer.trace:
            call.log["trace"] = answer.trace
        raise PackedError(answer.status, answer.reason)
    return answer
