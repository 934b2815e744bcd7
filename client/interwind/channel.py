"""How a server is reached: address, TLS, token, and the retry policy as data."""

from __future__ import annotations

import json
import os
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import grpc

from interwind.errors import InvalidRequest

DEFAULT_TIMEOUT_S = 30.0  # to the last byte; a call without a limit hangs for ever when something else does
KEEPALIVE_MS = 60_000  # how soon a connection that died without a word is noticed, while calls wait on it
MAX_REQUEST_BYTES = 4 * 2**20  # what the server takes in one message

ROUND_ROBIN = json.dumps({"loadBalancingConfig": [{"round_robin": {}}], "healthCheckConfig": {"serviceName": ""}})


@dataclass(frozen=True, slots=True)
class RetryPolicy:
    """When a pure call is sent again.

    ``Unavailable`` and ``WorkerLost``: up to ``retries`` times, after ``first_pause_s``, then ``growth`` times longer
    each, no longer than ``lost_limit_s`` after the connection was lost. ``Overloaded``: after the pause the server asks
    for, as long as the deadline allows. ``ArrayEvicted``: at once, the array being sent anew, up to ``retries`` times.
    """

    retries: int = 3
    first_pause_s: float = 0.2
    growth: float = 4.0
    jitter: float = 0.2
    lost_limit_s: float = 10.0


@dataclass(frozen=True, slots=True)
class Target:
    """An address and what it takes to be let in."""

    address: str
    token: str | None = None
    tls_ca: str | None = None
    tls_cert: str | None = None
    tls_key: str | None = None

    @classmethod
    def of(
        cls, address: str, token: str | None, tls_ca: str | None, tls_cert: str | None, tls_key: str | None
    ) -> Target:
        """Fill in what the arguments leave open from INTERWIND_TOKEN, _TOKEN_FILE, _TLS_CA, _TLS_CERT, _TLS_KEY."""
        if token is None:
            token = os.environ.get("INTERWIND_TOKEN")
            file = os.environ.get("INTERWIND_TOKEN_FILE")
            if token is None and file:
                token = _read(file, "INTERWIND_TOKEN_FILE").decode().strip()
        target = cls(
            address,
            token,
            tls_ca or os.environ.get("INTERWIND_TLS_CA"),
            tls_cert or os.environ.get("INTERWIND_TLS_CERT"),
            tls_key or os.environ.get("INTERWIND_TLS_KEY"),
        )
        if bool(target.tls_cert) != bool(target.tls_key):
            raise InvalidRequest.at("tls_cert", "certificate and key belong together; state both or neither")
        return target

    @property
    def metadata(self) -> tuple[tuple[str, str], ...]:
        """What every call carries."""
        return () if self.token is None else (("authorization", f"Bearer {self.token}"),)

    def open(self) -> grpc.Channel:
        """Open the channel. It connects at the first call, and again by itself."""
        options = self._options()
        if self.tls_ca or self.tls_cert:
            credentials = grpc.ssl_channel_credentials(
                root_certificates=_read(self.tls_ca, "tls_ca"),
                private_key=_read(self.tls_key, "tls_key"),
                certificate_chain=_read(self.tls_cert, "tls_cert"),
            )
            return grpc.secure_channel(self.name, credentials, options)
        return grpc.insecure_channel(self.name, options)

    @property
    def name(self) -> str:
        """The address as gRPC names it: a socket, one host, or several machines (by number) sharing the work."""
        if self.address.startswith("unix:"):
            return self.address
        parts = self.address.split(",")
        for part in parts:
            host, colon, port = part.rpartition(":")
            if not colon or not host or not port.isdigit():
                raise InvalidRequest.at("address", f"{part!r} found; HOST:PORT or unix:PATH is expected")
        if len(parts) == 1:
            return f"dns:///{self.address}"
        return f"ipv4:{self.address}"

    def _options(self) -> list[tuple[str, Any]]:
        options: list[tuple[str, Any]] = [
            ("grpc.keepalive_time_ms", KEEPALIVE_MS),
            ("grpc.initial_reconnect_backoff_ms", 100),
            ("grpc.max_reconnect_backoff_ms", 2_000),
            ("grpc.use_local_subchannel_pool", 1),  # a closed client leaves no connection to the next one
        ]
        if self.address.startswith("unix:"):
            return [*options, ("grpc.enable_http_proxy", 0)]
        if all(_loopback(part) for part in self.address.split(",")):
            options.append(("grpc.enable_http_proxy", 0))
        return [*options, ("grpc.service_config", ROUND_ROBIN)]


def _loopback(part: str) -> bool:
    host = part.rpartition(":")[0].strip("[]")
    return host in ("localhost", "::1") or host.startswith("127.")


def _read(path: str | None, field: str) -> bytes:
    if path is None:
        return None  # type: ignore[return-value]
    try:
        return Path(path).read_bytes()
    except OSError as error:
        raise InvalidRequest.at(field, f"{path!r} cannot be read: {error.strerror}") from error
