"""One call over one channel: deadline, retries, pushback, interrupt, and our errors in place of gRPC's."""

from __future__ import annotations

import random
import threading
import time
import warnings
from collections.abc import Callable, Generator
from contextlib import suppress
from typing import Any, TypeVar

import grpc

from interwind.channel import MAX_REQUEST_BYTES, RetryPolicy, Target
from interwind.codec.errors import from_rpc_error
from interwind.errors import (
    ArrayEvicted,
    Cancelled,
    DeadlineExceeded,
    InterwindError,
    InvalidRequest,
    Overloaded,
    Unavailable,
    WorkerLost,
)

T = TypeVar("T")

CLOSE_LIMIT_S = 2.0  # calls that end as they should are gone in milliseconds
HEALTH_CHECK = "/grpc.health.v1.Health/Check"  # the empty request: the server as a whole; it wants no token


class Deadline:
    """The instant by which the last byte must be here."""

    def __init__(self, timeout_s: float) -> None:
        if not timeout_s > 0:
            raise InvalidRequest.at("timeout_s", f"{timeout_s!r} found; a time above 0 is expected")
        self.timeout_s = timeout_s
        self._end_s = time.monotonic() + timeout_s

    def remaining_s(self) -> float:
        """Return the seconds left, at least 0."""
        return max(0.0, self._end_s - time.monotonic())


class Caller:
    """Sends messages to one server. Safe to share between threads."""

    def __init__(self, target: Target, policy: RetryPolicy, version: str) -> None:
        self._target = target
        self._policy = policy
        self._version = version
        self._channel = target.open()
        self._closed = threading.Event()
        self._answered = False

    @property
    def retries(self) -> int:
        """How often a pure call is sent again."""
        return self._policy.retries

    def close(self) -> None:
        """Hang up; calls that run end as `Cancelled`."""
        self._closed.set()
        # gRPC waits for its calls to end, and one that an interrupt caught at its very birth never does.
        closing = threading.Thread(target=self._channel.close, name="closing", daemon=True)
        closing.start()
        closing.join(CLOSE_LIMIT_S)

    def unary(self, path: str, request: Any, response_class: type[Any], deadline: Deadline) -> Any:
        """Send one message, return the one that answers it."""
        method = self._open(path, self._channel.unary_unary, response_class)
        with self._errors(path, deadline):
            call = method.future(_sized(request), timeout=deadline.remaining_s(), metadata=self._target.metadata)
            try:
                answer = call.result()
            except BaseException:
                call.cancel()
                raise
            self._look_at_version(call)
            return answer

    def stream(self, path: str, request: Any, response_class: type[Any], deadline: Deadline) -> Generator[Any]:
        """Send one message, yield the ones that answer it; leaving early cancels the call."""
        method = self._open(path, self._channel.unary_stream, response_class)
        with self._errors(path, deadline):
            call = method(_sized(request), timeout=deadline.remaining_s(), metadata=self._target.metadata)
            try:
                for message in call:
                    self._look_at_version(call)
                    yield message
            finally:
                call.cancel()

    def repeatedly(self, attempt: Callable[[], T], deadline: Deadline) -> T:
        """Run a pure ``attempt`` until it answers, as the retry policy says."""
        policy, failures, lost_s = self._policy, 0, None
        while True:
            try:
                return attempt()
            except Overloaded as error:
                if not policy.retries or error.retry_after_s is None or error.retry_after_s >= deadline.remaining_s():
                    raise
                pause = error.retry_after_s * (1 + policy.jitter * random.random())
            except (Unavailable, ArrayEvicted) as error:
                now = time.monotonic()
                lost_s = now if lost_s is None else lost_s
                pause = 0.0
                if not isinstance(error, WorkerLost | ArrayEvicted):
                    pause = policy.first_pause_s * policy.growth**failures
                    pause *= 1 + policy.jitter * (2 * random.random() - 1)
                failures += 1
                late = now + pause - lost_s > policy.lost_limit_s or pause >= deadline.remaining_s()
                if failures > policy.retries or late or self._closed.is_set():
                    raise
            if self._closed.wait(pause):
                raise Cancelled("this client was closed")
            if lost_s is not None:
                self._reconnect(min(lost_s + policy.lost_limit_s - time.monotonic(), deadline.remaining_s()))

    def _reconnect(self, limit_s: float) -> None:
        """Wait for a server that was there before, at most ``limit_s``; the next attempt says what came of it.

        A health check that waits for the line: gRPC's own watch of a channel runs a thread that outlives the channel.
        """
        if self._answered and limit_s > 0.0:
            with suppress(grpc.RpcError, ValueError):  # not back in time; this client was closed meanwhile
                check = self._channel.unary_unary(HEALTH_CHECK, None, None)  # bytes as they are
                check(b"", timeout=limit_s, wait_for_ready=True)

    def _open(self, path: str, kind: Callable[..., Any], response_class: type[Any]) -> Any:
        if self._closed.is_set():
            raise Cancelled("this client is closed; connect again")
        return kind(path, response_deserializer=response_class.FromString)

    def _errors(self, path: str, deadline: Deadline) -> _Translating:
        return _Translating(self._target.address, path, deadline.timeout_s, self._closed)

    def _look_at_version(self, call: Any) -> None:
        """Warn once when the server is older than this client."""
        if self._answered:
            return
        self._answered = True
        theirs = dict(call.initial_metadata() or ()).get("interwind-version")
        if theirs is not None and _numbers(str(theirs)) < _numbers(self._version):
            warnings.warn(
                f"the server at {self._target.address} is version {theirs}, older than this client ({self._version}); "
                "calls it does not know will fail",
                stacklevel=2,
            )


