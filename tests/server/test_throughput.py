"""How fast answers stream, and what happens when the line breaks or one of several servers goes."""

from __future__ import annotations

import hashlib
import socket
import statistics
import threading
import time
from collections import Counter
from contextlib import ExitStack, suppress
from pathlib import Path

import grpc
import numpy as np
import pytest

import interwind as iw
from interwind.codec.calls import BY_ENGINE
from interwind_service.testing import RunningService, wait_until

NETWORK = iw.Network("0", [iw.VoltageSource("v", "a", "0"), iw.Resistor("r", "a", "0", resistance_ohm=1.0)])
MEGABYTES_256 = 16_000_000  # samples of time and one column


def stream_of(channel: grpc.Channel, samples: int):
    call = BY_ENGINE["time_response"]
    request = call.encode_request(network=NETWORK, stop_s=float(samples - 1), step_s=1.0).SerializeToString()
    return channel.unary_stream(call.path)(request, timeout=120)


def raw_tcp_bytes_per_s(size: int) -> float:
    """Push ``size`` bytes through a loopback connection, both ends in this process as with the stream's reader."""
    with socket.create_server(("127.0.0.1", 0)) as listener:

        def push() -> None:
            with socket.create_connection(listener.getsockname()) as out:
                piece = bytes(1 << 20)
                for _ in range(size >> 20):
                    out.sendall(piece)

        pusher = threading.Thread(target=push)
        pusher.start()
        start_s = time.monotonic()
        connection, _ = listener.accept()
        with connection:
            received, buffer = 0, bytearray(1 << 20)
            while count := connection.recv_into(buffer):
                received += count
        pusher.join()
    return received / (time.monotonic() - start_s)


def test_streaming_keeps_a_share_of_the_wire(service):
    """At least 15 % of raw loopback TCP in the same run, once the answer is made; median of five."""
    shares = []
    with iw.connect(service.address) as client, grpc.insecure_channel(service.address) as channel:
        for _ in range(5):
            raw = raw_tcp_bytes_per_s(256 << 20)
            stream = stream_of(channel, 4_000_000)
            next(stream)
            wait_until(lambda: client.server_info().busy_worker_count == 0, 20)
            start_s = time.monotonic()
            received = sum(len(part) for part in stream)
            shares.append(received / (time.monotonic() - start_s) / raw)

    assert statistics.median(shares) >= 0.15


@pytest.mark.parametrize("stalled", [False, True], ids=["read at once", "read after a stall"])
def test_quarter_of_a_gigabyte_with_flat_memory(service, stalled):
    """A 256 MB result passes the front without staying there, however slowly it is read."""
    statm = Path(f"/proc/{service.pid}/statm")

    def resident_bytes() -> int:
        return int(statm.read_text().split()[1]) * 4096

    with grpc.insecure_channel(service.address) as channel:
        before, highest, size = resident_bytes(), 0, 0
        for part in stream_of(channel, MEGABYTES_256):
            if stalled and size == 0:
                time.sleep(3.0)
            size += len(part)
            highest = max(highest, resident_bytes())

    assert size > 256e6
    assert highest - before < 40e6


class Cutting:
    """A line to ``address`` that is cut once, after so many bytes towards the client."""

    def __init__(self, address: str, after_bytes: int) -> None:
        host, port = address.rsplit(":", 1)
        self._target = (host, int(port))
        self._after_bytes = after_bytes
        self.cuts = 0
        self._listener = socket.create_server(("127.0.0.1", 0))
        self.address = f"127.0.0.1:{self._listener.getsockname()[1]}"
        threading.Thread(target=self._accept, daemon=True).start()

    def close(self) -> None:
        self._listener.close()

    def _accept(self) -> None:
        with suppress(OSError):
            while True:
                near, _ = self._listener.accept()
                far = socket.create_connection(self._target)
                threading.Thread(target=self._pass, args=(near, far, False), daemon=True).start()
                threading.Thread(target=self._pass, args=(far, near, True), daemon=True).start()

    def _pass(self, source: socket.socket, sink: socket.socket, answer: bool) -> None:
        passed = 0
        with suppress(OSError):
            while data := source.recv(65536):
                passed += len(data)
                if answer and not self.cuts and passed > self._after_bytes:
                    self.cuts += 1
                    break
                sink.sendall(data)
        for end in (source, sink):
            with suppress(OSError):
                end.shutdown(socket.SHUT_RDWR)
            end.close()


def test_broken_line_is_taken_up_again(service):
    """Cut in the middle of a 32 MB answer, the call is repeated, and the numbers are those of an unbroken one."""
    line = Cutting(service.address, 10_000_000)
    try:
        with iw.connect(service.address) as straight, iw.connect(line.address) as cut:
            want = straight.time_response(NETWORK, 2e6, 1.0)
            got = cut.time_response(NETWORK, 2e6, 1.0)
    finally:
        line.close()

    assert line.cuts == 1
    assert hashlib.sha256(got.samples).hexdigest() == hashlib.sha256(want.samples).hexdigest()
    assert np.array_equal(got.time_s, want.time_s)


def test_three_servers_share_the_calls_and_one_may_die(order):
    """Round robin over three addresses: a third each; one killed in the middle, no call fails."""
    with ExitStack() as stack:
        script = Path(__file__).parent / "service_with_doubles.py"
        servers = [stack.enter_context(RunningService("--workers", "1", script=script)) for _ in range(3)]
        client = stack.enter_context(iw.connect(",".join(server.address for server in servers)))
        for server in servers:
            with iw.connect(server.address) as single:
                wait_until(lambda single=single: single.server_info().blas_thread_count == 1, 60)
        wait_until(lambda: len({int(client.check(order("pid")).witness_energy_j) for _ in range(6)}) == 3, 10)

        shares = Counter(int(client.check(order("pid")).witness_energy_j) for _ in range(150))
        servers[0].process.kill()
        after = Counter(int(client.check(order("pid")).witness_energy_j) for _ in range(100))

    assert sorted(shares.values()) == [50, 50, 50]
    assert len(after) == 2
    assert min(after.values()) >= 40
