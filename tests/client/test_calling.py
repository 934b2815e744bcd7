"""What a client does when the server is slow, full, flapping, foreign or gone."""

from __future__ import annotations

import os
import socket
import subprocess
import sys
import threading
import time
from collections.abc import Iterator
from concurrent import futures

import grpc
import pytest
from google.rpc import status_pb2

import interwind as iw
from interwind.channel import Target
from interwind.codec.errors import to_status
from interwind.errors import error_classes
from interwind.v1 import server_service_pb2
from interwind_service.testing import RunningService

INFO = "/interwind.v1.ServerService/GetServerInfo"


class Scripted(grpc.GenericRpcHandler):
    """A server that answers call after call as its script says: an error, a bare code, or None for an answer."""

    def __init__(self) -> None:
        self.script: list[iw.InterwindError | grpc.StatusCode | None] = []
        self.calls_s: list[float] = []
        self.metadata: list[dict[str, str]] = []
        self.version = "999.0"

    def service(self, details):
        if details.method != INFO:
            return None
        self.metadata.append(dict(details.invocation_metadata))
        return grpc.unary_unary_rpc_method_handler(self._answer)

    def _answer(self, request: bytes, context: grpc.ServicerContext) -> bytes:
        self.calls_s.append(time.monotonic())
        context.send_initial_metadata((("interwind-version", self.version),))
        error = self.script.pop(0) if self.script else None
        if error is None:
            return server_service_pb2.GetServerInfoResponse(service_version=self.version).SerializeToString()
        if isinstance(error, grpc.StatusCode):
            context.abort(error, "")
        status = to_status(error)
        code = next(code for code in grpc.StatusCode if code.name == error.code)
        context.set_trailing_metadata((("grpc-status-details-bin", status),))
        context.abort(code, status_pb2.Status.FromString(status).message)


@pytest.fixture
def scripted() -> Iterator[Scripted]:
    handler = Scripted()
    server = grpc.server(futures.ThreadPoolExecutor(4), options=[("grpc.so_reuseport", 0)])
    server.add_generic_rpc_handlers((handler,))
    handler.address = f"127.0.0.1:{server.add_insecure_port('127.0.0.1:0')}"
    server.start()
    yield handler
    server.stop(None).wait()


@pytest.mark.parametrize("cls", error_classes(), ids=lambda cls: cls.__name__)
def test_every_error_is_raised_as_the_same_class(scripted, cls):
    """Class, code, reason, message, violations, metadata and pause survive the wire."""
    sent = cls(
        "what went wrong",
        reason="A_REASON",
        violations=[iw.FieldViolation("elements[3].resistance_ohm", "-1.0 found; above 0 is expected")],
        metadata={"eigenvalue_h": "-1.0"},
        retry_after_s=0.25,
    )
    scripted.script = [sent]
    with iw.connect(scripted.address, retries=0) as client, pytest.raises(cls) as caught:
        client.server_info()

    assert type(caught.value) is cls
    assert {**vars(caught.value)} == {**vars(sent)}
    assert len(scripted.calls_s) == 1


def test_unavailable_is_tried_again_with_growing_pauses(scripted):
    """Three retries by default; the pauses grow."""
    scripted.script = [iw.Unavailable("draining")] * 2
    with iw.connect(scripted.address) as client:
        assert client.server_info().service_version == "999.0"
    first, second = (after - before for before, after in zip(scripted.calls_s, scripted.calls_s[1:], strict=False))

    assert 0.15 < first < 0.4
    assert 0.6 < second < 1.2


def test_a_call_cut_off_by_a_stopping_server_is_tried_again(scripted):
    """Nobody here withdrew it, so it is no `Cancelled`: the next try finds a server, or there is none."""
    scripted.script = [grpc.StatusCode.CANCELLED] * 2
    with iw.connect(scripted.address) as client:
        assert client.server_info().service_version == "999.0"
    with iw.connect(scripted.address, retries=0) as client:
        scripted.script = [grpc.StatusCode.CANCELLED]
        with pytest.raises(iw.Unavailable, match="stopped before it answered GetServerInfo"):
            client.server_info()


def test_retries_have_an_end(scripted):
    """The first error is raised after the last try; with retries=0 at once."""
    scripted.script = [iw.WorkerLost("died")] * 9
    with iw.connect(scripted.address, retries=2) as client, pytest.raises(iw.WorkerLost):
        client.server_info()

    assert len(scripted.calls_s) == 3


def test_overloaded_waits_as_long_as_asked(scripted):
    """The pause the server names is kept, however often, while the deadline allows."""
    scripted.script = [iw.Overloaded("full", retry_after_s=0.2)] * 5
    with iw.connect(scripted.address) as client:
        client.server_info()
    pauses = [after - before for before, after in zip(scripted.calls_s, scripted.calls_s[1:], strict=False)]

    assert len(pauses) == 5
    assert min(pauses) >= 0.2


def test_overloaded_is_raised_when_the_deadline_does_not_allow_the_pause(scripted):
    """Nobody waits for what cannot come in time; without a pause there is nothing to wait for."""
    scripted.script = [iw.Overloaded("full", retry_after_s=5.0), iw.Overloaded("never")]
    with iw.connect(scripted.address) as client:
        for _ in range(2):
            start_s = time.monotonic()
            with pytest.raises(iw.Overloaded):
                client.server_info(timeout_s=2.0)
            assert time.monotonic() - start_s < 1.0


