"""Retention: batches leave so long after they are done, whatever the wall clock says meanwhile."""

from __future__ import annotations

import sqlite3
import types

import pytest
from plain_batch import plan

from interwind.errors import NotFound
from interwind_service.batch.folder import StateFolder
from interwind_service.batch.schema import MIGRATIONS
from interwind_service.batch.store import Store
from interwind_service.tolerances import BATCH_GAP_SHARE

YEAR_S = 365 * 86_400.0
RETAIN_S = 1000.0


class Clocks:
    """A wall clock that anybody may set, and the one that only runs."""

    def __init__(self) -> None:
        self.wall_s = 1.7e9
        self.running_s = 50.0

    def both_pass(self, seconds: float) -> None:
        self.wall_s += seconds
        self.running_s += seconds


@pytest.fixture
def clocks(monkeypatch) -> Clocks:
    """The clocks that the age of a folder is read from."""
    made = Clocks()
    monkeypatch.setattr(
        "interwind_service.batch.age.time", types.SimpleNamespace(monotonic=lambda: made.running_s)
    )  # fmt: skip
    return made


def opened(path, clocks: Clocks) -> Store:
    return Store(StateFolder(path), retain_s=RETAIN_S, wall_s=lambda: clocks.wall_s)


def held(store: Store) -> list[str]:
    store.expire()
    return [progress.batch_id for progress in store.page(None, 100, "")[0]]


def test_done_batches_leave_in_time_and_others_never(tmp_path, clocks):
    """A batch that is done leaves after its time, with its files; one that is not stays however long it takes."""
    store = opened(tmp_path, clocks)
    pending, done = (store.create(plan(store.folder, 4, 4)).batch_id for _ in range(2))
    told = store.cancel(done)
    assert (clocks.wall_s, clocks.wall_s + RETAIN_S) == (told.done_time_s, told.expire_time_s)
    clocks.both_pass(RETAIN_S - 1.0)
    assert [done, pending] == held(store)
    clocks.both_pass(2.0)
    assert [pending] == held(store)
    clocks.both_pass(YEAR_S)
    assert [pending] == held(store)
    assert [store.folder.batch(pending)] == list(store.folder.batches.iterdir())
    store.close()


@pytest.mark.parametrize("jump_s", [YEAR_S, -YEAR_S])
def test_a_clock_set_wrong_while_the_server_runs_changes_nothing(tmp_path, clocks, jump_s):
    """A jump, and the jump back: the batch leaves when its own time is over, neither before nor after."""
    store = opened(tmp_path, clocks)
    done = store.cancel(store.create(plan(store.folder, 4, 4)).batch_id).batch_id
    clocks.wall_s += jump_s
    assert [done] == held(store)
    second = store.cancel(store.create(plan(store.folder, 4, 4)).batch_id)
    assert clocks.wall_s == second.create_time_s
    clocks.wall_s -= jump_s
    clocks.both_pass(RETAIN_S - 1.0)
    assert [second.batch_id, done] == held(store)
    clocks.both_pass(2.0)
    assert [] == held(store)
    store.close()


@pytest.mark.parametrize("jump_s", [YEAR_S, -YEAR_S])
def test_a_clock_wrong_at_a_start_takes_little_of_the_time(tmp_path, clocks, jump_s):
    """A server that starts with a date a year off, and the next with the right one: most of the time is left."""
    store = opened(tmp_path, clocks)
    done = store.cancel(store.create(plan(store.folder, 4, 4)).batch_id).batch_id
    for jump in (jump_s, -jump_s):
        store.close()
        clocks.wall_s += jump
        store = opened(tmp_path, clocks)
        assert [done] == held(store)
    clocks.both_pass((1.0 - BATCH_GAP_SHARE) * RETAIN_S - 1.0)
    assert [done] == held(store)
    clocks.both_pass(2.0)
    assert [] == held(store)
    store.close()


def test_time_without_a_server_counts(tmp_path, clocks):
    """A folder that is opened now and then, for a moment, empties as well; not only the hours of a server count."""
    store = opened(tmp_path, clocks)
    done = store.cancel(store.create(plan(store.folder, 4, 4)).batch_id).batch_id
    pauses = 0
    while held(store) == [done]:
        store.close()
        clocks.wall_s += 0.09 * RETAIN_S
        pauses += 1
        store = opened(tmp_path, clocks)
    assert 12 == pauses
    store.close()


def test_a_death_forgets_no_more_than_the_last_look(tmp_path, clocks):
    """The age is written at every look for what has expired; a server that dies goes on from there."""
    store = opened(tmp_path, clocks)
    store.cancel(store.create(plan(store.folder, 4, 4)).batch_id)
    clocks.both_pass(900.0)
    store.expire()
    store._age.keep = lambda connection: None  # a death writes nothing down
    store.close()
    clocks.wall_s += 99.0
    store = opened(tmp_path, clocks)
    assert 1 == len(held(store))
    clocks.both_pass(2.0)
    assert [] == held(store)
    store.close()


def test_a_folder_of_the_first_format_is_taken_over(tmp_path, clocks):
    """Its batches are there, and are kept for their whole time from now on."""
    folder = StateFolder(tmp_path)
    with sqlite3.connect(folder.database) as connection:
        connection.executescript(f"BEGIN; {MIGRATIONS[0]} PRAGMA user_version = 1; COMMIT;")
        connection.execute(
            "INSERT INTO batch (batch_id, owner, content_sha256, recipe_sha256, columns_sha256, width, variant_count,"
            " chunk_rows, header, duration_s, result_bytes, memory_bytes, chunk_count, state, cancelled_count,"
            " create_time_s, done_time_s, expire_time_s)"
            " VALUES ('old', '', '', '', '', 1, 4, 4, x'', 1.0, 1, 1, 1, 'CANCELLED', 4, 1e9, 1e9, 1e9 + 1000.0)"
        )
    connection.close()
    folder.close()
    store = opened(tmp_path, clocks)
    assert ["old"] == held(store)
    clocks.both_pass(RETAIN_S + 1.0)
    assert [] == held(store)
    with pytest.raises(NotFound):
        store.progress("old")
    store.close()
