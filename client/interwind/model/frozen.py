"""Arrays that stand still: every value of the model holds its numbers as read-only float64 (or complex128) arrays."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def frozen_floats(value: Any, field: str) -> FloatArray:
    """Return a read-only float64 copy of ``value``; complex numbers, text and ragged lists are refused."""
    try:
        raw = np.asarray(value)
    except ValueError as error:
        raise InvalidRequest.at(field, "rows of unequal length; every row needs the same number of entries") from error
    if np.iscomplexobj(raw):
        raise InvalidRequest.at(field, "complex numbers found; real numbers are expected here")
    if raw.dtype.kind not in "buif":
        raise InvalidRequest.at(field, f"{raw.dtype} found; numbers are expected here")
    array = np.array(raw, dtype=np.float64, order="C")
    array.setflags(write=False)
    return array


def frozen_vector(value: Any, field: str) -> FloatArray:
    """Return a read-only float64 vector, shape (n,)."""
    array = frozen_floats(value, field)
    if array.ndim != 1:
        raise InvalidRequest.at(field, f"shape {array.shape} found; a vector is expected")
    return array


def frozen_square(value: Any, field: str, size: int) -> FloatArray:
    """Return a read-only float64 matrix, shape (size, size)."""
    array = frozen_floats(value, field)
    if array.shape != (size, size):
        raise InvalidRequest.at(field, f"shape {array.shape} found; ({size}, {size}) is expected, one row a winding")
    return array


def plain_float(value: Any, field: str) -> float:
    """Return ``value`` as a float; anything that is not one real number is refused."""
    if type(value) is float:
        return value
    array = frozen_floats(value, field)
    if array.ndim != 0:
        raise InvalidRequest.at(field, f"shape {array.shape} found; one number is expected")
    return float(array)


def labels_of(value: Any, field: str) -> tuple[str, ...]:
    """Return ``value`` as a tuple of distinct, non-empty texts."""
    if isinstance(value, str):
        raise InvalidRequest.at(field, f"one text {value!r} found; a sequence of labels is expected")
    labels = tuple(value)
    for position, label in enumerate(labels):
        if not isinstance(label, str) or not label:
            raise InvalidRequest.at(f"{field}[{position}]", f"{label!r} found; a non-empty text is expected")
        if label in labels[:position]:
            raise InvalidRequest.at(f"{field}[{position}]", f"{label!r} stands twice; each label names one winding")
    return labels
