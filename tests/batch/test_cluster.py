"""Batches computed by a Dask cluster over TLS: a worker killed in the middle costs time, no row and no bit."""

from __future__ import annotations

import datetime
import json
import os
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import link
import numpy as np
import pytest
from cryptography import x509
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import ec
from cryptography.x509.oid import NameOID

import interwind as iw
from interwind.errors import InvalidRequest
from interwind_service.batch.executors import place_of
from interwind_service.testing import RunningService

ANALYSIS = iw.FrequencyAnalysis(link.FREQUENCY_HZ, link.OBSERVE)


@pytest.mark.parametrize("spec", ["dask=tcp://127.0.0.1:8786", "dask=127.0.0.1:8786", "threads"])
def test_a_place_without_tls_is_refused(spec):
    """Whoever reaches a scheduler without TLS can run code on it, so such an address is no setting."""
    with pytest.raises(InvalidRequest, match="tls://"), place_of(spec, None, 1):
        pass


def write_certificate(folder: Path) -> dict[str, str]:
    """Make a certificate of one's own authority; return Dask's settings for it as environment variables."""
    key = ec.generate_private_key(ec.SECP256R1())
    name = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, "cluster")])
    now = datetime.datetime.now(datetime.UTC)
    certificate = (
        x509.CertificateBuilder().subject_name(name).issuer_name(name).public_key(key.public_key())
        .serial_number(1).not_valid_before(now - datetime.timedelta(days=1))
        .not_valid_after(now + datetime.timedelta(days=1))
        .add_extension(x509.BasicConstraints(ca=True, path_length=None), critical=True)
        .sign(key, hashes.SHA256())
    )  # fmt: skip
    (folder / "cert.pem").write_bytes(certificate.public_bytes(serialization.Encoding.PEM))
    (folder / "key.pem").write_bytes(
        key.private_bytes(serialization.Encoding.PEM, serialization.PrivateFormat.PKCS8, serialization.NoEncryption())
    )
    prefix = "DASK_DISTRIBUTED__COMM__TLS__"
    places = {f"{prefix}CA_FILE": "cert.pem"}
    for role in ("SCHEDULER", "WORKER", "CLIENT"):
        places |= {f"{prefix}{role}__CERT": "cert.pem", f"{prefix}{role}__KEY": "key.pem"}
    single = dict.fromkeys(("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS"), "1")
    return {name: str(folder / file) for name, file in places.items()} | single


class Cluster:
    """A scheduler and two workers, each a process of its own, on loopback."""

    def __init__(self, folder: Path) -> None:
        self.environment = os.environ | write_certificate(folder)
        self._log = (folder / "log").open("wb")
        self._processes = [self._start("scheduler", "--host", "tls://127.0.0.1:0", "--no-dashboard",
                                       "--scheduler-file", str(folder / "scheduler.json"))]  # fmt: skip
        end_s = time.monotonic() + 60.0
        while not (folder / "scheduler.json").exists():
            assert time.monotonic() < end_s, (folder / "log").read_text()
            time.sleep(0.05)
        self.address = json.loads((folder / "scheduler.json").read_text())["address"]
        self.workers = [self._worker() for _ in range(2)]

    def _worker(self) -> subprocess.Popen:
        process = self._start("worker", self.address, "--nthreads", "1", "--no-nanny", "--no-dashboard",
                              "--host", "127.0.0.1")  # fmt: skip
        self._processes.append(process)
        return process

    def _start(self, program: str, *arguments: str) -> subprocess.Popen:
        command = [sys.executable, "-m", "distributed.cli.dask_" + program, *arguments]
        return subprocess.Popen(command, env=self.environment, stdout=self._log, stderr=self._log)

    def close(self) -> None:
        for process in self._processes[::-1]:
            process.kill()
            process.wait()
        self._log.close()


@pytest.fixture
def cluster(tmp_path) -> Iterator[Cluster]:
    """A cluster for one test."""
    pytest.importorskip("distributed", reason="needs the extra cluster")
    folder = tmp_path / "cluster"
    folder.mkdir()
    running = Cluster(folder)
    yield running
    running.close()


def test_a_killed_worker_of_the_cluster_changes_nothing(tmp_path, cluster):
    """Half of the cluster dies in the middle of a batch: the rows are those of the own workers, bit for bit."""
    rng = np.random.default_rng(0)
    vary = [
        iw.VaryCoupling("T1", ("tx", "rx"), rng.uniform(0.05, 0.5, 6000)),
        iw.Vary("load", "resistance_ohm", rng.uniform(5, 30, 6000)),
    ]
    results = []
    for name, arguments in (("own", []), ("cluster", ["--executor", f"dask={cluster.address}"])):
        with (
            RunningService(
                "--workers", "2", "--state-dir", str(tmp_path / name), *arguments, environment=cluster.environment
            ) as server,
            iw.connect(server.address) as client,
        ):
            batch = client.submit_batch(link.network(), ANALYSIS, vary)
            if arguments:
                for progress in batch.watch(timeout_s=120.0):
                    if progress.done_count:
                        cluster.workers[0].send_signal(signal.SIGKILL)
                        break
            results.append(batch.result(timeout_s=120.0))
    own, elsewhere = results
    assert own.ok.all()
    for key in link.OBSERVE:
        assert own.table[key].tobytes() == elsewhere.table[key].tobytes()


def test_no_scheduler_is_said(tmp_path, cluster):
    """A server that cannot reach its scheduler does not start, and names the address."""
    address = cluster.address
    cluster.close()
    arguments = ("--executor", f"dask={address}", "--state-dir", str(tmp_path / "x"))
    with pytest.raises(RuntimeError, match="scheduler"):
        RunningService(*arguments, environment=cluster.environment)
