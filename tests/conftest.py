"""Options and shared fixtures of the whole suite."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
os.environ.setdefault("OMP_NUM_THREADS", "1")


def pytest_addoption(parser: pytest.Parser) -> None:
    parser.addoption("--long", action="store_true", default=False, help="run the tests that take minutes, too")


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    if config.getoption("--long"):
        return
    for item in items:
        if "long" in item.keywords:
            item.add_marker(pytest.mark.skip(reason="takes minutes; run bash deploy/test.sh --long"))


@pytest.fixture(scope="session")
def data_folder() -> Path:
    """The folder of the published data files: INTERWIND_DATA, else ../shared/data; skips when neither is there."""
    folder = Path(os.environ.get("INTERWIND_DATA", Path(__file__).parents[2] / "shared" / "data"))
    if not folder.is_dir():
        pytest.skip(f"the published data files are not at {folder}; set INTERWIND_DATA to their folder")
    return folder
