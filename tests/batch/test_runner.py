"""The runner computes each row once, whatever happens to workers, files and the server."""

from __future__ import annotations

import random
import subprocess
import sys
import threading
import time
from concurrent.futures import Executor, Future, ThreadPoolExecutor
from pathlib import Path

import numpy as np
import plain_batch
import pytest
from plain_batch import plan, rows_of, solve, wait_done

from interwind.errors import DataLoss, WorkerLost
from interwind.model.batch import BatchState
from interwind_service import tolerances as tol
from interwind_service.batch.folder import StateFolder, prove, rows_name
from interwind_service.batch.runner import Runner
from interwind_service.batch.store import Store
from interwind_service.batch.work import ChunkTask


class Shuffled(Executor):
    """An executor that holds what it is given and runs it in random order."""

    def __init__(self, seed: int) -> None:
        self._random = random.Random(seed)
        self._held: list[tuple[Future, object, ChunkTask]] = []
        self._lock = threading.Condition()
        self._closing = False
        self._thread = threading.Thread(target=self._run)
        self._thread.start()

    def submit(self, function, task):
        future = Future()
        with self._lock:
            self._held.append((future, function, task))
            self._lock.notify()
        return future

    def shutdown(self, wait=True, *, cancel_futures=False):
        with self._lock:
            self._closing = True
            self._lock.notify()
        self._thread.join()

    def _run(self):
        while True:
            with self._lock:
                while not self._held and not self._closing:
                    self._lock.wait()
                if self._closing:
                    return
                future, function, task = self._held.pop(self._random.randrange(len(self._held)))
            if not future.set_running_or_notify_cancel():
                continue
            try:
                future.set_result(function(task))
            except WorkerLost as error:
                future.set_exception(error)


@pytest.fixture
def run(store):
    """Run a batch on an executor and return its progress."""
    runners = []

    def begin(executor, function=solve, depth=3, **options):
        runners.append((Runner(store, executor, function, depth=depth, **options), executor))
        return runners[-1][0]

    yield begin
    for runner, executor in runners:
        runner.stop()
        executor.shutdown()


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_rows_do_not_depend_on_order_or_workers(store, run, seed):
    """Any order, any depth, by file or by value: the same rows."""
    run(Shuffled(seed), depth=seed * 4, by_value=seed == 3)
    progress = wait_done(store, store.create(plan(store.folder, 123, 5)).batch_id)
    assert (BatchState.DONE, 123) == (progress.state, progress.ok_count)
    assert np.array_equal(np.arange(123.0) ** 2, rows_of(store, progress.batch_id))


def test_a_lost_worker_costs_one_try(store, run):
    """A chunk whose worker died once is computed by the next."""
    tries = []

    def once(task):
        tries.append(task.first_row)
        if tries == [0]:
            raise WorkerLost("killed")
        return solve(task)

    run(ThreadPoolExecutor(1), once)
    progress = wait_done(store, store.create(plan(store.folder, 8, 8)).batch_id)
    assert ([0, 0], 8) == (tries, progress.ok_count)


def test_a_poisoned_row_is_singled_out(store, run):
    """The row that kills its worker every time fails alone, with its reason; its neighbours have their numbers."""
    kills = 0

    def poison(task):
        nonlocal kills
        if task.first_row <= 77 < task.first_row + task.row_count:
            kills += 1
            raise WorkerLost("killed")
        return solve(task)

    run(ThreadPoolExecutor(2), poison)
    progress = wait_done(store, store.create(plan(store.folder, 128, 64)).batch_id)
    assert (127, 1) == (progress.ok_count, progress.failed_count)
    assert tol.BATCH_CHUNK_TRIES * 3 == kills  # chunks of 64, of 8, of 1
    (failed,) = [chunk for chunk in store.chunks.of_batch(progress.batch_id) if chunk.reasons]
    assert (77, 1, "WORKER_LOST") == (failed.first_row, failed.row_count, failed.reasons[0].code)


def test_a_defect_is_no_end_of_the_batch(store, run):
    """A row at which the code breaks fails alone, too."""

    def broken(task):
        if task.first_row <= 3 < task.first_row + task.row_count:
            raise ZeroDivisionError
        return solve(task)

    run(ThreadPoolExecutor(1), broken)
    progress = wait_done(store, store.create(plan(store.folder, 16, 16)).batch_id)
    assert (15, 1) == (progress.ok_count, progress.failed_count)


def test_a_full_disk_is_waited_for(store, run, monkeypatch):
    """A worker that cannot write leaves its chunk pending; it is no poison."""
    monkeypatch.setattr("interwind_service.batch.runner.BATCH_STORE_RETRY_S", 0.05)
    refusals = iter(range(5))

    def full(task):
        if next(refusals, None) is not None:
            raise OSError(28, "No space left on device")
        return solve(task)

    run(ThreadPoolExecutor(1), full)
    progress = wait_done(store, store.create(plan(store.folder, 8, 8)).batch_id)
    assert (8, 0) == (progress.ok_count, progress.failed_count)


def test_cancel_keeps_the_rows_that_are_there(store, run):
    """After cancel nothing more is computed; rows stored before stay, and nothing is counted twice."""
    gate = threading.Event()

    def gated(task):
        if task.first_row >= 20:
            gate.wait(10)
        return solve(task)

    runner = run(ThreadPoolExecutor(1), gated, depth=2)
    batch_id = store.create(plan(store.folder, 100, 10)).batch_id
    while store.progress(batch_id).ok_count < 20:
        time.sleep(0.01)
    progress = runner.cancel(batch_id)
    gate.set()
    assert (BatchState.CANCELLED, 20, 80, True) == (
        progress.state, progress.ok_count, progress.cancelled_count, progress.done,
    )  # fmt: skip
    time.sleep(0.1)
    assert progress == store.progress(batch_id)


