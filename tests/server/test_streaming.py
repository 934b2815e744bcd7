"""Long answers come in parts of at most 1 MiB as they are made, and cost the server no memory."""

from __future__ import annotations

import hashlib
import time
from pathlib import Path

import grpc
import numpy as np
import pytest

import interwind as iw
from interwind.codec.calls import BY_ENGINE
from interwind.model.elements import Resistor, VoltageSource
from interwind.model.network import Network
from interwind.model.observables import NodeVoltage
from interwind.model.windings import WindingSet
from interwind_service.testing import wait_until

NETWORK = Network("0", [VoltageSource("v", "a", "0"), Resistor("r", "a", "0", resistance_ohm=1.0)])
SAMPLES = 4_200_000  # time and one column: 67.2 MB


def request(samples: int) -> bytes:
    call = BY_ENGINE["time_response"]
    return call.encode_request(network=NETWORK, stop_s=float(samples - 1), step_s=1.0).SerializeToString()


def resident_bytes(pid: int) -> int:
    return int(Path(f"/proc/{pid}/statm").read_text().split()[1]) * 4096


def test_client_without_options_reads_64_megabytes(service):
    """Any gRPC client as it comes, in any language, takes the largest answers."""
    call = BY_ENGINE["time_response"]
    digest, size, largest = hashlib.sha256(), 0, 0
    with grpc.insecure_channel(service.address) as channel:
        method = channel.unary_stream(call.path, response_deserializer=call.response_class.FromString)
        for message in method(request(SAMPLES), timeout=60):
            largest = max(largest, message.ByteSize())
            if message.WhichOneof("part") == "chunk":
                digest.update(message.chunk.data)
                size += len(message.chunk.data)

    assert size == 16 * SAMPLES
    assert largest <= 2**20 + 64
    assert (message.trailer.size_bytes, message.trailer.sha256) == (size, digest.hexdigest())


def test_numbers_arrive_as_they_were_made(client):
    """What the engine returned is what the caller gets, bit for bit."""
    response = client.time_response(NETWORK, 200_000.0, 1.0)

    assert np.array_equal(response.time_s, np.arange(200_001.0))
    assert np.array_equal(response[NodeVoltage("a")], np.sin(np.arange(200_001.0)))


def test_progress_is_told_while_the_call_computes(client):
    """Reports of the engine reach the caller's function, before the numbers."""
    told = []
    client.time_response(NETWORK, 10.0, 1.0, progress=lambda done, total: told.append((done, total)))

    assert told == [(0, 2), (2, 2)]


def test_error_of_the_progress_function_cancels_the_call(service, client):
    """The caller's own exception comes back to him, and the server is free again."""

    def stop(done: int, total: int) -> None:
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        client.time_response(NETWORK, 3e6, 1.0, progress=stop)
    wait_until(lambda: client.server_info().busy_worker_count == 0, 2)


def test_stalled_reader_costs_the_server_no_memory(service, client):
    """A reader who stops in a 67 MB answer holds neither a worker nor memory, and the file has no name."""
    call = BY_ENGINE["time_response"]
    client.time_response(NETWORK, 200_000.0, 1.0)
    before = resident_bytes(service.pid)
    with grpc.insecure_channel(service.address) as channel:
        method = channel.unary_stream(call.path, response_deserializer=call.response_class.FromString)
        stream = method(request(SAMPLES), timeout=60)
        next(stream)
        wait_until(lambda: client.server_info().busy_worker_count == 0, 20)
        time.sleep(0.3)
        grown = resident_bytes(service.pid) - before
        files = list(Path("/dev/shm").glob(f"interwind-spool-{service.pid}-*/calls/*"))
        stream.cancel()

    assert grown < 24e6  # the transport runs a few MB ahead of a reader
    assert files == []  # the file has no name by then, so nobody can leave it behind


def test_slow_readers_hold_no_place_in_the_queue(service, client):
    """Six callers who stopped reading hold neither of the two workers, nor one of the eight waiting places."""
    call = BY_ENGINE["time_response"]
    with grpc.insecure_channel(service.address) as channel:
        method = channel.unary_stream(call.path)
        streams = [method(request(1_000_000), timeout=60) for _ in range(6)]
        for stream in streams:
            next(stream)
        wait_until(lambda: client.server_info().busy_worker_count == 0, 20)
        assert client.server_info().queued_count == 0
        for stream in streams:
            stream.cancel()


def test_large_matrices_travel_by_parts_and_only_once(service, client):
    """A matrix above 256 KiB goes up through PutArray under its hash; sent again, it is known already."""
    windings = WindingSet([f"w{k}" for k in range(500)], np.eye(500) + 0.25)
    first = client.check(windings)
    client.check(windings)
    puts = [line["bytes_in"] for line in service.log() if line.get("method", "").endswith("PutArray")]

    assert first.labels == windings.labels
    assert len(puts) == 4  # the question, 1 MiB, the other 952 576 bytes, and the question again
    assert sum(puts) == pytest.approx(500 * 500 * 8, rel=1e-3)


def test_large_answers_of_unary_calls_come_by_parts(client):
    """Matrices too large for one message are fetched under their hash, and are those of the network."""
    count = 300
    chain = [iw.Resistor(f"r{k}", f"n{k}", f"n{k + 1}", resistance_ohm=float(k + 1)) for k in range(count)]
    system = client.stamp(iw.Network("n0", chain))
    expected = np.zeros((count, count))  # conductances 1/1, 1/2, ... along a chain, its first node the reference
    for k in range(count):
        expected[k, k] += 1 / (k + 1)
        if k + 1 < count:
            expected[k, k] += 1 / (k + 2)
            expected[k, k + 1] = expected[k + 1, k] = -1 / (k + 2)

    assert np.allclose(system.G, expected, rtol=1e-15, atol=0)
