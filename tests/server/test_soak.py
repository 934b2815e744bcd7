"""Hours in small: mixed calls, callers who leave, workers that are killed. Nothing grows and nothing is left."""

from __future__ import annotations

import os
import random
import signal
import threading
import time
from collections import Counter
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import numpy as np
import pytest

import interwind as iw
from interwind_service.testing import RunningService, wait_until

from .crowd import outcome

NETWORK = iw.Network("0", [iw.VoltageSource("v", "a", "0"), iw.Resistor("r", "a", "0", resistance_ohm=1.0)])
SCRIPT = Path(__file__).parent / "service_with_doubles.py"
CALLERS = 8


def resident_bytes(pid: int) -> int:
    return int(Path(f"/proc/{pid}/statm").read_text().split()[1]) * 4096


class Soak:
    """``calls`` calls in all, ``cancels`` of them given up early, ``kills`` workers killed meanwhile."""

    def __init__(self, service: RunningService, calls: int, cancels: int, kills: int) -> None:
        self._service = service
        self._calls = calls
        self._cancel_every = calls // cancels
        self._kill_every = calls // kills
        self._count = 0
        self._lock = threading.Lock()
        self.ways: Counter[str] = Counter()
        self.samples: list[tuple[int, int]] = []

    def run(self) -> None:
        with ThreadPoolExecutor(CALLERS) as threads:
            for caller in [threads.submit(self._caller, seed) for seed in range(CALLERS)]:
                caller.result()

    def _caller(self, seed: int) -> None:
        dice = random.Random(seed)
        with iw.connect(self._service.address, retries=0) as client:
            while True:
                with self._lock:
                    if self._count >= self._calls:
                        return
                    self._count += 1
                    number = self._count
                if number % self._kill_every == 0 and (workers := self._service.workers()):
                    os.kill(dice.choice(workers), signal.SIGKILL)
                if number % 100 == 0:
                    self.samples.append((number, resident_bytes(self._service.pid)))
                self.ways[self._one(client, number, dice)] += 1

    def _one(self, client: iw.Client, number: int, dice: random.Random) -> str:
        if number % self._cancel_every == 0:
            return "left: " + outcome(client, iw.WindingSet(("sleep",), [[5.0]]), 0.02)
        kind = dice.random()
        if kind < 0.6:
            return outcome(client, iw.WindingSet(("fine",), [[1.0]]))
        try:
            if kind < 0.8:
                client.server_info()
            else:
                client.time_response(NETWORK, 10.0 if kind < 0.95 else 20_000.0, 1.0)
        except iw.InterwindError as error:
            return type(error).__name__
        return "OK"


@pytest.mark.parametrize(
    ("calls", "cancels", "kills"),
    [
        pytest.param(2_000, 80, 8, id="short"),
        pytest.param(50_000, 2_000, 200, id="long", marks=[pytest.mark.long, pytest.mark.timeout(1800)]),
    ],
)
def test_nothing_grows_and_nothing_is_left(calls, cancels, kills):
    """Resident memory rises by less than 1 MB in 10 000 calls; files, descriptors and children are as before."""
    with RunningService("--workers", "2", "--queue-limit", "20", script=SCRIPT) as service:
        with iw.connect(service.address) as client:
            wait_until(lambda: client.server_info().blas_thread_count == 1, 60)
            client.time_response(NETWORK, 20_000.0, 1.0)
        Soak(service, 1_000, 40, 4).run()  # what is built once is built now
        wait_until(lambda: len(service.workers()) == 2, 5)
        time.sleep(0.5)
        before = left_behind(service)
        soak = Soak(service, calls, cancels, kills)
        soak.run()
        wait_until(lambda: len(service.workers()) == 2, 5)
        wait_until(lambda: left_behind(service) == before, 5)
        numbers, resident = np.array(soak.samples).T
        slope_bytes = np.polyfit(numbers, resident, 1)[0] * 10_000

    print(f"{dict(soak.ways)}, memory rises by {slope_bytes / 1e6:.2f} MB in 10 000 calls")
    assert set(soak.ways) <= {
        "OK",
        "WorkerLost",
        "Overloaded",
        "left: DeadlineExceeded",
        "left: WorkerLost",
        "left: Overloaded",
    }
    assert soak.ways["OK"] > 0.8 * calls
    assert soak.ways["WorkerLost"] <= 2 * kills
    if calls >= 10_000:  # fewer calls are noise of the allocator
        assert slope_bytes < 1e6
    else:
        assert resident[-1] - resident[0] < 4e6


def left_behind(service: RunningService) -> tuple[int, int, list[str]]:
    """Return the number of descriptors, of processes, and the files in the spool."""
    spool = next(Path("/dev/shm").glob(f"interwind-spool-{service.pid}-*"))
    files = sorted(str(path.relative_to(spool)) for path in spool.rglob("*") if path.is_file())
    return len(os.listdir(f"/proc/{service.pid}/fd")), len(service.descendants()), files
