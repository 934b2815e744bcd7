"""How large a call is, read from its first bytes alone."""

from __future__ import annotations

from google.protobuf.message import DecodeError

from interwind.errors import InvalidRequest
from interwind.v1 import response_pb2
from interwind_service.tolerances import MAX_SIZE_HEADER_BYTES, MAX_WINDINGS

SIZE_KEY = 0x0A  # field 1, length-delimited: how every request of a compute call begins


def size_header(request: bytes) -> bytes:
    """Return the bytes of the leading ``Size`` message, empty when the request does not begin with one."""
    if len(request) < 2 or request[0] != SIZE_KEY or request[1] > MAX_SIZE_HEADER_BYTES:
        return b""
    return request[2 : 2 + request[1]]


def read_size(header: bytes) -> response_pb2.Size:
    """Return the stated size; what is stated negative or beyond the limits is refused here, before any work."""
    try:
        size = response_pb2.Size.FromString(header)
    except DecodeError as error:
        raise InvalidRequest.at("size", "its bytes are no interwind.v1.Size") from error
    for name in (
        "winding_count",
        "unknown_count",
        "point_count",
        "observable_count",
        "variant_count",
        "coupling_count",
    ):
        value = getattr(size, name)
        if value < 0:
            raise InvalidRequest.at(f"size.{name}", f"{value} found; a count is not negative")
    if size.winding_count > MAX_WINDINGS:
        raise InvalidRequest.at(
            "size.winding_count", f"{size.winding_count} found, at most {MAX_WINDINGS} are accepted; split the set",
            reason="TOO_LARGE",
        )  # fmt: skip
    return size
