"""What passes between the store, the runner and the workers: plain values, by pickle."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from interwind.model.batch import CostForecast, VariantStatus

STATUSES = tuple(VariantStatus)  # a status byte is 1 + the position
STATUS_CODE = {status: 1 + position for position, status in enumerate(STATUSES)}
OK_CODE, INVALID_CODE, FAILED_CODE, CANCELLED_CODE = (STATUS_CODE[status] for status in STATUSES)


@dataclass(frozen=True, slots=True)
class Plan:
    """A submission checked and written down: its files in ``folder`` ("" when it was only to be checked).

    ``recipe`` holds all but the numbers that vary; ``columns`` those, float64, shape (variants, width), row by row.
    ``content_sha256`` is the fingerprint of both; ``header`` says what the rows will be.
    """

    folder: str
    request_id: str
    content_sha256: str
    recipe_sha256: str
    columns_sha256: str
    width: int
    variant_count: int
    chunk_rows: int
    header: bytes
    forecast: CostForecast


@dataclass(frozen=True, slots=True)
class ChunkTask:
    """Some consecutive variants for one worker; the answer's numbers go to ``path``, or back in it when that is ""."""

    recipe: bytes
    columns: bytes
    first_row: int
    row_count: int
    path: str


@dataclass(frozen=True, slots=True)
class RowReason:
    """Why one row is not OK."""

    row: int
    code: str
    message: str


@dataclass(frozen=True, slots=True)
class ChunkAnswer:
    """The rows of a chunk: one status byte a row, the reasons of those not OK, and the numbers' size and SHA-256."""

    statuses: bytes
    reasons: tuple[RowReason, ...]
    size_bytes: int
    sha256: str
    values: bytes = b""


Solve = Callable[[ChunkTask], ChunkAnswer]
