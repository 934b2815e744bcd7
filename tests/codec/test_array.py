"""Arrays on the wire: golden byte vectors for each kind of number, and what is refused."""

from __future__ import annotations

import hashlib

import numpy as np
import pytest

from interwind.codec.array import array_from_message, array_to_message, stored_arrays, typed_arrays
from interwind.errors import InvalidRequest
from interwind.v1 import array_pb2

# Derived by hand from IEEE 754 and two's complement; any language can check its own decoder against them.
GOLDEN = [
    (np.array([1.0, -2.5]), array_pb2.DTYPE_FLOAT64, "000000000000f03f00000000000004c0"),
    (np.array([1.0 + 0.5j]), array_pb2.DTYPE_COMPLEX128, "000000000000f03f000000000000e03f"),
    (np.array([1, -2], np.int32), array_pb2.DTYPE_INT32, "01000000feffffff"),
    (np.array([1, -2], np.int64), array_pb2.DTYPE_INT64, "0100000000000000feffffffffffffff"),
]


@pytest.mark.parametrize(("array", "dtype", "data"), GOLDEN, ids=["float64", "complex128", "int32", "int64"])
def test_golden_bytes(array, dtype, data):
    """The bytes of each kind of number are little-endian, and read back to the same numbers."""
    message = array_to_message(array)

    assert message.data.hex() == data
    assert message.dtype == dtype
    assert list(message.shape) == list(array.shape)
    read = array_from_message(message, "x", real=False)
    assert read.dtype == array.dtype
    assert np.array_equal(read, array)


def test_golden_message():
    """A whole message, as protobuf's wire format spells it: packed shape, dtype, bytes."""
    message = array_to_message(np.array([[1.0], [-2.5]]))

    assert message.SerializeToString().hex() == "0a020201" + "1001" + "1a10" + "000000000000f03f00000000000004c0"


@pytest.mark.parametrize("order", ["C", "F"])
def test_order_and_endianness_of_the_source_do_not_matter(order):
    """Whatever lies in memory, the wire is C order and little-endian."""
    array = np.asarray(np.arange(6.0).reshape(2, 3), order=order).astype(">f8")

    message = array_to_message(array)

    assert np.array_equal(array_from_message(message, "x"), np.arange(6.0).reshape(2, 3))


@pytest.mark.parametrize("shape", [(), (0,), (3,), (2, 2), (1, 2, 3)])
def test_shapes(shape):
    """Every shape comes back, a scalar and an empty array among them."""
    array = np.random.default_rng(1).normal(size=shape)

    assert array_from_message(array_to_message(array), "x").shape == shape


def test_typed_values_need_no_shape_and_no_dtype():
    """Numbers typed by hand are float64; several are a vector, one is a scalar."""
    assert array_from_message(array_pb2.Array(values=array_pb2.DoubleList(values=[1, 2])), "x").shape == (2,)
    assert array_from_message(array_pb2.Array(values=array_pb2.DoubleList(values=[1])), "x").shape == ()


def test_typed_and_bytes_agree():
    """The two ways of sending numbers mean the same."""
    array = np.random.default_rng(2).normal(size=(3, 2))
    with typed_arrays():
        typed = array_to_message(array)

    assert typed.WhichOneof("content") == "values"
    assert np.array_equal(array_from_message(typed, "x"), array_from_message(array_to_message(array), "x"))


@pytest.mark.parametrize(
    ("message", "field"),
    [
        (array_pb2.Array(shape=[3], dtype=array_pb2.DTYPE_FLOAT64, data=b"\0" * 16), "x.shape"),
        (array_pb2.Array(shape=[2], dtype=array_pb2.DTYPE_FLOAT64, data=b"\0" * 15), "x.data"),
        (array_pb2.Array(shape=[2], data=b"\0" * 16), "x.dtype"),
        (array_pb2.Array(shape=[-1], dtype=array_pb2.DTYPE_FLOAT64), "x.shape"),
        (array_pb2.Array(shape=[1], dtype=array_pb2.DTYPE_COMPLEX128, data=b"\0" * 16), "x.dtype"),
        (array_pb2.Array(shape=[1 << 62, 1 << 62], dtype=array_pb2.DTYPE_FLOAT64, data=b"\0" * 8), "x.shape"),
        (array_pb2.Array(shape=[1], dtype=array_pb2.DTYPE_FLOAT64, content_hash="../../etc/passwd"), "x.content_hash"),
        (array_pb2.Array(shape=[1], dtype=99, data=b"\0" * 8), "x.dtype"),
    ],
    ids=["short", "ragged", "no-dtype", "negative", "complex", "overflow", "no-hash", "unknown-dtype"],
)
def test_what_does_not_fit_is_named(message, field):
    """A message whose parts contradict each other is refused, and the field is named."""
    with pytest.raises(InvalidRequest) as caught:
        array_from_message(message, "x")

    assert caught.value.violations[0].field == field


class _Store:
    def __init__(self) -> None:
        self.held: dict[str, bytes] = {}

    def put(self, data: bytes, shape: tuple[int, ...], dtype: int) -> str:
        name = hashlib.sha256(data).hexdigest()
        self.held[name] = data
        return name

    def get(self, content_hash: str) -> bytes:
        return self.held[content_hash]


def test_large_arrays_go_through_the_store():
    """Beyond the inline limit the message holds a hash, and the store holds the bytes."""
    array = np.random.default_rng(3).normal(size=(300, 300))
    store = _Store()

    with stored_arrays(store):
        message = array_to_message(array)
        read = array_from_message(message, "x")

    assert message.ByteSize() < 200
    assert np.array_equal(read, array)
