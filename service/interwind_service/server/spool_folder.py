"""The folder for results and arrays on their way: one a server, locked while it lives, cleared away after any death."""

from __future__ import annotations

import contextlib
import fcntl
import os
import shutil
import tempfile
from collections.abc import Iterator
from pathlib import Path

from interwind_service.server.settings import SettingsError

PREFIX = "interwind-spool-"
SHARED_MEMORY = Path("/dev/shm")


@contextlib.contextmanager
def spool_folder(parent: str) -> Iterator[Path]:
    """Make the folder under ``parent`` (empty: memory-backed where there is such a place), with its rooms inside."""
    usable = SHARED_MEMORY.is_dir() and os.access(SHARED_MEMORY, os.W_OK)
    home = Path(parent or (SHARED_MEMORY if usable else tempfile.gettempdir()))
    try:
        _remove_those_of_the_dead(home)
        begun = Path(tempfile.mkdtemp(prefix=f".{PREFIX}{os.getpid()}-", dir=home))
        for room in ("arrays", "calls"):
            (begun / room).mkdir()
        lock = (begun / "lock").open("w")
        fcntl.flock(lock, fcntl.LOCK_EX)
        folder = begun.rename(begun.with_name(begun.name.removeprefix(".")))  # seen by others only once it is locked
    except OSError as error:
        raise SettingsError(f"--spool-dir: {error}") from error
    with lock:
        try:
            yield folder
        finally:
            shutil.rmtree(folder, ignore_errors=True)


def _remove_those_of_the_dead(home: Path) -> None:
    """Remove the folders of servers that no longer hold their lock, whatever ended them."""
    for folder in home.glob(f"{PREFIX}*"):
        with contextlib.suppress(OSError), (folder / "lock").open("r+") as lock:
            fcntl.flock(lock, fcntl.LOCK_EX | fcntl.LOCK_NB)
            shutil.rmtree(folder, ignore_errors=True)
