"""One real server for the tests that do it no harm."""

from __future__ import annotations

from collections.abc import Iterator

import pytest

from interwind_service.testing import RunningService


@pytest.fixture(scope="session")
def real_service() -> Iterator[RunningService]:
    """Two workers and a long queue."""
    with RunningService("--workers", "2", "--queue-limit", "100") as running:
        yield running
