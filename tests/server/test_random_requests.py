"""Whatever is sent, the answer is numbers or a typed refusal: never INTERNAL, never unbounded memory or time."""

from __future__ import annotations

import time
from collections import Counter
from pathlib import Path

import grpc
import pytest
from hypothesis import HealthCheck, Phase, given, settings

import interwind as iw
from interwind.codec.calls import BY_ENGINE
from interwind.codec.errors import from_rpc_error

from .random_requests import GOOD, requests

CALL_LIMIT_S = 8.0
LATE_SHARE = 0.01  # searches for a periodic state that the deadline ends; nothing else may take so long
GROWTH_LIMIT_BYTES = 400 << 20
TYPED = (iw.DeadlineExceeded, iw.InvalidRequest, iw.AccuracyNotReached, iw.Overloaded, iw.ArrayEvicted, iw.OutOfRange)


def send(channel: grpc.Channel, engine: str, message) -> type[Exception] | None:
    """Send one request; return the class of its refusal, None when it was answered."""
    call = BY_ENGINE[engine]
    data = message.SerializeToString()
    try:
        if call.streaming:
            stream = channel.unary_stream(call.path, response_deserializer=call.response_class.FromString)
            call.decode_response(stream(data, timeout=CALL_LIMIT_S))
        else:
            unary = channel.unary_unary(call.path, response_deserializer=call.response_class.FromString)
            unary(data, timeout=CALL_LIMIT_S)
    except grpc.RpcError as error:
        refusal = from_rpc_error(error)
        assert isinstance(refusal, TYPED), f"{type(refusal).__name__} {refusal} for {engine}: {message}"
        if isinstance(refusal, iw.InvalidRequest):
            assert refusal.violations, f"no field named: {refusal} for {engine}: {message}"
        return type(refusal)
    return None


def family_bytes(pid: int) -> int:
    """Return the resident memory of a process and all its descendants."""
    total, waiting = 0, [pid]
    while waiting:
        folder = Path("/proc") / str(waiting.pop())
        try:
            total += int((folder / "statm").read_text().split()[1]) * 4096
            for task in (folder / "task").iterdir():
                waiting += [int(child) for child in (task / "children").read_text().split()]
        except OSError:
            continue
    return total


@pytest.fixture(scope="module")
def server():
    with iw.connect() as client:
        channel = grpc.insecure_channel(client.address, options=[("grpc.enable_http_proxy", 0)])
        yield client, channel
        channel.close()


@pytest.mark.timeout(1800)
def test_random_requests(server, request):
    """2 000 requests (20 000 with --long): each is answered or refused by type, with the field at fault."""
    client, channel = server
    for engine, message in GOOD.items():
        assert send(channel, engine, message) is None
    counts: Counter = Counter()
    before = family_bytes(client._embedded.pid)

    @settings(
        max_examples=20_000 if request.config.getoption("--long") else 2_000,
        deadline=None,
        derandomize=True,
        database=None,
        phases=[Phase.generate],
        suppress_health_check=list(HealthCheck),
    )
    @given(requests())
    def each(drawn):
        engine, message = drawn
        started = time.monotonic()
        refusal = send(channel, engine, message)
        counts[engine, refusal.__name__ if refusal else "answered"] += 1
        assert time.monotonic() - started < CALL_LIMIT_S + 1.0

    each()

    answered = sum(count for (_, outcome), count in counts.items() if outcome == "answered")
    assert answered > 0.1 * counts.total()
    late = {engine: count for (engine, outcome), count in counts.items() if outcome == "DeadlineExceeded"}
    assert set(late) <= {"periodic_response", "time_response"}
    assert sum(late.values()) <= LATE_SHARE * counts.total()
    assert client.check(iw.WindingSet(("a",), [[1.0]])).verdict is iw.Verdict.VALID
    assert family_bytes(client._embedded.pid) - before < GROWTH_LIMIT_BYTES
