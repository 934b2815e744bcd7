"""A worker may die, hang, or run out of memory; it takes one call with it and nothing else."""

from __future__ import annotations

import os
import signal
import time
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import pytest

import interwind as iw
from interwind.channel import Target
from interwind.client import Client
from interwind.errors import (
    Cancelled,
    DeadlineExceeded,
    InternalError,
    InvalidRequest,
    Overloaded,
    Unavailable,
    WorkerLost,
)
from interwind_service.testing import alive, wait_until

DOUBLES = Path(__file__).parent / "service_with_doubles.py"


def busy(client) -> int:
    return client.server_info().busy_worker_count


def worker_cpu_s(service) -> float:
    ticks = 0
    for pid in service.workers():
        fields = Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()
        ticks += int(fields[11]) + int(fields[12])
    return ticks / os.sysconf("SC_CLK_TCK")


def test_killed_worker_fails_its_own_call_only(service, client, order):
    """A kill -9 of one of two computing workers: one call lost, the other answered, the next served within 1 s."""
    with ThreadPoolExecutor(2) as threads:
        calls = [threads.submit(client.check, order("sleep", 1.0)) for _ in range(2)]
        wait_until(lambda: busy(client) == 2, 5)
        os.kill(service.workers()[0], signal.SIGKILL)
        wait_until(lambda: any(call.done() for call in calls), 1)
        start_s = time.monotonic()
        client.check(order("sleep", 0.0))
        served_s = time.monotonic() - start_s
        errors = [call.exception() for call in calls]

    assert served_s < 1.0
    assert [type(error) for error in sorted(errors, key=lambda error: error is None)] == [WorkerLost, type(None)]


def test_retrying_client_survives_a_killed_worker(service, order):
    """A call is pure, so the client sends it again: the user sees the answer."""
    with Client(Target(service.address)) as client, ThreadPoolExecutor(1) as threads:
        call = threads.submit(client.check, order("sleep", 1.0))
        wait_until(lambda: busy(client) == 1, 5)
        before = service.workers()
        for pid in before:  # one of them computes
            os.kill(pid, signal.SIGKILL)
        assert int(call.result(10).witness_energy_j) not in before


def test_call_that_kills_its_worker_every_time_is_given_up(service, order):
    """A poisonous call is not repeated without end."""
    with Client(Target(service.address), retries=2) as client:
        with pytest.raises(WorkerLost):
            client.check(order("die"))
        assert client.check(order("fine")).labels == ("fine",)


def test_killed_server_leaves_no_process_and_no_file(lone_service, order):
    """A kill -9 of the server while it computes: 2 s later no child and no spool is left."""
    with Client(Target(lone_service.address), retries=0) as client, ThreadPoolExecutor(1) as threads:
        call = threads.submit(client.check, order("spin", 20))
        wait_until(lambda: busy(client) == 1, 5)
        children = lone_service.descendants()
        lone_service.stop(signal.SIGKILL)
        wait_until(lambda: not any(alive(pid) for pid in children), 2)
        assert type(call.exception(2)) is Unavailable

    assert len(children) >= 3  # two workers and the forkserver
    assert list(Path("/dev/shm").glob(f"interwind-spool-{lone_service.pid}-*")) == []


def test_ended_server_leaves_nobody(lone_service):
    """SIGTERM: exit 0, and every process below it goes."""
    children = lone_service.descendants()

    assert lone_service.stop() == 0
    wait_until(lambda: not any(alive(pid) for pid in children), 2)


