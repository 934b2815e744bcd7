"""The embedded service: the real server as a child process on a private socket, ended with its client."""

from __future__ import annotations

import importlib.util
import json
import os
import selectors
import shutil
import subprocess
import sys
import tempfile
import weakref
from pathlib import Path
from typing import IO, cast

from interwind.errors import Unavailable

START_LIMIT_S = 60.0  # a cold start on a loaded machine reads its libraries from disk
STOP_LIMIT_S = 3.0  # after that it is killed; nothing is lost, batches are kept as they stand
NEEDED = ("scipy", "grpc_health", "grpc_reflection", "threadpoolctl", "prometheus_client")


class EmbeddedServer:
    """A server of one's own. It watches its parent, so that a crash of this process ends it too."""

    def __init__(self, state_dir: str | None = None) -> None:
        missing = [name for name in NEEDED if importlib.util.find_spec(name) is None]
        if missing:
            raise Unavailable(
                f"the embedded service needs {', '.join(missing)}: run  pip install 'interwind[service]'  "
                "or state the address of a server",
                reason="SERVICE_NOT_INSTALLED",
            )
        folder = Path(tempfile.mkdtemp(prefix="interwind-"))
        self.address = f"unix:{folder / 'socket'}"
        command = [sys.executable, "-P", "-m", "interwind_service", "--listen", self.address, "--grace-s", "0"]
        command += ["--parent-pid", str(os.getpid())]
        if state_dir is not None:
            command += ["--state-dir", str(state_dir)]
        with (folder / "log").open("wb") as log:
            process = subprocess.Popen(
                command,
                stdin=subprocess.DEVNULL,
                stdout=subprocess.PIPE,
                stderr=log,
                env=_environment(),
                start_new_session=True,  # an interrupt at the terminal is for the client; it cancels its calls
            )
        self.pid = process.pid
        self.stop = weakref.finalize(self, _stop, process, folder, os.getpid())
        line = _first_line(cast(IO[bytes], process.stdout))
        if not line.startswith(b"{"):
            log_text = (folder / "log").read_text(errors="replace").strip()
            self.stop()
            raise Unavailable(f"the embedded service did not start: {_last_line(log_text)}", reason="START_FAILED")
        self.address = json.loads(line)["listening"]


def _environment() -> dict[str, str]:
    """Settings meant for a server the user runs elsewhere stay out; the number of workers may come in."""
    return {
        name: value
        for name, value in os.environ.items()
        if not name.startswith("INTERWIND_") or name == "INTERWIND_WORKERS"
    }


def _first_line(stdout: IO[bytes]) -> bytes:
    with selectors.DefaultSelector() as selector:
        selector.register(stdout, selectors.EVENT_READ)
        return stdout.readline() if selector.select(START_LIMIT_S) else b""


def _last_line(text: str) -> str:
    return text.splitlines()[-1] if text else "it said nothing"


def _stop(process: subprocess.Popen[bytes], folder: Path, owner_pid: int) -> None:
    if os.getpid() != owner_pid:  # a forked copy of the client goes; the server is not its own
        return
    process.terminate()
    try:
        process.wait(STOP_LIMIT_S)
    except subprocess.TimeoutExpired:
        process.kill()
        process.wait()
    cast(IO[bytes], process.stdout).close()
    shutil.rmtree(folder, ignore_errors=True)
