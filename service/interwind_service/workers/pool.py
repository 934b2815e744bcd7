"""A pool of worker processes, each behind a keeper thread of its own: a worker that dies takes one job with it.

``concurrent.futures.ProcessPoolExecutor(n)`` breaks as a whole when one process is killed. Here killing is the ordinary
way to end a job whose caller left, so every worker stands alone and is replaced at once.
"""

from __future__ import annotations

import heapq
import itertools
import logging
import threading
import time
from collections import Counter
from collections.abc import Callable
from concurrent.futures import Executor, Future
from enum import IntEnum
from multiprocessing.connection import Connection
from multiprocessing.process import BaseProcess
from typing import Any

from interwind.errors import InterwindError, Unavailable, WorkerLost
from interwind_service.tolerances import IDLE_LOOK_S, WORKER_LEAVE_S, WORKER_RESPAWN_PAUSE_S
from interwind_service.workers.forking import start_forkserver
from interwind_service.workers.process import Done, Guards, Note, Raised, serve

logger = logging.getLogger("interwind_service")


class Priority(IntEnum):
    """Who goes first when a worker is free."""

    CALL = 0
    BATCH = 1


class Job(Future):  # type: ignore[type-arg]
    """One piece of work for one worker: a future that can also be ended while it runs."""

    def __init__(
        self,
        function: Callable[..., Any],
        arguments: tuple[Any, ...],
        priority: Priority,
        on_note: Callable[[Any], None] | None,
    ) -> None:
        super().__init__()
        self.work = (function, arguments, on_note is not None)
        self.priority = priority
        self.on_note = on_note
        self.submitted_s = time.monotonic()
        self.started_s: float | None = None
        self.trace = ""
        self._process: BaseProcess | None = None
        self.reason: InterwindError | None = None
        self._ending = threading.Lock()

    def end(self, reason: InterwindError) -> None:
        """Withdraw the job: from the queue if it waits, with its worker if it runs; done jobs stay as they are."""
        with self._ending:
            if self.done():
                return
            self.reason = reason
            if self.cancel():
                return
            if self._process is not None:
                self._process.kill()

    def begin(self, process: BaseProcess) -> bool:
        """Take the job up, unless it was withdrawn."""
        with self._ending:
            if not self.set_running_or_notify_cancel():
                return False
            self._process, self.started_s = process, time.monotonic()
            return True

    def leave(self) -> InterwindError | None:
        """Part from the worker, so that ending this job can no longer hurt the next one; return why it was ended."""
        with self._ending:
            self._process = None
            return self.reason


