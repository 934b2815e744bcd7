"""The server speaks to the supervisor that started it, and serves on a socket file as well as on a port."""

from __future__ import annotations

import os
import socket

import interwind as iw
from interwind_service.testing import RunningService


def test_supervisor_hears_ready_alive_and_stopping(tmp_path):
    """READY=1 once it serves, WATCHDOG=1 twice as often as asked, STOPPING=1 before it drains."""
    path = str(tmp_path / "notify")
    with socket.socket(socket.AF_UNIX, socket.SOCK_DGRAM) as ear:
        ear.bind(path)
        ear.settimeout(10)
        environment = {"NOTIFY_SOCKET": path, "WATCHDOG_USEC": "400000"}
        with RunningService("--workers", "1", environment=environment) as service:
            heard = [ear.recv(100).decode() for _ in range(4)]
            service.stop()
            while heard[-1] != "STOPPING=1":
                heard.append(ear.recv(100).decode())

    assert sorted(set(heard)) == ["READY=1", "STOPPING=1", "WATCHDOG=1"]
    assert heard.count("WATCHDOG=1") >= 2


def test_socket_file_serves_like_a_port(tmp_path):
    """--listen unix:PATH; the address printed is the one to connect to."""
    path = tmp_path / "socket"
    with RunningService("--workers", "1", "--listen", f"unix:{path}") as service:
        assert service.address == f"unix:{path}"
        with iw.connect(service.address) as client:
            assert client.server_info().worker_count == 1
        assert os.path.exists(path)
