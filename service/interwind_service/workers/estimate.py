"""What a request costs in memory, and whether the size it was admitted by is its true one."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from interwind.codec.call import column_count, point_count, size_of_network
from interwind.errors import InvalidRequest
from interwind.model.network import Network
from interwind.model.windings import WindingSet
from interwind.v1 import response_pb2
from interwind_service.tolerances import (
    ESTIMATE_COPIES,
    ESTIMATE_MATRICES,
    ESTIMATE_UNKNOWN_BYTES,
    SPARSE_COUPLING,
    SPARSE_UNKNOWNS,
    UNSTATED_BYTES,
)

# Calls that solve large networks of little coupling by sparse factors (`response.sparse_nodal`).
_SPARSE_CALLS = frozenset(
    f"/interwind.v1.ResponseService/{name}"
    for name in ("ComputeFrequencyResponse", "ComputePortResponse", "ComputePortFigures")
)


def result_bytes(size: response_pb2.Size) -> int:
    """Return the bytes of the answer: complex columns over points."""
    return 16 * (size.observable_count + 1) * size.point_count


def compute_bytes(size: response_pb2.Size, request_bytes: int, method: str = "") -> int:
    """Return the bytes a worker needs: 16 m² a dense complex matrix, times those a solve holds, and the result.

    A call of ``method`` that solves a network by sparse factors needs the matrices of its sets only.
    """
    largest = max(size.winding_count, size.unknown_count)
    entries = _coupling_count(size) if method in _SPARSE_CALLS and _is_sparse(size) else largest**2
    held = ESTIMATE_MATRICES * 16 * entries + ESTIMATE_UNKNOWN_BYTES * largest
    return held + ESTIMATE_COPIES * request_bytes + result_bytes(size)


def _is_sparse(size: response_pb2.Size) -> bool:
    return size.unknown_count > SPARSE_UNKNOWNS and _coupling_count(size) < SPARSE_COUPLING * size.unknown_count


def _coupling_count(size: response_pb2.Size) -> int:
    """The entries stated, else the most that sets of this size can have."""
    return size.coupling_count or size.winding_count * size.unknown_count


def recount(arguments: Mapping[str, Any]) -> dict[str, int]:
    """Return the counts of decoded arguments, by the names of ``interwind.v1.Size``."""
    counts: dict[str, int] = {}
    for value in arguments.values():
        if isinstance(value, WindingSet):
            counts["winding_count"] = value.size
        elif isinstance(value, Network):
            counts |= size_of_network(value)
            if "observe" in arguments:
                counts["observable_count"] = column_count(value, arguments["observe"])
    if hasattr(arguments.get("frequency_hz"), "size"):
        counts["point_count"] = int(arguments["frequency_hz"].size)
    elif "step_s" in arguments:
        end_s = arguments["stop_s"] if "stop_s" in arguments else arguments["period_s"]
        counts["point_count"] = point_count(end_s, arguments["step_s"], arguments.get("recording"))
    return counts


def check_size(stated: response_pb2.Size, arguments: Mapping[str, Any], method: str = "") -> None:
    """Refuse a count stated below the true one. What is left at 0 is not stated, which only small requests may do."""
    counts = recount(arguments)
    for name, counted in counts.items():
        if 0 < getattr(stated, name) < counted:
            _refuse(name, getattr(stated, name), counted)
    true = response_pb2.Size(**counts)
    if compute_bytes(true, 0, method) > compute_bytes(stated, 0, method) + UNSTATED_BYTES:
        name = max(counts, key=lambda name: counts[name] - getattr(stated, name))
        _refuse(name, getattr(stated, name), counts[name])


def _refuse(name: str, stated: int, counted: int) -> None:
    raise InvalidRequest.at(
        f"size.{name}", f"{stated} stated, {counted} counted; state what the request holds", reason="FALSE_SIZE"
    )
