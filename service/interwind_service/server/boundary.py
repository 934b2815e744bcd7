"""The outermost edge of the server: every way a call can end becomes a gRPC status, one log line, and nothing more.

This is the only place that catches everything. What the service knows travels as its own status; what it does not know
becomes an incident number, and the trace goes to the log.
"""

from __future__ import annotations

import asyncio
import contextlib
import logging
import time
import uuid
from collections.abc import AsyncIterator, Awaitable, Callable
from dataclasses import dataclass, field
from typing import Any, Protocol

import grpc
from google.rpc import status_pb2

from interwind.codec.errors import to_status
from interwind.errors import DeadlineExceeded, InternalError, InterwindError
from interwind_service.server.logs import emit
from interwind_service.version import SERVICE_VERSION

CODES = {code.value[0]: code for code in grpc.StatusCode}
VERSION_HEADER = ("interwind-version", SERVICE_VERSION)


class PackedError(Exception):
    """An error that a worker has packed already."""

    def __init__(self, status: bytes, reason: str) -> None:
        super().__init__(reason)
        self.status = status
        self.reason = reason


@dataclass(slots=True)
class Call:
    """One call as its handler sees it."""

    method: str
    client: str
    timeout_s: float
    id: str = field(default_factory=lambda: uuid.uuid4().hex)
    log: dict[str, object] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Rpc:
    """One RPC: its full name and its handler on raw bytes, which returns its answer or (``streaming``) yields them."""

    method: str
    handler: Callable[[bytes, Call], Any]
    streaming: bool = False


class Listener(Protocol):
    """Hears of calls as they begin and end."""

    def begun(self, rpc: Rpc) -> None:
        """A call arrived."""

    def ended(self, rpc: Rpc, code: str, seconds: float, log: dict[str, object]) -> None:
        """It ended with this code after so many seconds; ``log`` holds what its handler measured."""


class Boundary:
    """Wraps handlers; ``metrics`` hears of every call."""

    def __init__(self, *, max_timeout_s: float, client_of: Callable[[Any], str], metrics: Listener) -> None:
        self._max_timeout_s = max_timeout_s
        self._client_of = client_of
        self._metrics = metrics

    def method_handler(self, rpc: Rpc) -> grpc.RpcMethodHandler:
        """Return what grpc registers: raw bytes in, raw bytes out."""
        if not rpc.streaming:

            async def one(request: bytes, context: Any) -> bytes:
                answers: list[bytes] = []
                await self._run(
                    rpc, request, context, lambda call: _collect(rpc.handler(request, call), context, answers)
                )
                return answers[0]

            return grpc.unary_unary_rpc_method_handler(one)

        async def many(request: bytes, context: Any) -> None:
            await self._run(rpc, request, context, lambda call: _write(rpc.handler(request, call), context, call))

        return grpc.unary_stream_rpc_method_handler(many)

    async def _run(self, rpc: Rpc, request: bytes, context: Any, work: Callable[[Call], Awaitable[None]]) -> None:
        remaining = context.time_remaining()
        timeout_s = self._max_timeout_s if remaining is None else min(remaining, self._max_timeout_s)
        call = Call(rpc.method, self._client_of(context), timeout_s)
        started_s = time.monotonic()
        status, reason = b"", ""
        self._metrics.begun(rpc)
        code = "CANCELLED"  # what it is when nothing below gets to say otherwise
        try:
            async with asyncio.timeout(timeout_s):
                await work(call)
            code = "OK"
        except PackedError as error:
            status, reason = error.status, error.reason
        except InterwindError as error:
            status, reason = to_status(error), error.reason
        except TimeoutError:
            late = DeadlineExceeded(
                f"the call took longer than the {timeout_s:g} s allowed; give it more time or less to do"
            )
            status, reason = to_status(late), late.reason
        except Exception as error:  # a defect: told by its number, traced in the log
            incident = uuid.uuid4().hex[:12]
            defect = InternalError(f"a defect of the service, incident {incident}; report this number to its operator")
            status, reason = to_status(defect), defect.reason
            emit("incident", level=logging.ERROR, exc_info=error, incident=incident, method=rpc.method)
        finally:
            if status:
                packed = status_pb2.Status.FromString(status)
                code = CODES[packed.code].name
            seconds = time.monotonic() - started_s
            self._metrics.ended(rpc, code, seconds, call.log)
            emit(
                "call", method=rpc.method, code=code, reason=reason, duration_s=round(seconds, 6), peer=context.peer(),
                client=call.client, id=call.id, bytes_in=len(request), **call.log,
            )  # fmt: skip
        if status:
            await refuse(context, packed, status)


async def refuse(context: Any, packed: status_pb2.Status, status: bytes) -> None:
    """End the call with the packed status, and with the pushback a stock client honours."""
    trailers = [("grpc-status-details-bin", status)]
    for detail in packed.details:
        if detail.type_url.endswith("google.rpc.RetryInfo"):
            info = _retry_info(detail.value)
            trailers.append(("grpc-retry-pushback-ms", str(max(1, round(info * 1000)))))
    if CODES[packed.code] is grpc.StatusCode.RESOURCE_EXHAUSTED and len(trailers) == 1:
        trailers.append(("grpc-retry-pushback-ms", "-1"))
    await context.abort(CODES[packed.code], packed.message, trailing_metadata=tuple(trailers))


def _retry_info(value: bytes) -> float:
    from google.rpc import error_details_pb2

    delay = error_details_pb2.RetryInfo.FromString(value).retry_delay
    return float(delay.seconds) + delay.nanos / 1e9


async def _collect(answer: Any, context: Any, answers: list[bytes]) -> None:
    if isinstance(answer, AsyncIterator):
        async with contextlib.aclosing(answer) as parts:  # type: ignore[type-var]
            async for part in parts:
                answers.append(part)
    else:
        answers.append(await answer)
    await context.send_initial_metadata((VERSION_HEADER,))


async def _write(parts: Any, context: Any, call: Call) -> None:
    sent = 0
    async with contextlib.aclosing(parts):
        async for part in parts:
            if not sent:  # not before there is an answer: a client may retry by itself until it has heard something
                await context.send_initial_metadata((VERSION_HEADER,))
            sent += len(part)
            call.log["bytes_out"] = sent
            await context.write(part)