class WorkerPool(Executor):
    """``count`` workers by forkserver, what they need imported once for all of them, one BLAS thread each.

    As an `Executor` it takes batch work (`submit`), which stands behind every call (`call`) in the queue.
    """

    def __init__(self, count: int, *, guards: Guards) -> None:
        self._context = start_forkserver()
        self._guards = guards
        self._queue: list[tuple[Priority, int, Job]] = []
        self._order = itertools.count()
        self._ready = threading.Condition()
        self._spawning = threading.Lock()
        self._closing = False
        self.count = count
        self.restarts: Counter[str] = Counter()
        self._current: dict[int, Job] = {}
        self._unable: set[int] = set()
        self._keepers = [
            threading.Thread(target=self._keep, args=(slot,), name=f"keeper-{slot}", daemon=True)
            for slot in range(count)
        ]

    def start(self) -> None:
        """Start the workers; what was queued before waits for them."""
        for keeper in self._keepers:
            keeper.start()

    @property
    def busy(self) -> int:
        """Workers computing now."""
        return len(self._current)

    @property
    def able(self) -> bool:
        """Whether a worker can be had; at the start the pool is trusted to get some."""
        return len(self._unable) < self.count

    @property
    def waiting(self) -> int:
        """Jobs that no worker has taken up yet."""
        with self._ready:
            return sum(not job.done() for _, _, job in self._queue)

    def call(
        self, function: Callable[..., Any], /, *arguments: Any, on_note: Callable[[Any], None] | None = None
    ) -> Job:
        """Queue the work of an interactive call; ``on_note`` is called from a keeper thread with what the job says."""
        return self._put(Job(function, arguments, Priority.CALL, on_note))

    def submit(self, function: Callable[..., Any], /, *arguments: Any, **keywords: Any) -> Job:
        """Queue batch work, behind every call."""
        if keywords:
            raise TypeError("a worker job takes its arguments by position")
        return self._put(Job(function, arguments, Priority.BATCH, None))

    def _put(self, job: Job) -> Job:
        with self._ready:
            if self._closing:
                raise Unavailable("the server is stopping; send the call again to another one", reason="DRAINING")
            heapq.heappush(self._queue, (job.priority, next(self._order), job))
            self._ready.notify()
        return job

    def shutdown(self, wait: bool = True, *, cancel_futures: bool = False) -> None:
        """Take no more work; with ``cancel_futures`` end what waits and what runs; then let the workers go."""
        with self._ready:
            self._closing = True
            jobs = [job for _, _, job in self._queue] + list(self._current.values()) if cancel_futures else []
            self._ready.notify_all()
        for job in jobs:
            job.end(Unavailable("the server is stopping; send the call again to another one", reason="DRAINING"))
        if wait:
            end_s = time.monotonic() + WORKER_LEAVE_S
            for keeper in filter(threading.Thread.is_alive, self._keepers):
                keeper.join(max(0.0, end_s - time.monotonic()))

    def _take(self) -> Job | None:
        """Return the next job; None after a while without one, so that the keeper can look after its worker."""
        with self._ready:
            if not self._queue and not self._closing:
                self._ready.wait(IDLE_LOOK_S)
            return heapq.heappop(self._queue)[2] if self._queue else None

    def _keep(self, slot: int) -> None:
        process, pipe = self._spawn(slot)
        while (job := self._take()) is not None or not self._closing:
            if not process.is_alive():  # it died while idle: nobody's call is lost
                process, pipe = self._replace(slot, process, pipe, "died idle")
            if job is None or not job.begin(process):
                continue
            self._current[slot] = job
            reply = _converse(job, pipe)
            reason = job.leave()
            del self._current[slot]
            if reply is None or reason is not None:
                # Killed, or asked to die at the very moment it finished: either way this process is not used again.
                process.kill()
                process.join()
                lost = WorkerLost("the worker that computed this call died; send the call again", retry_after_s=0.0)
                exit_code = process.exitcode
                process, pipe = self._replace(slot, process, pipe, reason.reason.lower() if reason else "lost")
                lost.metadata["exit_code"] = str(exit_code)
                job.set_exception(reason or lost)
            elif isinstance(reply, Raised):
                job.trace = reply.trace
                job.set_exception(reply.error)
            else:
                job.set_result(reply.result)
        pipe.close()  # the worker sees the end of the pipe and leaves
        process.join()

    def _replace(
        self, slot: int, process: BaseProcess, pipe: Connection, reason: str
    ) -> tuple[BaseProcess, Connection]:
        pipe.close()
        process.join()
        process.close()
        self.restarts[reason] += 1
        return self._spawn(slot)

    def _spawn(self, slot: int) -> tuple[BaseProcess, Connection]:
        while True:
            ours, theirs = self._context.Pipe()
            process = self._context.Process(target=serve, args=(theirs, self._guards), name="worker", daemon=True)
            try:
                with self._spawning:
                    process.start()
            except (OSError, EOFError) as error:  # no process to be had right now; the queue holds until there is
                logger.warning("no worker can be started", extra={"fields": {"error": str(error)}})
                self._unable.add(slot)
                ours.close()
                time.sleep(WORKER_RESPAWN_PAUSE_S)
                continue
            finally:
                theirs.close()
            self._unable.discard(slot)
            return process, ours


def _converse(job: Job, pipe: Connection) -> Done | Raised | None:
    """Send the work, pass on the notes, return the reply; None when the worker died."""
    try:
        pipe.send(job.work)
        while isinstance(reply := pipe.recv(), Note):
            if job.on_note is not None:
                job.on_note(reply.content)
    except (EOFError, OSError):
        return None
    return reply
