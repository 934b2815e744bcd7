"""A server for tests: the real one, as a process of its own."""

from __future__ import annotations

import json
import os
import selectors
import signal
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Mapping
from pathlib import Path
from types import TracebackType
from typing import Any

START_LIMIT_S = 60.0


class RunningService:
    """``interwind-service`` with ``arguments``, on any free loopback port unless they say otherwise.

    ``script`` runs a file in place of the command, one that puts test doubles in the engine and then calls ``main``.
    """

    def __init__(
        self, *arguments: str, script: str | Path | None = None, environment: Mapping[str, str] | None = None
    ) -> None:
        self._log = tempfile.TemporaryFile()
        program = ["-m", "interwind_service"] if script is None else [str(script)]
        self.process = subprocess.Popen(
            [sys.executable, *program, "--listen", "127.0.0.1:0", *arguments],
            stdin=subprocess.DEVNULL,
            stdout=subprocess.PIPE,
            stderr=self._log,
            env={**os.environ, **(environment or {})},
        )
        self.pid = self.process.pid
        line = self._first_line()
        if not line:
            self.stop(signal.SIGKILL)
            with self._log:
                told = self.log_text()
            self._log.close()
            raise RuntimeError(f"the server did not start: {told}")
        self.address: str = json.loads(line)["listening"]

    def __enter__(self) -> RunningService:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.stop()
        self._log.close()

    def stop(self, number: int = signal.SIGTERM, limit_s: float = 30.0) -> int:
        """Send the signal, wait, and return the exit status."""
        if self.process.poll() is None:
            self.process.send_signal(number)
        status = self.process.wait(limit_s)
        if self.process.stdout is not None:
            self.process.stdout.close()
        return status

    def log_text(self) -> str:
        """Return what stands on stderr so far."""
        return os.pread(self._log.fileno(), 1 << 24, 0).decode()

    def log(self) -> list[dict[str, Any]]:
        """Return the log so far; every line is one JSON object."""
        return [json.loads(line) for line in self.log_text().splitlines()]

    def descendants(self) -> list[int]:
        """Return the processes below the server."""
        return descendants_of(self.pid)

    def workers(self) -> list[int]:
        """Return the worker processes: those that stand below the forkserver."""
        every = self.descendants()
        return [pid for pid in every if _parent(pid) in every]

    def _first_line(self) -> bytes:
        if self.process.stdout is None:
            return b""
        with selectors.DefaultSelector() as selector:
            selector.register(self.process.stdout, selectors.EVENT_READ)
            return self.process.stdout.readline() if selector.select(START_LIMIT_S) else b""


def descendants_of(ancestor: int) -> list[int]:
    """Return the living processes below ``ancestor``, in order of their number."""
    parents = {int(entry.name): _parent(int(entry.name)) for entry in Path("/proc").iterdir() if entry.name.isdigit()}

    def below(pid: int) -> bool:
        while (pid := parents.get(pid, 0)) > 1:
            if pid == ancestor:
                return True
        return False

    return sorted(pid for pid in parents if below(pid))


def alive(pid: int) -> bool:
    """Say whether the process runs; one that only waits to be reaped does not."""
    try:
        return Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0] not in "ZX"
    except (FileNotFoundError, ProcessLookupError):
        return False


def wait_until(condition: Callable[[], bool], limit_s: float) -> float:
    """Wait until ``condition`` holds, at most ``limit_s``; return the seconds it took, or raise TimeoutError."""
    start_s = time.monotonic()
    while not condition():
        if time.monotonic() - start_s > limit_s:
            raise TimeoutError(f"not within {limit_s} s")
        time.sleep(0.01)
    return time.monotonic() - start_s


def _parent(pid: int) -> int:
    try:
        return int(Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[1])
    except (FileNotFoundError, ProcessLookupError):
        return 0
