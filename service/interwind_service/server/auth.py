"""Who is calling: bearer tokens, kept as hashes, checked before a byte of the request is read."""

from __future__ import annotations

import hashlib
import hmac
import os
import stat
import time
from collections import Counter
from collections.abc import Awaitable, Callable
from pathlib import Path
from typing import Any

import grpc
from google.rpc import status_pb2

from interwind.codec.errors import to_status
from interwind.errors import Unauthenticated
from interwind_service.server.boundary import refuse
from interwind_service.server.logs import emit
from interwind_service.server.settings import SettingsError
from interwind_service.tolerances import TOKEN_RELOAD_INTERVAL_S

OPEN_SERVICES = ("/grpc.health.v1.Health/",)  # probes carry no token, and learn nothing but whether we serve


NO_TOKEN = Unauthenticated("no token found; send the metadata authorization: Bearer TOKEN")
UNKNOWN_TOKEN = Unauthenticated("the token is not known here; ask the operator for one", reason="UNKNOWN_TOKEN")


class Tokens:
    """The tokens of a file, one a line; read again when the file has changed."""

    def __init__(self, path: str) -> None:
        self._path = Path(path)
        self._looked_s = 0.0
        self._stamp = 0
        self._hashes: tuple[bytes, ...] = ()
        self._read()

    def knows(self, token: str) -> bool:
        """Say whether the token is in the file."""
        if time.monotonic() - self._looked_s > TOKEN_RELOAD_INTERVAL_S:
            try:
                self._read()
            except SettingsError:
                pass  # a file caught while it is being replaced: the tokens of a second ago still hold
        digest = _digest(token)
        found = False
        for known in self._hashes:  # all of them, so that the time tells nothing
            found |= hmac.compare_digest(digest, known)
        return found

    def look_again(self) -> None:
        """Read the file at the next call, however recently it was looked at."""
        self._looked_s = -TOKEN_RELOAD_INTERVAL_S

    def _read(self) -> None:
        self._looked_s = time.monotonic()
        try:
            status = self._path.stat()
            if status.st_mtime_ns == self._stamp:
                return
            if stat.S_IMODE(status.st_mode) & 0o077 and not self._handed_over():
                raise SettingsError(f"--token-file: {self._path} may be read by others; set its mode to 0600")
            lines = self._path.read_text().split()
        except (OSError, UnicodeDecodeError) as error:
            raise SettingsError(f"--token-file: {error}") from error
        if not lines:
            raise SettingsError(f"--token-file: {self._path} is empty; write one token a line")
        self._hashes, self._stamp = tuple(_digest(line) for line in lines), status.st_mtime_ns

    def _handed_over(self) -> bool:
        """Say whether the supervisor made this copy for the service alone; its mode bits then show an access list."""
        folder = os.environ.get("CREDENTIALS_DIRECTORY")
        return bool(folder) and self._path.is_relative_to(Path(folder or ""))


class TokenGate(grpc.aio.ServerInterceptor):  # type: ignore[misc]
    """Turns away whoever carries no known token; the refusal is declared to take a stream, so no body is read.

    ``refused`` counts them by reason.
    """

    def __init__(self, tokens: Tokens, refused: Counter[str]) -> None:
        self._tokens = tokens
        self._refused = refused

    async def intercept_service(
        self, continuation: Callable[[Any], Awaitable[Any]], handler_call_details: Any
    ) -> grpc.RpcMethodHandler:
        """Return the handler of the call, or the refusal."""
        if handler_call_details.method.startswith(OPEN_SERVICES):
            return await continuation(handler_call_details)
        token = bearer_token(handler_call_details.invocation_metadata)
        if token is not None and self._tokens.knows(token):
            return await continuation(handler_call_details)
        error = NO_TOKEN if token is None else UNKNOWN_TOKEN

        async def turn_away(request_iterator: Any, context: Any) -> None:
            self._refused[error.reason] += 1
            emit("call_refused", reason=error.reason, peer=context.peer())
            status = to_status(error)
            await refuse(context, status_pb2.Status.FromString(status), status)

        return grpc.stream_unary_rpc_method_handler(turn_away)


def bearer_token(metadata: Any) -> str | None:
    """Return the token of a call, None without one."""
    for key, value in metadata or ():
        if key == "authorization" and isinstance(value, str) and value[:7].lower() == "bearer ":
            return value[7:].strip()
    return None


def client_of(context: Any) -> str:
    """Return who calls: the token's short hash, else the name in the certificate, else the machine."""
    token = bearer_token(context.invocation_metadata())
    if token:
        return f"token-{_digest(token).hex()[:12]}"
    names = context.auth_context().get("x509_common_name") if context.auth_context() else None
    if names:
        return f"name-{names[0].decode(errors='replace')}"
    kind, _, rest = context.peer().partition(":")
    return kind if kind == "unix" else f"host-{rest.rpartition(':')[0]}"


def _digest(token: str) -> bytes:
    return hashlib.sha256(token.encode()).digest()
