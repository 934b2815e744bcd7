"""How far a long computation has come: whoever computes reports, whoever listens decides what to do with it."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from contextvars import ContextVar

from interwind_service.tolerances import PROGRESS_INTERVAL_S

Listener = Callable[[int, int], None]

_listener: ContextVar[Listener | None] = ContextVar("progress_listener", default=None)


@contextmanager
def listening(listener: Listener) -> Iterator[None]:
    """Pass on what is reported inside, not more often than ``PROGRESS_INTERVAL_S``; the last report always."""
    next_s = 0.0

    def seldom(done: int, total: int) -> None:
        nonlocal next_s
        now = time.monotonic()
        if now >= next_s or done >= total:
            next_s = now + PROGRESS_INTERVAL_S
            listener(done, total)

    token = _listener.set(seldom)
    try:
        yield
    finally:
        _listener.reset(token)


def report(done: int, total: int) -> None:
    """Say that ``done`` of ``total`` units of work are done; nobody need listen."""
    listener = _listener.get()
    if listener is not None:
        listener(done, total)
