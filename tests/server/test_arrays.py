"""The store of large arrays: parts in order, content proven, a budget kept, what left sent again."""

from __future__ import annotations

import hashlib
from collections.abc import Iterator

import grpc
import numpy as np
import pytest

import interwind as iw
from interwind.calling import Deadline
from interwind.codec.errors import from_rpc_error
from interwind.v1 import array_pb2, array_service_pb2
from interwind_service.testing import RunningService

PUT = "/interwind.v1.ArrayService/PutArray"
BUDGET_BYTES = 6 * 2**20


@pytest.fixture(scope="module")
def small_store() -> Iterator[RunningService]:
    """A server that holds six MiB of arrays."""
    with RunningService("--workers", "1", "--array-store-bytes", str(BUDGET_BYTES)) as running:
        yield running


@pytest.fixture
def put(small_store):
    """Send one part; raise our error when it is refused."""
    with grpc.insecure_channel(small_store.address) as channel:
        method = channel.unary_unary(PUT, response_deserializer=array_service_pb2.PutArrayResponse.FromString)

        def send(content: bytes, offset: int, data: bytes, *, name: str | None = None, count: int | None = None):
            request = array_service_pb2.PutArrayRequest(
                content_hash=name or hashlib.sha256(content).hexdigest(),
                shape=[len(content) // 8 if count is None else count],
                dtype=array_pb2.DTYPE_FLOAT64,
                offset_bytes=offset,
                data=data,
            )
            try:
                return method(request.SerializeToString(), timeout=20)
            except grpc.RpcError as error:
                raise from_rpc_error(error) from error

        yield send


def numbers(seed: int, count: int = 1000) -> bytes:
    return np.random.default_rng(seed).random(count).tobytes()


def test_parts_come_in_order_and_may_come_twice(put):
    """A part that was there already is ignored, one beyond the end is told where to go on."""
    content = numbers(1)
    first = put(content, 0, content[:3000])
    again = put(content, 0, content[:3000])
    with pytest.raises(iw.OutOfRange) as caught:
        put(content, 5000, content[5000:])
    last = put(content, 3000, content[3000:])
    known = put(content, 0, b"")

    assert (first.received_bytes, first.complete) == (again.received_bytes, again.complete) == (3000, False)
    assert caught.value.metadata["received_bytes"] == "3000"
    assert (last.received_bytes, last.complete, known.complete) == (8000, True, True)


def test_bytes_that_have_another_hash_are_refused(put):
    """Nobody can give one array the name of another; the right bytes are taken afterwards."""
    content, other = numbers(2), numbers(3)
    with pytest.raises(iw.InvalidRequest, match="content_hash"):
        put(content, 0, other, name=hashlib.sha256(content).hexdigest())

    assert put(content, 0, content).complete


@pytest.mark.parametrize(
    ("name", "count", "field"),
    [
        ("../../etc/passwd", 1, "content_hash"),
        ("A" * 64, 1, "content_hash"),
        (None, -1, "shape"),
        (None, 10**12, "shape"),
    ],
)
def test_what_cannot_be_stored_is_named(put, name, count, field):
    """A name that is no hash, a shape that is none, an array larger than the store."""
    with pytest.raises(iw.InvalidRequest) as caught:
        put(numbers(4), 0, b"", name=name, count=count)

    assert [violation.field for violation in caught.value.violations] == [field]


def test_least_recently_used_leave_and_are_sent_again(small_store):
    """An array that left is `ArrayEvicted` to whoever names it; the client uploads it anew by itself."""
    with iw.connect(small_store.address) as client:
        sets = [iw.WindingSet([f"w{k}" for k in range(400)], np.eye(400) + 0.01 * seed) for seed in range(4)]
        reports = [client.check(windings) for windings in sets]  # 1.28 MB each, and their answers as much again
        name = hashlib.sha256(sets[0].inductance_h.tobytes()).hexdigest()
        with pytest.raises(iw.ArrayEvicted):
            client._arrays(Deadline(30.0)).get(name)
        again = client.check(sets[0])

    assert {report.verdict for report in reports} == {again.verdict} == {iw.Verdict.VALID}
    assert np.array_equal(again.feasible_low, reports[0].feasible_low, equal_nan=True)


def test_unfinished_uploads_cannot_exceed_the_budget(put):
    """The budget holds for what has arrived, whatever was announced; whoever comes too late is told when to return."""
    contents = [numbers(seed, 2**18) for seed in range(10, 16)]
    for content in contents:
        put(content, 0, content[: 2**20 - 8])
    with pytest.raises(iw.Overloaded) as caught:
        put(numbers(16, 2**18), 0, numbers(16, 2**18)[: 2**20 - 8])

    assert caught.value.reason == "ARRAYS_FULL"
    assert caught.value.retry_after_s > 0
