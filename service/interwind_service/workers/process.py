"""One worker process: its guards, then one job after another, until its parent hangs up or dies."""

from __future__ import annotations

import ctypes
import os
import pickle
import resource
import shutil
import signal
import sys
import threading
import traceback
from collections.abc import Callable
from contextlib import suppress
from dataclasses import dataclass
from multiprocessing import parent_process
from multiprocessing.connection import Connection
from typing import Any

from interwind_service.tolerances import WORKER_KEPT_HEAP_BYTES, WORKER_OOM_SCORE_ADJUST

PR_SET_PDEATHSIG = 1
M_TRIM_THRESHOLD, M_MMAP_THRESHOLD = -1, -3


@dataclass(frozen=True, slots=True)
class Guards:
    """What a worker obeys: its address space (0: no limit), and the ``spool`` folder it removes as an orphan."""

    memory_limit_bytes: int = 0
    spool: str = ""


@dataclass(frozen=True, slots=True)
class Note:
    """Something a job says before it ends."""

    content: Any


@dataclass(frozen=True, slots=True)
class Done:
    """What a job returned."""

    result: Any


@dataclass(frozen=True, slots=True)
class Raised:
    """What a job raised; ``trace`` is for the server's log alone."""

    error: BaseException
    trace: str


def serve(connection: Connection, guards: Guards) -> None:
    """Run the jobs that come through ``connection``: (function, arguments, wants_notes)."""
    put_on_guards(guards)
    while True:
        try:
            function, arguments, wants_notes = connection.recv()
        except (EOFError, OSError):
            return
        reply = run(function, arguments, (lambda content: connection.send(Note(content))) if wants_notes else None)
        try:
            connection.send(reply)
        except (pickle.PicklingError, AttributeError, TypeError) as error:
            connection.send(Raised(TypeError(f"the result of {function.__qualname__} cannot travel"), str(error)))


def run(
    function: Callable[..., Any], arguments: tuple[Any, ...], notify: Callable[[Any], None] | None
) -> Done | Raised:
    """Run one job. This is the worker's outermost edge: whatever it raises goes home as a value."""
    try:
        return Done(function(*arguments) if notify is None else function(*arguments, notify=notify))
    except Exception as error:  # the outermost edge of the worker
        trace = traceback.format_exc()
        try:
            pickle.loads(pickle.dumps(error))
        except Exception:  # an error that cannot travel is told by its text
            error = RuntimeError(f"{type(error).__name__}: {error}")
        return Raised(error, trace)


def put_on_guards(guards: Guards) -> None:
    """Let the kernel take this process before the server, bound its memory, and let it not outlive its parent."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    threading.Thread(target=_follow_parent, args=(guards.spool,), name="watchdog", daemon=True).start()
    if sys.platform == "linux":
        # A worker deep inside LAPACK may hold the interpreter lock for long; then the kernel ends it.
        ctypes.CDLL(None).prctl(PR_SET_PDEATHSIG, signal.SIGKILL)
        with suppress(OSError), open("/proc/self/oom_score_adj", "w") as file:  # a sandbox may forbid it
            file.write(str(WORKER_OOM_SCORE_ADJUST))
        _keep_freed_memory()
    if guards.memory_limit_bytes:
        _, hard = resource.getrlimit(resource.RLIMIT_AS)
        soft = guards.memory_limit_bytes if hard == resource.RLIM_INFINITY else min(guards.memory_limit_bytes, hard)
        resource.setrlimit(resource.RLIMIT_AS, (soft, hard))


def _keep_freed_memory() -> None:
    """Let the C library keep freed arrays for the next ones; fetching fresh pages costs a tenth of a short call."""
    mallopt = getattr(ctypes.CDLL(None), "mallopt", None)  # glibc's; elsewhere the default stands
    if mallopt is not None:
        mallopt(M_MMAP_THRESHOLD, WORKER_KEPT_HEAP_BYTES // 2)
        mallopt(M_TRIM_THRESHOLD, WORKER_KEPT_HEAP_BYTES)


def _follow_parent(spool: str) -> None:
    parent = parent_process()
    if parent is None:
        return
    parent.join()
    if spool:
        shutil.rmtree(spool, ignore_errors=True)
    os._exit(1)
