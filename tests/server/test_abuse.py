"""Callers who begin and do not end, or send what is no HTTP/2: the others notice nothing."""

from __future__ import annotations

import os
import random
import struct
from concurrent.futures import ThreadPoolExecutor
from contextlib import ExitStack, suppress
from pathlib import Path

import pytest

import interwind as iw
from interwind_service.testing import wait_until

from .crowd import CHECK, latencies_s, outcome
from .raw_http2 import (
    CONTINUATION,
    DATA,
    HEADERS,
    PING,
    PREFACE,
    RST_STREAM,
    SETTINGS,
    call_headers,
    dial,
    frame,
    half_open_call,
)


def descriptors(pid: int) -> int:
    return len(os.listdir(f"/proc/{pid}/fd"))


def test_half_open_calls_hold_up_nobody(service, order):
    """100 calls without their message, both workers busy: health p99 under 50 ms in the best of three rounds."""
    with ExitStack() as stack:
        client = stack.enter_context(iw.connect(service.address, retries=0))
        threads = stack.enter_context(ThreadPoolExecutor(2))
        for _ in range(100):
            stack.enter_context(half_open_call(service.address, CHECK))
        running = [threads.submit(outcome, client, order("spin", 2.0)) for _ in range(2)]
        wait_until(lambda: client.server_info().busy_worker_count == 2, 5)
        rounds = [latencies_s(client.health, 100) for _ in range(3)]
        assert [call.result() for call in running] == ["OK", "OK"]

    tails_ms = [round(1e3 * took[98], 1) for took in rounds]
    print(f"health beside 100 half-open calls: p99 {tails_ms} ms")
    assert min(tails_ms) < 50.0


def test_half_open_calls_leave_nothing_behind(service, order):
    """Their connections closed, every descriptor is given back."""
    with iw.connect(service.address) as client:
        client.server_info()
        before = descriptors(service.pid)
        open_calls = [half_open_call(service.address, CHECK) for _ in range(50)]
        wait_until(lambda: descriptors(service.pid) >= before + 50, 5)
        for call in open_calls:
            call.close()
        wait_until(lambda: descriptors(service.pid) <= before, 5)


def rapid_reset() -> bytes:
    """Return a thousand calls, each withdrawn at once."""
    calls = (
        frame(HEADERS, 4, 2 * k + 1, call_headers(CHECK)) + frame(RST_STREAM, 0, 2 * k + 1, b"\0\0\0\x08")
        for k in range(1000)
    )
    return PREFACE + frame(SETTINGS, 0, 0) + b"".join(calls)


LYING_LENGTH = frame(HEADERS, 4, 1, call_headers(CHECK)) + frame(DATA, 1, 1, struct.pack(">BI", 0, 200_000_000))
ENDLESS_HEADERS = frame(HEADERS, 0, 1, call_headers(CHECK)) + b"".join(
    frame(CONTINUATION, 0, 1, b"\0\x01x\x7f" + b"y" * 127) for _ in range(5000)
)

ABUSES = {
    "nothing": b"",
    "http 1.1": b"GET /metrics HTTP/1.1\r\nHost: localhost\r\n\r\n",
    "noise": random.Random(1).randbytes(20_000),
    "preface and noise": PREFACE + random.Random(2).randbytes(20_000),
    "a length that lies": PREFACE + frame(SETTINGS, 0, 0) + LYING_LENGTH,
    "endless headers": PREFACE + frame(SETTINGS, 0, 0) + ENDLESS_HEADERS,
    "a flood of pings": PREFACE + frame(SETTINGS, 0, 0) + frame(PING, 0, 0, b"12345678") * 5000,
    "a flood of settings": PREFACE + frame(SETTINGS, 0, 0) * 5000,
    "rapid reset": rapid_reset(),
    "a frame beyond its limit": PREFACE + frame(SETTINGS, 0, 0) + struct.pack(">I", 2**24 - 1)[1:] + b"\0\0\0\0\0\x01",
    "compressed": PREFACE
    + frame(SETTINGS, 0, 0)
    + frame(HEADERS, 4, 1, call_headers(CHECK))
    + frame(DATA, 1, 1, b"\1\0\0\0\4abcd"),
}


@pytest.mark.parametrize("abuse", ABUSES.values(), ids=ABUSES.keys())
def test_abuse_of_the_protocol_hurts_its_connection_only(service, order, abuse):
    """The abuser may be cut off; the caller beside him is served, and the server's memory stands."""
    statm = Path(f"/proc/{service.pid}/statm")
    with iw.connect(service.address, retries=0) as client:
        client.check(order("fine"))
        before = int(statm.read_text().split()[1])
        for _ in range(5):
            with dial(service.address) as connection, suppress(OSError):
                connection.sendall(abuse)
                connection.settimeout(0.05)
                while connection.recv(65536):
                    pass
        assert client.check(order("fine")).labels == ("fine",)
        assert client.health()
        grown_bytes = (int(statm.read_text().split()[1]) - before) * 4096

    assert service.process.poll() is None
    assert grown_bytes < 30e6


def test_connections_that_say_nothing_are_closed(service):
    """A handshake has a time limit."""
    with dial(service.address) as silent:
        silent.settimeout(20)
        with suppress(ConnectionError):
            while silent.recv(4096):
                pass
