"""HTTP/2 by hand, as far as it takes to misbehave."""

from __future__ import annotations

import socket
import struct

PREFACE = b"PRI * HTTP/2.0\r\n\r\nSM\r\n\r\n"
DATA, HEADERS, RST_STREAM, SETTINGS, PING, CONTINUATION = 0, 1, 3, 4, 6, 9


def frame(kind: int, flags: int, stream: int, payload: bytes = b"") -> bytes:
    """Return one frame."""
    return struct.pack(">I", len(payload))[1:] + bytes([kind, flags]) + struct.pack(">I", stream) + payload


def header_block(headers: dict[str, str]) -> bytes:
    """Return the headers as literals without indexing, the plainest form of HPACK."""
    block = b""
    for name, value in headers.items():
        block += b"\0" + bytes([len(name)]) + name.encode() + bytes([len(value)]) + value.encode()
    return block


def call_headers(path: str) -> bytes:
    """Return the headers of one gRPC call."""
    return header_block(
        {
            ":method": "POST",
            ":scheme": "http",
            ":path": path,
            ":authority": "localhost",
            "te": "trailers",
            "content-type": "application/grpc",
        }
    )


def dial(address: str) -> socket.socket:
    """Return a connection to ``address`` (HOST:PORT)."""
    host, port = address.rsplit(":", 1)
    return socket.create_connection((host, int(port)), timeout=5)


def half_open_call(address: str, path: str) -> socket.socket:
    """Begin a call and send no more than the length of its message; it stays open until the socket is closed."""
    connection = dial(address)
    promised = struct.pack(">BI", 0, 1000)
    connection.sendall(
        PREFACE + frame(SETTINGS, 0, 0) + frame(HEADERS, 4, 1, call_headers(path)) + frame(DATA, 0, 1, promised)
    )
    return connection