def test_refusals_are_never_repeated(scripted):
    """What the caller must change is told at once."""
    scripted.script = [iw.InvalidRequest("bad")] * 4
    with iw.connect(scripted.address) as client, pytest.raises(iw.InvalidRequest):
        client.server_info()

    assert len(scripted.calls_s) == 1


def test_older_server_is_named_once(scripted):
    """One warning, not one a call."""
    scripted.version = "0.0.1"
    with iw.connect(scripted.address) as client:
        with pytest.warns(UserWarning, match=r"0\.0\.1, older than this client"):
            client.server_info()
        client.server_info()  # a second warning would be an error here


def test_token_travels_as_bearer(scripted, monkeypatch):
    """The argument wins over the environment."""
    monkeypatch.setenv("INTERWIND_TOKEN", "from-environment")
    with iw.connect(scripted.address) as client:
        client.server_info()
    with iw.connect(scripted.address, token="from-argument") as client:
        client.server_info()

    assert [entry["authorization"] for entry in scripted.metadata] == [
        "Bearer from-environment",
        "Bearer from-argument",
    ]


def test_nobody_there_is_told_with_the_address():
    """Refused connections: Unavailable, quickly, naming the address."""
    with socket.socket() as free:
        free.bind(("127.0.0.1", 0))
        address = f"127.0.0.1:{free.getsockname()[1]}"
    start_s = time.monotonic()
    with iw.connect(address, retries=1) as client, pytest.raises(iw.Unavailable, match=address):
        client.server_info()

    assert time.monotonic() - start_s < 5


def test_silent_server_meets_the_deadline():
    """A port that accepts and says nothing: DeadlineExceeded (or Unavailable) within the time given, never a hang."""
    with socket.create_server(("127.0.0.1", 0)) as silent:
        address = f"127.0.0.1:{silent.getsockname()[1]}"
        start_s = time.monotonic()
        with iw.connect(address, retries=0) as client, pytest.raises((iw.DeadlineExceeded, iw.Unavailable)):
            client.server_info(timeout_s=0.5)

    assert time.monotonic() - start_s < 2


def test_closed_client_says_so(scripted):
    """A call after close is told plainly."""
    client = iw.connect(scripted.address)
    client.close()
    with pytest.raises(iw.Cancelled, match="closed"):
        client.server_info()


def test_server_that_restarts_is_found_again():
    """Kill -9 and a new server on the same port: the call waits for it."""
    with RunningService("--workers", "1") as first:
        address = first.address
        with iw.connect(address) as client:
            client.server_info()
            first.stop(9)
            with futures.ThreadPoolExecutor(1) as threads:
                call = threads.submit(client.server_info)
                with RunningService("--workers", "1", "--listen", address):
                    assert call.result(15).worker_count == 1


def test_dead_proxy_in_the_environment_does_not_matter(real_service):
    """Loopback never goes through http_proxy."""
    script = (
        "import sys, interwind as iw\n"
        "with iw.connect(sys.argv[1], retries=0) as solver:\n"
        "    print(solver.server_info().api_version)\n"
    )
    dead = {"http_proxy": "http://127.0.0.1:9", "https_proxy": "http://127.0.0.1:9", "grpc_proxy": "http://127.0.0.1:9"}
    answer = subprocess.run(
        [sys.executable, "-c", script, real_service.address], env={**os.environ, **dead}, capture_output=True, text=True
    )

    assert (answer.stdout.strip(), answer.returncode) == ("v1", 0)


@pytest.mark.parametrize("address", ["nowhere", "host:", ":1", "host:port", ""])
def test_addresses_that_are_none_are_refused(address, monkeypatch):
    """Before any network is touched."""
    monkeypatch.setenv("INTERWIND_ADDRESS", "host")
    with pytest.raises(iw.InvalidRequest, match="address"):
        Target(address).open()
    with pytest.raises(iw.InvalidRequest, match="address"):
        iw.connect()


def test_calls_from_many_threads_share_one_client(real_service):
    """A client is safe to share."""
    coils = iw.WindingSet(("a", "b"), [[1.0, 0.5], [0.5, 1.0]])
    with iw.connect(real_service.address) as client, futures.ThreadPoolExecutor(8) as threads:
        reports = list(threads.map(lambda _: client.check(coils), range(40)))

    assert {report.verdict for report in reports} == {iw.Verdict.VALID}


def test_closing_does_not_wait_for_a_call_that_an_interrupt_left_half_made(scripted, monkeypatch):
    """Its own thread never began, so the channel, which waits for every call it counts, would wait for good."""
    client = iw.connect(scripted.address)
    client.server_info()
    half_made, close = threading.Event(), client._caller._channel.close
    monkeypatch.setattr(client._caller._channel, "close", half_made.wait)
    start_s = time.monotonic()
    client.close()
    waited_s = time.monotonic() - start_s
    half_made.set()
    close()

    assert waited_s < 3.0
    with pytest.raises(iw.Cancelled):
        client.server_info()
