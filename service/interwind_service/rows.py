"""Long tables go out row by row while they are made: whoever computes offers them, whoever listens may take them."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from contextvars import ContextVar
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from interwind.model.observables import Observable
from interwind_service.tolerances import STREAMED_ROWS_BYTES

RowSink = Callable[[int, NDArray[np.float64]], None]


class RowListener(Protocol):
    """Takes a table: its columns and length first, then its rows in order."""

    def begin(self, columns: Sequence[Observable], rows: int) -> None:
        """Be told what comes."""

    def add(self, first: int, samples: NDArray[np.float64]) -> None:
        """Take samples (any, columns), ``first`` being the place of the first row."""


_listener: ContextVar[RowListener | None] = ContextVar("row_listener", default=None)


@contextmanager
def streaming_rows(listener: RowListener | None) -> Iterator[None]:
    """Offer ``listener`` every long table that is made inside."""
    token = _listener.set(listener)
    try:
        yield
    finally:
        _listener.reset(token)


def offer(columns: Sequence[Observable], rows: int) -> RowSink | None:
    """Return where the rows of a table go as they are made; None when nobody listens or it is short."""
    listener = _listener.get()
    if listener is None or rows * len(columns) * 8 < STREAMED_ROWS_BYTES:
        return None
    listener.begin(columns, rows)
    return listener.add
