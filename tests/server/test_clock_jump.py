"""The wall clock jumps by a year in either direction: calls, deadlines, uploads and batches do not notice."""

from __future__ import annotations

import hashlib
import shutil
import subprocess
import sys
import time
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import numpy as np
import pytest

import interwind as iw
from interwind_service.testing import RunningService, wait_until

sys.path.insert(0, str(Path(__file__).parents[1] / "batch"))
import link

DOUBLES = Path(__file__).parent / "service_with_doubles.py"
YEAR_S = 365 * 86_400
VARIANTS = 4_000
ARRAYS_BYTES = 6 * 2**20


class Clock:
    """What the wall clock of a server is wrong by, in seconds; all of its processes and libraries see it."""

    def __init__(self, folder: Path) -> None:
        source, self._shim = Path(__file__).parent / "false_clock.c", folder / "false_clock.so"
        subprocess.run(["cc", "-shared", "-fPIC", "-O2", "-o", str(self._shim), str(source)], check=True)
        self._path = folder / "wrong_by_s"
        self.wrong_by(0)
        self._folder = folder

    def wrong_by(self, seconds: int) -> None:
        """Set it, at once."""
        with open(self._path, "r+b" if self._path.exists() else "wb", buffering=0) as file:
            file.write(seconds.to_bytes(8, sys.byteorder, signed=True))

    def serve(self) -> RunningService:
        """Start a server that reads this clock; the folder of its state is always the same."""
        environment = {"LD_PRELOAD": str(self._shim), "FALSE_CLOCK": str(self._path)}
        state, arrays = str(self._folder / "state"), str(ARRAYS_BYTES)
        arguments = ("--workers", "2", "--grace-s", "1", "--state-dir", state, "--array-store-bytes", arrays)
        return RunningService(*arguments, script=DOUBLES, environment=environment)


@pytest.fixture
def clock(tmp_path) -> Clock:
    """A wall clock that is right so far."""
    if not (sys.platform == "linux" and shutil.which("cc")):
        pytest.skip("no C compiler here, or no preloading: the wall clock of a server cannot be set for it alone")
    return Clock(tmp_path)


@pytest.fixture
def server(clock) -> Iterator[RunningService]:
    """A server that reads it."""
    with clock.serve() as running:
        yield running


def submit(client: iw.Client, name: str) -> iw.Batch:
    rng = np.random.default_rng(0)
    vary = [
        iw.VaryCoupling("T1", ("tx", "rx"), rng.uniform(0.05, 0.5, VARIANTS)),
        iw.Vary("load", "resistance_ohm", rng.uniform(5, 30, VARIANTS)),
    ]
    analysis = iw.FrequencyAnalysis(link.FREQUENCY_HZ, link.OBSERVE)
    return client.submit_batch(link.network(), analysis, vary, request_id=name)


def digest(result: iw.BatchResult) -> str:
    """A hash of every number and status."""
    whole = hashlib.sha256(repr(list(result.status)).encode())
    for key in link.OBSERVE:
        whole.update(result.table[key].tobytes())
    return whole.hexdigest()


def test_batches_run_through_jumps_and_survive_restarts_at_a_false_date(clock):
    """A year forth and two back amid a batch, then starts at false dates: the same bytes, nothing gone, in order."""
    with clock.serve() as server, iw.connect(server.address) as client:
        want = digest(submit(client, "undisturbed").result())
        clock.wrong_by(YEAR_S)
        first, second = submit(client, "first"), submit(client, "second")
        assert first.progress().create_time_s - time.time() > 0.9 * YEAR_S  # the false clock is indeed read
        jumps = 0
        while not (first.done() and second.done()):
            clock.wrong_by((-YEAR_S, 0, YEAR_S)[jumps % 3])
            jumps += 1
            time.sleep(0.02)
        assert jumps >= 3
        assert [want, want] == [digest(first.result()), digest(second.result())]
        pending = submit(client, "pending")
    for error_s in (-YEAR_S, 2 * YEAR_S):
        clock.wrong_by(error_s)
        with clock.serve() as server, iw.connect(server.address) as client:
            names = [progress.request_id for progress in client.batches()]
            assert ["pending", "second", "first", "undisturbed"] == names
            assert want == digest(client.batch(pending.id).result())
            assert pending.id == submit(client, "pending").id


@pytest.mark.parametrize("jump_s", [YEAR_S, -YEAR_S])
def test_deadlines_keep_to_their_seconds(server, clock, order, jump_s):
    """A call in time is answered, a late one ends at its deadline and frees its worker, though the date has changed."""
    with iw.connect(server.address, retries=0) as client, ThreadPoolExecutor(2) as threads:
        wait_until(lambda: client.server_info().blas_thread_count == 1, 30)
        began_s = time.monotonic()
        calls = [
            threads.submit(client.check, order("sleep", seconds), timeout_s=limit_s)
            for seconds, limit_s in ((1.0, 20.0), (20.0, 1.0))
        ]
        wait_until(lambda: client.server_info().busy_worker_count == 2, 5)
        clock.wrong_by(jump_s)
        assert calls[0].result().labels == ("sleep",)
        with pytest.raises(iw.DeadlineExceeded):
            calls[1].result()
        assert 1.0 <= time.monotonic() - began_s < 3.0
        wait_until(lambda: client.server_info().busy_worker_count == 0, 1)


def test_refused_callers_come_back_when_they_were_told_to(server, clock, order):
    """Retries wait their seconds, whatever the date: more calls than there is room for are all answered in the end."""
    with iw.connect(server.address, retries=3) as client, ThreadPoolExecutor(40) as threads:
        calls = [threads.submit(client.check, order("sleep", 0.05), timeout_s=60.0) for _ in range(40)]
        for jump_s in (YEAR_S, -YEAR_S, 0):
            clock.wrong_by(jump_s)
            time.sleep(0.2)
        assert {("sleep",)} == {call.result().labels for call in calls}


def test_arrays_in_use_are_not_taken_for_old_ones(server, clock):
    """The matrix of this moment is kept and an older one leaves, though the date says otherwise."""
    sets = [iw.WindingSet([f"w{k}" for k in range(500)], np.eye(500) * scale + 0.25) for scale in (1.0, 2.0, 3.0, 4.0)]
    with iw.connect(server.address, retries=0) as client:
        for coils, error_s in zip(sets, (YEAR_S, 0, -YEAR_S, -YEAR_S), strict=True):  # 2 MB each, 6 MiB are held
            clock.wrong_by(error_s)
            assert coils.labels == client.check(coils).labels
        sent = 3 * len(sets)  # each the question whether it is held, and two parts
        wait_until(lambda: puts(server) == sent, 10)  # the log runs behind
        for coils in sets[1:]:
            client.check(coils)
        client.check(sets[0])
        wait_until(lambda: puts(server) == sent + 3 + 3, 10)  # three questions, and the oldest sent again


def puts(server: RunningService) -> int:
    """How many parts were sent, empty ones that only ask included."""
    return sum(line.get("method", "").endswith("PutArray") for line in server.log())
