"""How fast a batch is, as a ratio to plain stacked LAPACK in the same minute on the same machine."""

from __future__ import annotations

import sys
import time
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest

import interwind as iw
from interwind_service import engine
from interwind_service.testing import RunningService

sys.path.insert(0, str(Path(__file__).parents[1] / "batch"))
import link

VARIANTS = 20_000
PROBED = 1_000  # variants that LAPACK is timed on: 100 000 systems
ROUNDS = 3
ANALYSIS = iw.FrequencyAnalysis(link.FREQUENCY_HZ, link.OBSERVE)


@pytest.fixture(scope="module")
def solver(tmp_path_factory) -> Iterator[tuple[iw.Client, RunningService]]:
    """A client of a server with two workers and a state folder."""
    folder = tmp_path_factory.mktemp("state")
    with RunningService("--workers", "2", "--state-dir", str(folder)) as server, iw.connect(server.address) as client:
        yield client, server


def columns(count: int):
    rng = np.random.default_rng(0)
    return [
        iw.VaryCoupling("T1", ("tx", "rx"), rng.uniform(0.05, 0.5, count)),
        iw.Vary("load", "resistance_ohm", rng.uniform(5, 30, count)),
    ]


def lapack_s(vary) -> float:
    """Seconds that stacked `numpy.linalg.solve`, one thread, takes for all systems; assembly is not counted."""
    base, varied = engine.stamp(link.network()), engine.stamp(link.network(coupling=0.5, load_ohm=20.0))
    omega = 2j * np.pi * link.FREQUENCY_HZ[:, None, None]
    drive = (base.B @ np.full((base.B.shape[1], 1), link.SOURCE_V)).astype(complex)
    spent_s = 0.0
    for start in range(0, PROBED, 100):
        k, load = (column.values[start : start + 100, None, None, None] for column in vary)
        G = base.G + (varied.G - base.G) * ((1 / load - 1 / link.LOAD_OHM) / (1 / 20.0 - 1 / link.LOAD_OHM))
        C = base.C + (varied.C - base.C) * ((k - link.COUPLING) / (0.5 - link.COUPLING))
        A = G + omega * C
        b = np.broadcast_to(drive, (*A.shape[:2], *drive.shape))
        began_s = time.perf_counter()
        np.linalg.solve(A, b)
        spent_s += time.perf_counter() - began_s
    return spent_s * VARIANTS / PROBED


def test_batch_is_three_times_faster_than_stacked_lapack(solver, record_property):
    """20 000 links at 100 frequencies, warm, submit to last byte, against the bare solves: best of three rounds."""
    client, _ = solver
    vary = columns(VARIANTS)
    client.submit_batch(link.network(), ANALYSIS, vary).result()
    ratios = []
    for _ in range(ROUNDS):
        plain_s = lapack_s(vary)
        began_s = time.perf_counter()
        batch = client.submit_batch(link.network(), ANALYSIS, vary)
        result = batch.result()
        ratios.append(plain_s / (time.perf_counter() - began_s))
        assert result.ok.all()
        batch.delete()
    record_property("ratios", ratios)
    print("stacked LAPACK over batch:", [round(ratio, 2) for ratio in ratios])
    assert max(ratios) >= 3.0


def test_submitting_many_variants_does_not_swell_the_server(solver):
    """100 000 variants in one call: the server grows by at most twice their bytes."""
    client, server = solver
    analysis = iw.FrequencyAnalysis(link.FREQUENCY_HZ[:1], link.OBSERVE[:1])
    client.submit_batch(link.network(), analysis, columns(50_000)).result()
    before = resident_bytes(server.pid)
    vary = columns(100_000)
    batch = client.submit_batch(link.network(), analysis, vary)
    grown = resident_bytes(server.pid) - before
    print("grown by", grown, "bytes")
    assert grown <= 2 * sum(column.values.nbytes for column in vary)
    assert batch.result().ok.all()


def resident_bytes(pid: int) -> int:
    """Resident memory of a process."""
    (line,) = [x for x in Path(f"/proc/{pid}/status").read_text().splitlines() if x.startswith("VmRSS")]
    return int(line.split()[1]) * 1024
