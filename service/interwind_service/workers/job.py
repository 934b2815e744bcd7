"""What a worker does with one call: decode, compute, encode, spool. Imported once for all workers."""

from __future__ import annotations

import time
import traceback
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from google.protobuf.message import DecodeError

from interwind.codec.array import stored_arrays
from interwind.codec.calls import CALLS, Call
from interwind.codec.errors import to_status
from interwind.codec.response import time_trailer
from interwind.codec.stream import RowStream
from interwind.errors import InterwindError, InvalidRequest, Overloaded
from interwind.v1 import response_pb2
from interwind_service import engine
from interwind_service.progress import listening
from interwind_service.rows import streaming_rows
from interwind_service.workers.arrays import ArrayFolder
from interwind_service.workers.estimate import check_size
from interwind_service.workers.spool import SpoolWriter, room_in_spool


@dataclass(frozen=True, slots=True)
class CallWork:
    """One call as the front hands it on: raw bytes, the size header it was admitted by, and where to put things."""

    method: str
    request: bytes
    size_header: bytes
    spool_path: str
    arrays: ArrayFolder


@dataclass(frozen=True, slots=True)
class Early:
    """A response message that goes out while the call still computes."""

    frame: bytes


@dataclass(frozen=True, slots=True)
class CallAnswer:
    """How a call ended: its ``frames``, or ``spooled_bytes`` of them in the file, or the ``status`` of its error."""

    frames: tuple[bytes, ...] = ()
    spooled_bytes: int = 0
    status: bytes = b""
    reason: str = ""
    trace: str = ""
    solve_s: float = 0.0


def run_call(work: CallWork, *, notify: Callable[[Any], None]) -> CallAnswer:
    """Decode, compute, encode; frames go to the spool as they are made."""
    call = CALLS[work.method]
    spool = SpoolWriter(work.spool_path, notify)
    started_s = time.monotonic()
    try:
        message = _parse(call.request_class, work.request)
        sized = "size" in message.DESCRIPTOR.fields_by_name
        if sized and type(message.size).FromString(work.size_header) != message.size:
            raise InvalidRequest.at("size", "it is not the first field, or stands twice; send one size, first")
        rows = RowStream(call.response_class, lambda part: spool.write(part.SerializeToString()))
        listener = rows if call.engine == "time_response" else None
        with (
            room_in_spool(),
            stored_arrays(work.arrays),
            listening(_teller(call, notify)),
            streaming_rows(listener),
        ):
            arguments = call.decode(message)
            if sized:
                check_size(message.size, arguments, work.method)
            result = getattr(engine, call.engine)(**arguments)
            if rows.begun:
                rows.end(result, arguments["step_s"], lambda trailer: time_trailer(result, trailer))
            else:
                for response in call.encode(result):
                    spool.write(response.SerializeToString())
    except InterwindError as error:
        return CallAnswer(status=to_status(error), reason=error.reason, solve_s=time.monotonic() - started_s)
    except MemoryError:
        error = Overloaded(
            "the call needed more memory than one worker may use; ask for fewer points, observables or windings",
            reason="WORKER_OUT_OF_MEMORY",
        )
        return CallAnswer(status=to_status(error), reason=error.reason, trace=traceback.format_exc())
    finally:
        spool.close()
    solve_s = time.monotonic() - started_s
    if spool.frames:
        return CallAnswer(frames=tuple(spool.frames), solve_s=solve_s)
    return CallAnswer(spooled_bytes=spool.size_bytes, solve_s=solve_s)


def _teller(call: Call, notify: Callable[[Any], None]) -> Callable[[int, int], None]:
    """Return what makes progress a response message, where the answer is a stream that has a part for it."""

    def tell(done: int, total: int) -> None:
        if call.streaming:
            part = call.response_class(progress=response_pb2.Progress(done_count=done, total_count=total))
            notify(Early(part.SerializeToString()))

    return tell


def _parse(message_class: Any, data: bytes) -> Any:
    try:
        return message_class.FromString(data)
    except DecodeError as error:
        raise InvalidRequest(
            f"the bytes are no {message_class.DESCRIPTOR.full_name}; regenerate the caller from the published contract",
            reason="MALFORMED_MESSAGE",
        ) from error
