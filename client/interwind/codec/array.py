"""Arrays: NumPy <-> Array message, little-endian, C order.

Small arrays travel inside their message. Larger ones go through an `ArrayStore` when one is in use (`stored_arrays`):
the message then names them by the hash of their bytes.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from typing import Any, Protocol

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest
from interwind.v1 import array_pb2

INLINE_LIMIT_BYTES = 256 * 1024  # ten such arrays still fit the 4 MiB that every language accepts by default

DTYPES: dict[int, np.dtype[Any]] = {
    array_pb2.DTYPE_FLOAT64: np.dtype("<f8"),
    array_pb2.DTYPE_COMPLEX128: np.dtype("<c16"),
    array_pb2.DTYPE_INT32: np.dtype("<i4"),
    array_pb2.DTYPE_INT64: np.dtype("<i8"),
}
_CODES = {dtype: code for code, dtype in DTYPES.items()}


class ArrayStore(Protocol):
    """Where large arrays are kept by the SHA-256 of their bytes."""

    def put(self, data: bytes, shape: tuple[int, ...], dtype: int) -> str:
        """Keep the bytes and return their hash."""

    def get(self, content_hash: str) -> bytes:
        """Return the bytes of that hash; `ArrayEvicted` when they are gone."""


_store: ContextVar[ArrayStore | None] = ContextVar("array_store", default=None)
_typed: ContextVar[bool] = ContextVar("typed_arrays", default=False)


@contextmanager
def stored_arrays(store: ArrayStore | None) -> Iterator[None]:
    """Use ``store`` for the large arrays of everything encoded or decoded inside."""
    token = _store.set(store)
    try:
        yield
    finally:
        _store.reset(token)


@contextmanager
def typed_arrays() -> Iterator[None]:
    """Write arrays as plain numbers instead of bytes: for JSON that people read."""
    token = _typed.set(True)
    try:
        yield
    finally:
        _typed.reset(token)


def dtype_code(array: NDArray[Any]) -> int:
    """Return the wire code of an array's numbers."""
    return _CODES[np.dtype(array.dtype).newbyteorder("<")]


def array_to_message(array: Any) -> array_pb2.Array:
    """Return the message of an array of float64, complex128, int32 or int64."""
    array = np.asarray(array)
    code = dtype_code(array)
    message = array_pb2.Array(shape=array.shape, dtype=code)  # type: ignore[arg-type]
    little = np.ascontiguousarray(array, dtype=DTYPES[code])
    if _typed.get():
        message.values.values.extend(little.reshape(-1).view("<f8" if little.dtype.kind in "fc" else little.dtype))
        return message
    store = _store.get()
    data = little.tobytes()
    if store is not None and len(data) > INLINE_LIMIT_BYTES:
        message.content_hash = store.put(data, array.shape, code)
    else:
        message.data = data
    return message


def array_from_message(message: array_pb2.Array, field: str, *, real: bool = True) -> NDArray[Any]:
    """Return the array of a message, as float64 (``real``) or as it came; `InvalidRequest` names what does not fit."""
    shape = tuple(message.shape)
    if any(length < 0 for length in shape):
        raise InvalidRequest.at(f"{field}.shape", f"{list(shape)} found; no length is negative")
    kind = message.WhichOneof("content")
    code = message.dtype
    if code == array_pb2.DTYPE_UNSPECIFIED and kind in ("values", None):
        code = array_pb2.DTYPE_FLOAT64
    if code not in DTYPES:
        raise InvalidRequest.at(f"{field}.dtype", f"{code} found; state DTYPE_FLOAT64 or DTYPE_COMPLEX128")
    dtype = DTYPES[code]
    if kind is None:
        array = np.empty(0, dtype)
    elif kind == "values":
        numbers = np.array(message.values.values, dtype="<f8")
        if dtype.kind == "c":
            if numbers.size % 2:
                raise InvalidRequest.at(f"{field}.values", f"{numbers.size} numbers found; complex ones come in pairs")
            array = numbers.view("<c16")
        else:
            if dtype.kind == "i" and not (np.abs(numbers) < 2.0 ** (8 * dtype.itemsize - 1)).all():
                raise InvalidRequest.at(f"{field}.values", f"a number found that no {dtype} holds")
            array = numbers.astype(dtype)
        if not shape:
            shape = () if array.size == 1 else (array.size,)
    else:
        data = message.data if kind == "data" else _fetch(message.content_hash, field)
        if len(data) % dtype.itemsize:
            raise InvalidRequest.at(
                f"{field}.data", f"{len(data)} bytes found; a multiple of {dtype.itemsize} is expected"
            )
        array = np.frombuffer(data, dtype)
    count = 1
    for length in shape:
        count *= length
    if array.size != count:
        raise InvalidRequest.at(
            f"{field}.shape",
            f"{list(shape)} needs {count} numbers, {array.size} found; state as many as the shape says",
        )
    if real and dtype.kind == "c":
        raise InvalidRequest.at(f"{field}.dtype", "complex numbers found; real numbers are expected here")
    array = array.reshape(shape)
    return np.asarray(array, dtype=np.float64, order="C") if real else array


def content_hash(data: bytes) -> str:
    """Return the SHA-256 of the bytes, 64 hexadecimal digits."""
    return hashlib.sha256(data).hexdigest()


def _fetch(name: str, field: str) -> bytes:
    store = _store.get()
    if store is None or len(name) != 64 or not set(name) <= set("0123456789abcdef"):
        raise InvalidRequest.at(
            f"{field}.content_hash", f"{name[:70]!r} found; 64 hexadecimal digits of an uploaded array are expected"
        )
    return store.get(name)