def test_a_torn_file_is_found_when_read_and_computed_again(store, run):
    """A truncated result is refused as DataLoss, never served; then the same bytes are there again."""
    runner = run(ThreadPoolExecutor(1))
    progress = wait_done(store, store.create(plan(store.folder, 40, 10)).batch_id)
    chunk = store.chunk_at(progress.batch_id, 25)
    path = store.folder.batch(progress.batch_id) / rows_name(chunk.first_row, chunk.row_count)
    before = path.read_bytes()
    path.write_bytes(before[:-8])
    with pytest.raises(DataLoss):
        prove(path, chunk.size_bytes, chunk.sha256)
    runner.damaged(chunk)
    after = wait_done(store, progress.batch_id)
    assert (40, before) == (after.ok_count, path.read_bytes())
    assert after.sequence > progress.sequence


@pytest.mark.parametrize("tear", [lambda data: data[:-1], lambda data: data[:-1] + b"\x01", lambda data: b""])
def test_a_torn_file_is_found_at_the_start(tmp_path, tear):
    """After a restart the newest file, torn by a power cut or changed in place, is computed again unasked."""
    store = Store(StateFolder(tmp_path), retain_s=3600.0)
    runner = Runner(store, ThreadPoolExecutor(1), solve, depth=2)
    batch_id = store.create(plan(store.folder, 40, 10)).batch_id
    wait_done(store, batch_id)
    runner.stop()
    store.close()
    path = tmp_path / "batches" / batch_id / rows_name(30, 10)
    path.write_bytes(tear(path.read_bytes()))
    store = Store(StateFolder(tmp_path), retain_s=3600.0)
    sequence = store.progress(batch_id).sequence
    runner = Runner(store, ThreadPoolExecutor(1), solve, depth=2)
    while store.progress(batch_id).sequence < sequence + 2:
        time.sleep(0.01)
    assert np.array_equal(np.arange(40.0) ** 2, rows_of(store, batch_id))
    runner.stop()
    store.close()


def test_lost_input_fails_the_rows_and_says_so(tmp_path):
    """When the submitted numbers themselves are torn the rows fail with that reason; nothing is computed from them."""
    store = Store(StateFolder(tmp_path), retain_s=3600.0)
    batch_id = store.create(plan(store.folder, 6, 3)).batch_id
    columns = store.folder.batch(batch_id) / "columns"
    columns.write_bytes(columns.read_bytes()[:-8] + b"\0" * 8)
    runner = Runner(store, ThreadPoolExecutor(1), solve, depth=2)
    assert 6 == wait_done(store, batch_id).failed_count
    assert "INPUT_DAMAGED" == store.chunk_at(batch_id, 0).reasons[0].code
    runner.stop()
    store.close()


def impatient(monkeypatch):
    monkeypatch.setattr("interwind_service.batch.runner.BATCH_PATIENCE_S", 0.2)
    monkeypatch.setattr("interwind_service.batch.runner.BATCH_PATIENCE_FACTOR", 0.0)
    monkeypatch.setattr("interwind_service.batch.runner.BATCH_LOOK_EVERY_S", 0.05)


def test_a_variant_that_never_ends_fails_alone(store, run, monkeypatch):
    """A chunk far beyond its forecast is ended, tried again, split; the one row that hangs fails as TOO_LONG."""
    impatient(monkeypatch)

    class Endable(Future):
        def end(self, reason):
            if not self.done():
                self.set_exception(reason)

    class Stuck(Executor):
        def submit(self, function, task):
            future = Endable()
            if not task.first_row <= 5 < task.first_row + task.row_count:
                future.set_result(function(task))
            return future

    run(Stuck())
    progress = wait_done(store, store.create(plan(store.folder, 16, 8)).batch_id)
    assert (15, 1) == (progress.ok_count, progress.failed_count)
    assert "TOO_LONG" == store.chunk_at(progress.batch_id, 5).reasons[0].code


def test_a_silent_cluster_is_asked_anew(store, run, monkeypatch):
    """An executor that forgets what it was given, as a cluster may that loses workers, is given it again."""
    impatient(monkeypatch)
    forgotten = iter(range(3))

    class Forgetful(ThreadPoolExecutor):
        def submit(self, function, task):
            return Future() if next(forgotten, None) is not None else super().submit(function, task)

    run(Forgetful(1), by_value=True)
    assert 40 == wait_done(store, store.create(plan(store.folder, 40, 10)).batch_id).ok_count


POINTS = ["renamed", "before commit", "committed"]


@pytest.mark.parametrize("point", POINTS)
def test_death_at_any_point_loses_and_doubles_nothing(tmp_path, point):
    """Killed between file and row, before and after the commit, again and again: each row is there once, whole."""
    program = [sys.executable, plain_batch.__file__, str(tmp_path), point]
    deaths = 0
    for count in [1, 1, 2, 2, 3]:
        deaths += subprocess.run([*program, str(count)], check=False).returncode == -9
    assert 0 == subprocess.run([*program, "0"], check=False).returncode
    assert deaths >= 4
    store = Store(StateFolder(tmp_path), retain_s=3600.0)
    (progress,), _ = store.page(None, 10, "")
    assert (400, 400) == (progress.ok_count, progress.variant_count)
    assert np.array_equal(np.arange(400.0) ** 2, rows_of(store, progress.batch_id))
    assert "ok" == store._journal.read("PRAGMA integrity_check")[0][0]
    assert [] == [path for path in Path(store.folder.batch(progress.batch_id)).glob("*.part")]
    store.close()
