"""The fingerprint of a request: SHA-256 over its decoded values, fields in order, arrays as little-endian float64."""

from __future__ import annotations

import hashlib
import struct
from collections.abc import Mapping
from dataclasses import fields, is_dataclass
from enum import Enum
from functools import cache
from typing import Any

import numpy as np

_NUMBER = b"a0:;"  # what an array without axes begins with, so that 1.0 and np.float64(1.0) agree
_DOUBLE = struct.Struct("<d")


def request_digest(call: str, arguments: Mapping[str, Any]) -> str:
    """Return 64 hexadecimal digits that equal values share, whichever way they were sent."""
    digest = hashlib.sha256()
    _add(digest, call)
    _add(digest, arguments)
    return digest.hexdigest()


def _add(digest: Any, value: Any) -> None:
    """Feed one value, each kind with a mark of its own so that neighbours cannot run into each other."""
    kind: Any = type(value)
    names = _names(kind)
    if kind is float:  # the most frequent kind first
        digest.update(_NUMBER + _DOUBLE.pack(value))
    elif names is not None:
        _add(digest, kind.__name__)
        for name in names:
            _add(digest, getattr(value, name))
    elif value is None:
        digest.update(b"n")
    elif isinstance(value, str):
        data = value.encode()
        digest.update(b"s%d:" % len(data) + data)
    elif isinstance(value, Enum):
        _add(digest, value.name)
    elif isinstance(value, bool | int | float):
        digest.update(_NUMBER + _DOUBLE.pack(value))
    elif isinstance(value, complex | np.generic | np.ndarray):
        array = np.ascontiguousarray(value, dtype="<c16" if np.iscomplexobj(value) else "<f8")
        shape = np.shape(value)
        digest.update(b"a%d:" % len(shape) + b",".join(b"%d" % length for length in shape) + b";")
        digest.update(array.tobytes())
    elif isinstance(value, Mapping):
        digest.update(b"m%d:" % len(value))
        for key, item in value.items():
            _add(digest, key)
            _add(digest, item)
    else:
        items = tuple(value)
        digest.update(b"t%d:" % len(items))
        for item in items:
            _add(digest, item)


@cache
def _names(kind: Any) -> tuple[str, ...] | None:
    """The fields of a value's class, None when it is no dataclass; asked once a class."""
    return tuple(field.name for field in fields(kind)) if is_dataclass(kind) else None
