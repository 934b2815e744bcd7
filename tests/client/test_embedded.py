"""The embedded service: there with its client, gone with its client, also when the client's process dies."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time

import pytest

import interwind as iw
from interwind_service.testing import alive, descendants_of, wait_until

COILS = iw.WindingSet(("drive", "rail"), [[1.0e-3, 0.23e-3], [0.23e-3, 60e-6]])

CRASHING = """
import os, sys, time
import interwind as iw
solver = iw.connect()
solver.server_info()
print(solver._embedded.pid, flush=True)
print(solver.address, flush=True)
time.sleep(60)
"""


@pytest.fixture
def no_address(monkeypatch):
    """Whatever the environment says, start a service of one's own."""
    monkeypatch.delenv("INTERWIND_ADDRESS", raising=False)


def test_embedded_service_answers_and_ends_with_its_client(no_address):
    """The whole life: start, answer, end; nobody left."""
    with iw.connect() as solver:
        report = solver.check(COILS)
        family = [solver._embedded.pid, *descendants_of(solver._embedded.pid)]
        folder = solver.address.removeprefix("unix:").rpartition("/")[0]
        assert oct(os.stat(folder).st_mode)[-3:] == "700"
    wait_until(lambda: not any(alive(pid) for pid in family), 2)

    assert report.verdict is iw.Verdict.VALID
    assert not os.path.exists(folder)


def test_embedded_service_ends_after_a_crash_of_its_parent(no_address):
    """Kill -9 of the user's process: 2 s later the service and its workers are gone."""
    with subprocess.Popen([sys.executable, "-c", CRASHING], stdout=subprocess.PIPE, text=True) as parent:
        server = int(parent.stdout.readline())
        folder = parent.stdout.readline().strip().removeprefix("unix:").rpartition("/")[0]
        family = [server, *descendants_of(server)]
        assert all(alive(pid) for pid in family)
        assert os.path.isdir(folder)
        parent.send_signal(signal.SIGKILL)
        parent.wait()
    wait_until(lambda: not any(alive(pid) for pid in family), 2)
    assert not os.path.exists(folder)


def test_embedded_service_ends_with_a_program_that_forgot_to_close(no_address):
    """A script that simply ends leaves nobody behind."""
    script = CRASHING.replace("time.sleep(60)", "")
    told = subprocess.run([sys.executable, "-c", script], capture_output=True, check=True)
    server = int(told.stdout.splitlines()[0])
    wait_until(lambda: not alive(server), 2)


def test_interrupt_at_the_terminal_cancels_the_call(no_address):
    """Ctrl-C reaches the user's process as KeyboardInterrupt, at once, in the middle of a call."""
    script = (
        "import signal, interwind as iw, numpy as np\n"
        "signal.signal(signal.SIGINT, signal.default_int_handler)  # a job in the background is born deaf to it\n"
        "with iw.connect() as solver:\n"
        "    solver.server_info()\n"
        "    print('ready', flush=True)\n"
        "    while True:\n"
        "        solver.check(iw.WindingSet([str(k) for k in range(100)], np.eye(100) + 0.1))\n"
    )
    with subprocess.Popen(
        [sys.executable, "-c", script], stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True
    ) as process:
        process.stdout.readline()
        time.sleep(0.5)
        start_s = time.monotonic()
        process.send_signal(signal.SIGINT)
        _, errors = process.communicate(timeout=20)

    assert errors.strip().splitlines()[-1] == "KeyboardInterrupt"
    assert time.monotonic() - start_s < 5


def test_without_the_service_installed_the_command_to_install_it_is_named(no_address, monkeypatch):
    """The thin client says what to run."""
    monkeypatch.setattr("interwind.embedded.NEEDED", ("a_package_that_is_not_there",))
    with pytest.raises(iw.Unavailable, match=r"pip install 'interwind\[service\]'"):
        iw.connect()


def test_settings_meant_for_another_server_stay_out(no_address, monkeypatch):
    """INTERWIND_TOKEN_FILE and the like belong to a server the user runs elsewhere."""
    monkeypatch.setenv("INTERWIND_TOKEN_FILE", "/nowhere")
    monkeypatch.setenv("INTERWIND_WORKERS", "1")
    with iw.connect() as solver:
        assert solver.server_info().worker_count == 1


def test_forked_copy_of_the_client_leaves_the_service_alone(no_address):
    """A child of the user's process may end; the service is its parent's."""
    script = (
        "import os, sys, interwind as iw\n"
        "solver = iw.connect()\n"
        "if os.fork() == 0:\n"
        "    sys.exit(0)\n"
        "os.wait()\n"
        "print(solver.server_info().api_version)\n"
    )
    answer = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, timeout=60)

    assert answer.stdout.strip() == "v1"
