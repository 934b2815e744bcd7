"""A disk that is really full: a call is refused with its reason, what is there stays, and work goes on with room."""

from __future__ import annotations

import shutil
import signal
import subprocess
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import numpy as np
import pytest

import interwind as iw
from interwind_service.testing import RunningService, wait_until

sys.path.insert(0, str(Path(__file__).parents[1] / "batch"))
import link

SCRIPT = Path(__file__).parent / "service_on_a_small_disk.py"
NETWORK = iw.Network("0", [iw.VoltageSource("v", "a", "0"), iw.Resistor("r", "a", "0", resistance_ohm=1.0)])
ANALYSIS = iw.FrequencyAnalysis(link.FREQUENCY_HZ, link.OBSERVE)
VARIANTS = 10_000  # 32 MB of results
BATCH_DISK_BYTES = 100 * 2**20
SPOOL_DISK_BYTES = 8 * 2**20


@pytest.fixture
def disk(tmp_path) -> Path:
    """A folder that a small disk can be mounted on."""
    folder = tmp_path / "disk"
    folder.mkdir()
    trial = ["unshare", "--map-root-user", "--mount", "mount", "-t", "tmpfs", "none", str(folder)]
    if not shutil.which("unshare") or subprocess.run(trial, capture_output=True, check=False).returncode:
        pytest.skip("this machine lets nobody mount a disk in a name space of his own (unshare --map-root-user)")
    return folder


@contextmanager
def serve(disk: Path, size_bytes: int, *arguments: str) -> Iterator[tuple[RunningService, iw.Client, Path]]:
    """Serve with the disk; yield the server, a client that does not retry, and the disk as the server sees it."""
    environment = {"SMALL_DISK": str(disk), "SMALL_DISK_BYTES": str(size_bytes)}
    with RunningService("--workers", "2", *arguments, script=SCRIPT, environment=environment) as server:
        with iw.connect(server.address, retries=0) as client:
            yield server, client, Path(f"/proc/{server.pid}/root{disk}")


def fill(disk: Path) -> Path:
    """Take the last byte of a disk; return the file that has them."""
    ballast = disk / "ballast"
    with open(ballast, "wb", buffering=0) as file:
        for size in (1 << 20, 1 << 12):
            try:
                while file.write(bytes(size)) == size:
                    pass
            except OSError:
                continue
    assert shutil.disk_usage(disk).free < 4096
    return ballast


def submit(client: iw.Client, count: int = VARIANTS) -> iw.Batch:
    return client.submit_batch(
        link.network(), ANALYSIS, [iw.Vary("load", "resistance_ohm", np.linspace(5.0, 30.0, count))]
    )  # fmt: skip


def test_batch_waits_for_room_and_loses_nothing(disk, order):
    """Its disk full, a batch says so and stands still; new ones are refused; with room it ends in the same bytes."""
    with serve(disk, BATCH_DISK_BYTES, "--state-dir", str(disk)) as (server, client, seen):
        done = submit(client)
        want = done.result()
        batch = submit(client)
        ballast = fill(seen)
        wait_until(lambda: batch.progress().held_reason == "STATE_FOLDER_FULL", 30)
        stood = batch.progress()
        assert not stood.done
        assert stood.ok_count == stood.done_count < VARIANTS

        with pytest.raises(iw.Overloaded) as caught:
            submit(client, 5000)
        assert ("STATE_FOLDER_FULL", True) == (caught.value.reason, caught.value.retry_after_s > 0)
        assert ("fine",) == client.check(order("fine")).labels
        assert client.health()
        assert done.progress().done
        assert np.array_equal(next(iter(done)).table[link.OBSERVE[0]], want.table[link.OBSERVE[0]][0])
        assert [] == list((seen / "incoming").iterdir())

        ballast.unlink()
        got = batch.result(60.0)
        for key in link.OBSERVE:
            assert got.table[key].tobytes() == want.table[key].tobytes()
        assert ("", VARIANTS) == (batch.progress().held_reason, batch.progress().ok_count)
        assert [] == list(seen.glob("batches/*/*.part"))
        wait_until(lambda: "batches_go_on" in server.log_text(), 10)  # the log runs behind
        events = [line["event"] for line in server.log()]
        assert events.index("batches_held_up") < events.index("batches_go_on")
        assert "incident" not in events


def test_deleting_a_batch_makes_room_on_a_full_disk(disk):
    """One need not free anything by hand: a batch that is deleted makes room for the one that waits."""
    with serve(disk, BATCH_DISK_BYTES, "--state-dir", str(disk)) as (_, client, seen):
        old = submit(client)
        old.result()
        batch = submit(client, VARIANTS // 2)
        fill(seen)
        wait_until(lambda: batch.progress().held_reason == "STATE_FOLDER_FULL", 30)
        old.delete()
        assert VARIANTS // 2 == batch.result(60.0).ok.sum()


def test_server_stopped_on_a_full_disk_starts_there_again(tmp_path, disk):
    """What was stored before the disk was full is there after a death; the rest is computed once there is room."""
    image = tmp_path / "kept"
    with serve(disk, BATCH_DISK_BYTES, "--state-dir", str(disk)) as (server, client, seen):
        batch = submit(client)
        ballast = fill(seen)
        wait_until(lambda: batch.progress().held_reason == "STATE_FOLDER_FULL", 30)
        stored = batch.progress().ok_count
        server.process.send_signal(signal.SIGSTOP)  # the disk ends with its server; what a death leaves is copied first
        shutil.copytree(seen, image, ignore=shutil.ignore_patterns(ballast.name))
        server.process.kill()
    with RunningService("--workers", "2", "--state-dir", str(image)) as server, iw.connect(server.address) as client:
        assert stored <= client.batch(batch.id).progress().ok_count
        assert VARIANTS == client.batch(batch.id).result(60.0).ok.sum()


def test_answer_that_does_not_fit_is_refused_and_leaves_no_file(disk, order):
    """A call whose answer outgrows the spool ends as SPOOL_FULL with a time to come back; the others go on."""
    with serve(disk, SPOOL_DISK_BYTES, "--spool-dir", str(disk)) as (server, client, seen):
        for _ in range(3):
            with pytest.raises(iw.Overloaded) as caught:
                client.time_response(NETWORK, 4_000_000.0, 1.0)
            assert ("SPOOL_FULL", True) == (caught.value.reason, caught.value.retry_after_s > 0)
            assert ("fine",) == client.check(order("fine")).labels
        assert 100_001 == client.time_response(NETWORK, 100_000.0, 1.0).time_s.size

        ballast = fill(seen)
        with pytest.raises(iw.Overloaded) as caught:
            client.time_response(NETWORK, 100_000.0, 1.0)
        assert "SPOOL_FULL" == caught.value.reason
        with pytest.raises(iw.Overloaded) as caught:
            client.check(iw.WindingSet([f"w{k}" for k in range(500)], np.eye(500) + 0.25))
        assert "SPOOL_FULL" == caught.value.reason
        ballast.unlink()
        assert 100_001 == client.time_response(NETWORK, 100_000.0, 1.0).time_s.size
        wait_until(lambda: not any((next(iter(seen.glob("interwind-spool-*"))) / "calls").iterdir()), 5)
        assert not [line for line in server.log() if line["event"] == "incident"]
        assert server.process.poll() is None
