"""Servers for the tests of this folder."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from interwind.channel import Target
from interwind.client import Client
from interwind.model.windings import WindingSet
from interwind_service.testing import RunningService, wait_until

DOUBLES = Path(__file__).parent / "service_with_doubles.py"


@pytest.fixture(scope="module")
def service() -> Iterator[RunningService]:
    """A server of two workers whose engine does what the labels say, for the tests of one file."""
    with RunningService("--workers", "2", "--grace-s", "3", script=DOUBLES) as running:
        settle(running)
        yield running


@pytest.fixture
def lone_service() -> Iterator[RunningService]:
    """Such a server for one test, which may do to it what it likes."""
    with RunningService("--workers", "2", "--grace-s", "3", script=DOUBLES) as running:
        settle(running)
        yield running


def settle(running: RunningService) -> None:
    """Wait until the workers are up and the probe of their BLAS is over."""
    with Client(Target(running.address)) as client:
        wait_until(lambda: client.server_info().blas_thread_count == 1, 30)


@pytest.fixture
def client(service: RunningService) -> Iterator[Client]:
    """A client that raises the first error."""
    with Client(Target(service.address), retries=0) as connected:
        yield connected


@pytest.fixture
def order():
    """Return the winding set that makes the double do ``what`` with ``number``."""

    def windings(what: str, number: float = 1.0) -> WindingSet:
        return WindingSet((what,), [[number]])

    return windings
