"""Large arrays beside the calls that name them: up by parts before the request, down by parts after the answer."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from interwind.codec.array import content_hash
from interwind.errors import DataLoss
from interwind.v1 import array_service_pb2 as messages

PART_BYTES = 1 << 20


class ServerArrays:
    """The arrays a server holds, through one unary call (``send``) or one streamed one (``receive``).

    ``repeatedly`` runs a download until it is whole, each time from where the line broke.
    """

    def __init__(
        self,
        send: Callable[..., Any],
        receive: Callable[..., Any],
        repeatedly: Callable[[Callable[[], None]], None],
    ) -> None:
        self._send = send
        self._receive = receive
        self._repeatedly = repeatedly

    def put(self, data: bytes, shape: tuple[int, ...], dtype: int) -> str:
        """Upload the bytes unless the server holds them already; return their hash."""
        name = content_hash(data)
        answer = self._put(name, shape, dtype, 0, b"")
        while not answer.complete:
            start = answer.received_bytes
            answer = self._put(name, shape, dtype, start, data[start : start + PART_BYTES])
        return name

    def _put(self, name: str, shape: tuple[int, ...], dtype: int, offset: int, data: bytes) -> Any:
        request = messages.PutArrayRequest(
            content_hash=name,
            shape=shape,
            dtype=dtype,  # type: ignore[arg-type]
            offset_bytes=offset,
            data=data,
        )
        return self._send("/interwind.v1.ArrayService/PutArray", request, messages.PutArrayResponse)

    def get(self, content_hash_: str) -> bytes:
        """Download the bytes of that hash and prove them."""
        data = bytearray()

        def attempt() -> None:
            request = messages.GetArrayRequest(content_hash=content_hash_, offset_bytes=len(data))
            for part in self._receive("/interwind.v1.ArrayService/GetArray", request, messages.GetArrayResponse):
                data.extend(part.data)

        self._repeatedly(attempt)
        whole = bytes(data)
        if content_hash(whole) != content_hash_:
            raise DataLoss(f"{len(whole)} bytes received do not have the hash {content_hash_}; repeat the call")
        return whole
