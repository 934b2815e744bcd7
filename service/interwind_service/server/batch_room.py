"""The room of the batches in a server's life: opened before the doors, emptied when the server drains."""

from __future__ import annotations

import contextlib
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from interwind.errors import InvalidRequest, Unavailable
from interwind_service.batch.executors import place_of
from interwind_service.batch.folder import StateFolder
from interwind_service.batch.runner import Runner
from interwind_service.batch.store import Store
from interwind_service.server.batch_work import solve_chunk
from interwind_service.server.logs import emit
from interwind_service.server.settings import Settings, SettingsError
from interwind_service.workers.pool import WorkerPool

DAY_S = 86_400.0


@dataclass(frozen=True, slots=True)
class BatchRoom:
    """What the front needs to speak of batches."""

    store: Store
    runner: Runner


@contextlib.contextmanager
def batch_room(settings: Settings, pool: WorkerPool, spool: Path) -> Iterator[BatchRoom]:
    """Open the state folder and go on with what is pending; without one, batches last as long as the server."""
    with contextlib.ExitStack() as stack:
        try:
            folder = StateFolder(settings.state_dir or spool / "batches")
            store = stack.enter_context(contextlib.closing(Store(folder, retain_s=settings.retain_days * DAY_S)))
            place = stack.enter_context(place_of(settings.executor, pool, pool.count))
        except (InvalidRequest, Unavailable) as error:
            raise SettingsError(f"--state-dir, --executor: {error}") from error
        except OSError as error:
            raise SettingsError(f"--state-dir: {error}") from error
        runner = Runner(store, place.executor, solve_chunk, depth=place.depth, by_value=place.by_value, tell=emit)
        stack.callback(runner.stop)
        yield BatchRoom(store, runner)
