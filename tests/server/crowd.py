"""Callers in numbers: how each of them fared, and how long it took."""

from __future__ import annotations

import time
from collections.abc import Callable

import interwind as iw

CHECK = "/interwind.v1.WindingsService/CheckWindings"


def outcome(client: iw.Client, windings: iw.WindingSet, timeout_s: float = 30.0) -> str:
    """Return OK, or the name of the error a check ended with."""
    try:
        client.check(windings, timeout_s=timeout_s)
    except iw.InterwindError as error:
        return type(error).__name__
    return "OK"


def latencies_s(call: Callable[[], object], count: int) -> list[float]:
    """Return the seconds ``count`` calls took, one after the other, ascending."""
    took = []
    for _ in range(count):
        start_s = time.monotonic()
        call()
        took.append(time.monotonic() - start_s)
    return sorted(took)
