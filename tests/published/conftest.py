"""The solver that the published cases go through: the public client with its own server."""

from __future__ import annotations

from collections.abc import Iterator

import pytest

import interwind as iw


@pytest.fixture(scope="session")
def solver() -> Iterator[iw.Client]:
    """A client of a real server, one for the whole session."""
    with iw.connect() as client:
        yield client
