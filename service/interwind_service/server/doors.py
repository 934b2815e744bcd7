"""The doors of the server: limits of a connection, the address, and TLS with certificates that may change meanwhile."""

from __future__ import annotations

import os
import ssl
from pathlib import Path
from typing import Any

import grpc

from interwind_service.server.auth import Tokens
from interwind_service.server.settings import Settings, SettingsError
from interwind_service.tolerances import (
    HANDSHAKE_TIMEOUT_MS,
    MAX_CONCURRENT_STREAMS,
    MAX_CONNECTION_AGE_MS,
    MAX_CONNECTION_IDLE_MS,
    MAX_PING_STRIKES,
    MAX_REQUEST_BYTES,
)


def channel_options(settings: Settings) -> list[tuple[str, Any]]:
    """Return the limits of a connection. Its age never cuts a call that is allowed to last."""
    return [
        ("grpc.max_receive_message_length", MAX_REQUEST_BYTES),
        ("grpc.so_reuseport", 0),  # otherwise a second server on the same port silently takes half of the connections
        ("grpc.server_handshake_timeout_ms", HANDSHAKE_TIMEOUT_MS),
        ("grpc.max_connection_idle_ms", MAX_CONNECTION_IDLE_MS),
        ("grpc.max_connection_age_ms", MAX_CONNECTION_AGE_MS),
        ("grpc.max_connection_age_grace_ms", round(settings.max_timeout_s * 1000)),
        ("grpc.http2.max_ping_strikes", MAX_PING_STRIKES),
        ("grpc.max_concurrent_streams", MAX_CONCURRENT_STREAMS),
    ]


def open_door(server: grpc.aio.Server, settings: Settings) -> str:
    """Bind the address; return it with the port that was found."""
    if settings.tls_cert:
        reader = _Certificates(settings)
        credentials = grpc.dynamic_ssl_server_credentials(
            reader.read(), reader.fetch, require_client_authentication=bool(settings.tls_client_ca)
        )
        port = server.add_secure_port(settings.listen, credentials)
    else:
        port = server.add_insecure_port(settings.listen)
    if settings.listen.startswith("unix:"):
        return settings.listen
    return f"{settings.listen.rpartition(':')[0]}:{port}"


def check_files(settings: Settings) -> None:
    """Raise `SettingsError` when a certificate, its key, the tokens or a folder cannot be used."""
    if settings.tls_cert:
        _Certificates(settings).read()
        try:
            ssl.SSLContext(ssl.PROTOCOL_TLS_SERVER).load_cert_chain(settings.tls_cert, settings.tls_key, lambda: "")
        except OSError as error:
            raise SettingsError(f"--tls-cert, --tls-key: they are no pair that can be used: {error}") from error
    if settings.token_file:
        Tokens(settings.token_file)
    for flag, name in (("--state-dir", settings.state_dir), ("--spool-dir", settings.spool_dir)):
        path = Path(name).absolute()
        there = next(folder for folder in (path, *path.parents) if folder.exists())
        if name and not (there.is_dir() and os.access(there, os.W_OK | os.X_OK)):
            raise SettingsError(f"{flag}: {there} is no folder that can be written to")


class _Certificates:
    """Reads the certificate files again, at the next handshake, once they have changed."""

    def __init__(self, settings: Settings) -> None:
        self._paths = [Path(path) for path in (settings.tls_key, settings.tls_cert, settings.tls_client_ca) if path]
        self._seen: tuple[int, ...] = ()

    def _stamp(self) -> tuple[int, ...]:
        return tuple(path.stat().st_mtime_ns for path in self._paths)

    def read(self) -> grpc.ServerCertificateConfiguration:
        """Return what the files hold."""
        try:
            self._seen = self._stamp()
            key, chain, *client_ca = (path.read_bytes() for path in self._paths)
        except OSError as error:
            raise SettingsError(f"--tls-cert, --tls-key, --tls-client-ca: {error}") from error
        return grpc.ssl_server_certificate_configuration([(key, chain)], client_ca[0] if client_ca else None)

    def fetch(self) -> grpc.ServerCertificateConfiguration | None:
        """Return the new certificates, None while the old ones stand or the new ones cannot be read yet."""
        try:
            return None if self._stamp() == self._seen else self.read()
        except (OSError, SettingsError):
            return None
