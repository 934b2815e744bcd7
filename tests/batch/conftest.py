"""State folders and stores for the tests of this folder."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

from interwind_service.batch.folder import StateFolder
from interwind_service.batch.store import Store

sys.path.insert(0, str(Path(__file__).parent))


@pytest.fixture
def store(tmp_path) -> Iterator[Store]:
    """A store in a folder of its own."""
    opened = Store(StateFolder(tmp_path / "state"), retain_s=3600.0)
    yield opened
    opened.close()
