"""The store keeps what was submitted, once, and lets one server in at a time."""

from __future__ import annotations

import dataclasses
import sqlite3
import subprocess
import sys
from concurrent.futures import Future

import pytest
from plain_batch import plan

from interwind.errors import InvalidRequest, NotFound, OutOfRange, Overloaded, Unavailable
from interwind.model.batch import BatchState
from interwind_service.batch.folder import StateFolder, no_room, rows_name
from interwind_service.batch.schema import MIGRATIONS
from interwind_service.batch.store import Store


def test_same_request_id_is_same_batch(store):
    """A submission repeated with its request_id and content returns the batch it made; its copy leaves no file."""
    first = store.create(plan(store.folder, 10, 4, "one"))
    again = store.create(plan(store.folder, 10, 4, "one"))
    assert first.batch_id == again.batch_id
    assert [] == list(store.folder.incoming.iterdir())
    assert store.create(plan(store.folder, 10, 4)).batch_id != store.create(plan(store.folder, 10, 4)).batch_id


def test_request_id_with_other_content_is_refused(store):
    """The request_id of another content names its field and its reason."""
    store.create(plan(store.folder, 10, 4, "one"))
    with pytest.raises(InvalidRequest) as caught:
        store.create(plan(store.folder, 10, 4, "one", content="other"))
    assert "REQUEST_ID_REUSED" == caught.value.reason
    assert "request_id" == caught.value.violations[0].field
    assert store.create(plan(store.folder, 10, 4, "one", content="other"), "somebody else").batch_id


def test_batches_are_seen_by_their_owner_alone(store):
    """To another owner a batch does not exist: to read, to cancel, to delete, to list."""
    mine = store.create(plan(store.folder, 10, 4), "token-mine").batch_id
    for look in (store.progress, store.cancel, store.delete, store.ingredients):
        with pytest.raises(NotFound):
            look(mine, "token-other")
    assert ([], "") == store.page("token-other", 10, "")
    assert mine == store.page("token-mine", 10, "")[0][0].batch_id


def test_pages_hold_every_batch_once_newest_first(store):
    """Three pages of two; a token that is none is refused."""
    ids = [store.create(plan(store.folder, 1, 1)).batch_id for _ in range(5)]
    seen, token, pages = [], "", 0
    while pages == 0 or token:
        page, token = store.page("", 2, token)
        seen += [progress.batch_id for progress in page]
        pages += 1
    assert ids[::-1] == seen
    assert 3 == pages
    with pytest.raises(OutOfRange):
        store.page("", 2, "x")


def test_cancel_gives_up_what_is_pending(store):
    """Without a runner all rows are cancelled; a second cancel changes nothing."""
    batch_id = store.create(plan(store.folder, 10, 4)).batch_id
    progress = store.cancel(batch_id)
    assert (BatchState.CANCELLED, 10, True) == (progress.state, progress.cancelled_count, progress.done)
    assert progress == store.cancel(batch_id)
    assert [] == store.chunks.pending(10)


def test_delete_leaves_no_file(store):
    """A deleted batch is gone, its folder too."""
    batch_id = store.create(plan(store.folder, 10, 4)).batch_id
    store.delete(batch_id)
    assert not store.folder.batch(batch_id).exists()
    with pytest.raises(NotFound):
        store.progress(batch_id)


def test_rows_make_room_for_the_word_that_they_are_gone(store, monkeypatch):
    """On a disk so full that not even a deletion can be written, the files of the batch leave first."""
    batch_id = store.create(plan(store.folder, 10, 4)).batch_id
    rows = store.folder.batch(batch_id) / rows_name(0, 4)
    rows.write_bytes(bytes(96))
    write = store._journal.write

    def full(job):
        if not rows.exists():
            return write(job)
        refused = Future()
        refused.set_exception(no_room())
        return refused

    monkeypatch.setattr(store._journal, "write", full)
    store.delete(batch_id)
    assert [] == list(store.folder.batches.iterdir())
    with pytest.raises(NotFound):
        store.progress(batch_id)


def test_turns_between_batches(store):
    """A short batch behind a long one is not kept waiting: chunks are taken in turns."""
    first = store.create(plan(store.folder, 100, 1)).batch_id
    second = store.create(plan(store.folder, 2, 1)).batch_id
    assert [first, second, first, second] == [chunk.batch_id for chunk in store.chunks.pending(10)[:4]]


def test_one_server_a_folder_and_any_death_frees_it(tmp_path):
    """A second server is refused while the first lives, and let in once it was killed."""
    code = (
        "import sys, time; from interwind_service.batch.folder import StateFolder; f = StateFolder(sys.argv[1]);"
        "print('in', flush=True); time.sleep(60)"
    )
    with subprocess.Popen([sys.executable, "-c", code, str(tmp_path)], stdout=subprocess.PIPE) as holder:
        assert b"in" == holder.stdout.readline().strip()
        with pytest.raises(Unavailable) as caught:
            StateFolder(tmp_path)
        assert "STATE_FOLDER_IN_USE" == caught.value.reason
        holder.kill()
        holder.wait()
        StateFolder(tmp_path).close()


def test_a_newer_format_is_refused(tmp_path):
    """A database written by a later version is not guessed at."""
    Store(StateFolder(tmp_path), retain_s=1.0).close()
    with sqlite3.connect(tmp_path / "batches.sqlite3") as connection:
        connection.execute(f"PRAGMA user_version = {len(MIGRATIONS) + 1}")
    connection.close()
    folder = StateFolder(tmp_path)
    with pytest.raises(Unavailable) as caught:
        Store(folder, retain_s=1.0)
    assert "STATE_FOLDER_TOO_NEW" == caught.value.reason
    folder.close()


def test_results_that_cannot_fit_are_refused_at_once(store):
    """A batch whose results are larger than what the disk has left is not begun; the two sizes are told."""
    made = plan(store.folder, 4, 4)
    vast = dataclasses.replace(made, forecast=dataclasses.replace(made.forecast, result_bytes=10**18))
    with pytest.raises(Overloaded) as caught:
        store.create(vast)
    assert ("STATE_FOLDER_FULL", str(10**18)) == (caught.value.reason, caught.value.metadata["result_bytes"])
    assert [] == list(store.folder.incoming.iterdir())


def test_what_cannot_be_written_is_refused_and_nothing_is_kept(store):
    """When the disk is full the caller is told to come back; the store goes on once there is room."""
    made = plan(store.folder, 4, 4)
    hidden = store.folder.batches.rename(store.folder.path / "away")
    with pytest.raises(Exception, match="cannot be written") as caught:
        store.create(made)
    assert ("STATE_FOLDER_FULL", True) == (caught.value.reason, caught.value.retry_after_s > 0)
    hidden.rename(store.folder.batches)
    assert ([], "") == store.page(None, 10, "")
    assert 4 == store.create(made).variant_count