def test_server_info_answers_at_once_with_all_workers_busy(service, client, order):
    """Whatever the workers do, the front answers."""
    with ThreadPoolExecutor(2) as threads:
        calls = [threads.submit(client.check, order("sleep", 1.5)) for _ in range(2)]
        wait_until(lambda: busy(client) == 2, 5)
        took_s = []
        for _ in range(50):
            start_s = time.monotonic()
            info = client.server_info()
            took_s.append(time.monotonic() - start_s)
        assert [call.exception() for call in calls] == [None, None]

    assert info.busy_worker_count == 2
    assert sorted(took_s)[len(took_s) // 2] < 0.05


def test_deadline_frees_the_processor(service, client, order):
    """After the deadline nobody goes on computing."""
    with pytest.raises(DeadlineExceeded):
        client.check(order("spin", 30), timeout_s=0.3)
    time.sleep(0.5)
    before_s = worker_cpu_s(service)
    time.sleep(0.5)

    assert worker_cpu_s(service) - before_s < 0.1
    assert busy(client) == 0


def test_closing_the_client_frees_the_worker_and_the_queue(service, client, order):
    """A caller who leaves takes his running and his waiting calls with him."""
    with Client(Target(service.address), retries=0) as leaving, ThreadPoolExecutor(4) as threads:
        calls = [threads.submit(leaving.check, order("sleep", 30)) for _ in range(4)]
        wait_until(lambda: client.server_info().queued_count == 2, 5)
        leaving.close()
        assert {type(call.exception(5)) for call in calls} == {Cancelled}
    freed_s = wait_until(lambda: busy(client) == 0 and client.server_info().queued_count == 0, 0.5)
    print(f"workers and queue free {1e3 * freed_s:.0f} ms after the caller left")


def test_defect_is_told_by_its_number_only(service, client, order):
    """What an exception says stays in the log."""
    with pytest.raises(InternalError) as caught:
        client.check(order("raise"))
    incident = str(caught.value).partition("incident ")[2].partition(";")[0]
    wait_until(lambda: "incident" in service.log_text(), 2)
    told = [line for line in service.log() if line["event"] == "incident"]

    assert "secret" not in repr(vars(caught.value)) + str(caught.value)
    assert told[0]["incident"] == incident
    assert "secret from /etc/passwd" in told[0]["trace"]


def test_memory_beyond_the_limit_is_refused_and_the_worker_lives_on(client, order):
    """The kernel refuses the allocation, the worker says so, and goes on."""
    before = {int(client.check(order("fine")).witness_energy_j) for _ in range(6)}
    with pytest.raises(Overloaded) as caught:
        client.check(order("allocate", 1e12))

    assert (caught.value.reason, caught.value.retry_after_s) == ("WORKER_OUT_OF_MEMORY", None)
    assert int(client.check(order("fine")).witness_energy_j) in before


def test_ten_thousand_violations_fit_the_trailer(client, order):
    """An error is cut to what a trailer may carry, and says so."""
    with pytest.raises(InvalidRequest) as caught:
        client.check(order("violations"))

    assert type(caught.value).__name__ == "InvalidWindings"
    assert 0 < len(caught.value.violations) <= 32
    assert int(caught.value.metadata["violations_left_out"]) + len(caught.value.violations) == 10_000


def test_stopped_worker_costs_its_call_its_deadline_and_no_more(client, service, order):
    """SIGSTOP: the worker neither answers nor dies; the deadline replaces it."""
    with ThreadPoolExecutor(1) as threads:
        call = threads.submit(client.check, order("spin", 1.0), timeout_s=1.5)
        wait_until(lambda: busy(client) == 1, 5)
        stopped = service.workers()
        for pid in stopped:
            os.kill(pid, signal.SIGSTOP)
        assert type(call.exception(5)) is DeadlineExceeded
        for pid in stopped:
            os.kill(pid, signal.SIGCONT) if alive(pid) else None
    assert client.check(order("fine")).labels == ("fine",)
    wait_until(lambda: busy(client) == 0, 1)  # the answer is here before its worker is put back


def test_killed_forkserver_is_started_again(lone_service, order):
    """Whatever is killed below the server, it serves again."""
    workers = lone_service.workers()
    for pid in set(lone_service.descendants()) - set(workers):
        os.kill(pid, signal.SIGKILL)
    with iw.connect(lone_service.address) as client:
        wait_until(lambda: not any(alive(pid) for pid in workers), 5)
        assert client.check(order("fine"), timeout_s=60).labels == ("fine",)
        assert client.health()