class _Translating:
    """Turns what gRPC raises inside into our errors."""

    def __init__(self, address: str, path: str, timeout_s: float, closed: threading.Event) -> None:
        self._address, self._path, self._timeout_s, self._closed = address, path, timeout_s, closed

    def __enter__(self) -> None:
        return None

    def __exit__(self, kind: Any, error: BaseException | None, trace: Any) -> None:
        if isinstance(error, grpc.FutureCancelledError) or (isinstance(error, ValueError) and self._closed.is_set()):
            raise Cancelled("this client was closed") from error
        if isinstance(error, grpc.RpcError):
            raise self._ours(error) from error

    def _ours(self, error: Any) -> InterwindError:
        ours = from_rpc_error(error)
        if dict(error.trailing_metadata() or ()).get("grpc-status-details-bin"):
            return ours
        name = self._path.rpartition("/")[2]
        if isinstance(ours, DeadlineExceeded):
            return DeadlineExceeded(
                f"{name} took longer than timeout_s = {self._timeout_s:g}; allow more, or ask for less"
            )
        if isinstance(ours, Unavailable):
            return Unavailable(
                f"no server answers at {self._address} ({ours.message}); is it running, is the address right?"
            )
        if error.code() is grpc.StatusCode.UNIMPLEMENTED:
            return Unavailable(
                f"the server at {self._address} does not know {name}; it is older than this client",
                reason="UNKNOWN_CALL",
            )
        if self._closed.is_set():
            return Cancelled("this client was closed")
        if isinstance(ours, Cancelled):  # nobody here withdrew: a server that stops cuts off what outlasts its grace
            return Unavailable(f"the server at {self._address} stopped before it answered {name}; ask again")
        return ours


def _sized(request: Any) -> bytes:
    data: bytes = request if isinstance(request, bytes) else request.SerializeToString()
    if len(data) > MAX_REQUEST_BYTES:
        raise InvalidRequest(
            f"the request has {len(data)} bytes, a server takes {MAX_REQUEST_BYTES}; split the network or the list",
            reason="TOO_LARGE",
        )
    return data


def _numbers(version: str) -> tuple[int, ...]:
    return tuple(int(part) for part in version.split(".") if part.isdigit())
