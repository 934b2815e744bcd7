"""How fast answers stream, and what happens when the line breaks or one of several servers goes."""

from __future__ import annotations

import hashlib
import socket
import statistics
import sys
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

sys.path.insert(0, str(Path(__file__).parents[1] / "batch"))
import link

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

    print("share of raw loopback TCP:", [round(share, 2) for share in shares])
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

    print(f"{size / 1e6:.0f} MB streamed, the server grew by {(highest - before) / 1e6:.1f} MB")
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


def test_broken_answer_is_computed_again_to_the_same_checksum(service):
    """Cut in the middle of a 256 MB answer, the call is repeated, and the numbers are those of an unbroken one."""
    line = Cutting(service.address, 128_000_000)
    try:
        with iw.connect(line.address) as client:
            got = client.time_response(NETWORK, float(MEGABYTES_256 - 1), 1.0, timeout_s=120)
    finally:
        line.close()

    time_s = np.arange(float(MEGABYTES_256))
    assert line.cuts == 1
    assert hashlib.sha256(got.time_s).digest() == hashlib.sha256(time_s).digest()
    assert hashlib.sha256(got.samples).digest() == hashlib.sha256(np.sin(time_s)).digest()


def answered_bytes(service: RunningService, method: str) -> int:
    """Bytes the server has sent so far in answer to calls of this method."""
    return sum(line.get("bytes_out", 0) for line in service.log() if line.get("method", "").endswith(method))


def test_broken_rows_of_a_batch_go_on_behind_the_last_whole_chunk(service):
    """Cut in the middle of 32 MB of rows, the stream is resumed: every bit, and hardly anything is sent twice."""
    vary = [iw.Vary("load", "resistance_ohm", np.linspace(5.0, 30.0, 10_000))]
    analysis = iw.FrequencyAnalysis(link.FREQUENCY_HZ, link.OBSERVE)
    line = Cutting(service.address, 16_000_000)
    try:
        with iw.connect(service.address) as straight, iw.connect(line.address) as client:
            batch = straight.submit_batch(link.network(), analysis, vary)
            want = batch.result()
            wait_until(lambda: answered_bytes(service, "StreamBatchResults") > 32_000_000, 10)  # the log runs behind
            before = answered_bytes(service, "StreamBatchResults")
            got = client.batch(batch.id).result()
            wait_until(lambda: answered_bytes(service, "StreamBatchResults") > before + 32_000_000, 10)
            sent = answered_bytes(service, "StreamBatchResults") - before
    finally:
        line.close()

    assert line.cuts == 1
    for key in link.OBSERVE:
        assert got.table[key].tobytes() == want.table[key].tobytes()
    assert sent < 45_000_000  # all, the chunk that was cut, and what the line held


def test_broken_array_goes_on_where_it_broke(service):
    """Cut in the middle of an 8 MB matrix, the download is resumed at its offset, and nothing is computed again."""
    count = 1000
    chain = [iw.Resistor(f"r{k}", f"n{k}", f"n{k + 1}", resistance_ohm=float(k + 1)) for k in range(count)]
    line = Cutting(service.address, 4_000_000)
    try:
        with iw.connect(line.address) as client:
            system = client.stamp(iw.Network("n0", chain))
    finally:
        line.close()

    def stamps() -> list[str]:
        return [entry["code"] for entry in service.log() if entry.get("method", "").endswith("StampNetwork")]

    wait_until(lambda: len(stamps()) > 0, 10)  # the log runs behind
    assert line.cuts == 1
    assert ["OK"] == stamps()
    harmonic = sum(1 / k for k in range(1, count + 1))  # conductances 1, 1/2, ... along a chain; each at both its ends
    assert np.trace(system.G) == pytest.approx(2 * harmonic - 1.0, rel=1e-12)  # but the first, at the reference node


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
