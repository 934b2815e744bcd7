"""Errors <-> gRPC status with details: the same class on both sides of the wire.

Details travel in trailers, and a client drops trailers above 8 KiB, so messages, violations and metadata are cut to
fit, and the cut is told.
"""

from __future__ import annotations

from typing import Any

from google.protobuf import any_pb2, duration_pb2
from google.rpc import code_pb2, error_details_pb2, status_pb2

from interwind.codec.finding import evidence_from_message, evidence_to_message
from interwind.errors import (
    DOMAIN,
    Cancelled,
    DataLoss,
    DeadlineExceeded,
    FieldViolation,
    InternalError,
    InterwindError,
    InvalidRequest,
    NotFound,
    NotReady,
    OutOfRange,
    Overloaded,
    PermissionDenied,
    Unauthenticated,
    Unavailable,
    error_classes,
)
from interwind.v1 import finding_pb2

VIOLATION_LIMIT = 32
MESSAGE_LIMIT_CHARS = 1500
DESCRIPTION_LIMIT_CHARS = 400
DETAIL_LIMIT_BYTES = 5500  # grpc-status-details-bin is base64: a third more on the wire, still under 8 KiB

_CLASSES = {cls.__name__: cls for cls in error_classes()}
_BY_CODE: dict[str, type[InterwindError]] = {
    "INVALID_ARGUMENT": InvalidRequest,
    "OUT_OF_RANGE": OutOfRange,
    "NOT_FOUND": NotFound,
    "FAILED_PRECONDITION": NotReady,
    "RESOURCE_EXHAUSTED": Overloaded,
    "UNAVAILABLE": Unavailable,
    "DEADLINE_EXCEEDED": DeadlineExceeded,
    "CANCELLED": Cancelled,
    "UNAUTHENTICATED": Unauthenticated,
    "PERMISSION_DENIED": PermissionDenied,
    "DATA_LOSS": DataLoss,
}


def error_to_status(error: InterwindError) -> status_pb2.Status:
    """Return the ``google.rpc.Status`` of an error, cut to what a trailer may carry."""
    for violation_limit in (VIOLATION_LIMIT, 8, 2, 0):
        status = _status(error, violation_limit)
        if status.ByteSize() <= DETAIL_LIMIT_BYTES:
            return status
    return status


def _status(error: InterwindError, violation_limit: int) -> status_pb2.Status:
    metadata = {"error": type(error).__name__}
    for key, value in error.metadata.items():
        if len(metadata) < 16:
            metadata[key[:64]] = str(value)[:200]
    cut = len(error.violations) - violation_limit
    if cut > 0:
        metadata["violations_left_out"] = str(cut)
    status = status_pb2.Status(code=code_pb2.Code.Value(error.code), message=_cut(error.message, MESSAGE_LIMIT_CHARS))
    _add(status, error_details_pb2.ErrorInfo(reason=error.reason, domain=DOMAIN, metadata=metadata))
    if error.violations and violation_limit:
        bad = error_details_pb2.BadRequest()
        for violation in error.violations[:violation_limit]:
            bad.field_violations.add(
                field=_cut(violation.field, 200), description=_cut(violation.description, DESCRIPTION_LIMIT_CHARS)
            )
        _add(status, bad)
    if error.retry_after_s is not None:
        delay = duration_pb2.Duration()
        delay.FromNanoseconds(int(error.retry_after_s * 1e9))
        _add(status, error_details_pb2.RetryInfo(retry_delay=delay))
    if error.evidence is not None:
        _add(status, evidence_to_message(error.evidence))
    return status


def to_status(error: InterwindError) -> bytes:
    """Return the packed ``google.rpc.Status`` of an error: what travels in the trailer."""
    return bytes(error_to_status(error).SerializeToString())


def from_rpc_error(error: Any) -> InterwindError:
    """Return the error behind a ``grpc.RpcError``: ours when it carries our details, else the class of its code."""
    packed = dict(error.trailing_metadata() or ()).get("grpc-status-details-bin")
    if packed:
        return status_to_error(status_pb2.Status.FromString(packed))
    name = error.code().name
    return _BY_CODE.get(name, InternalError)(error.details() or name)


def status_to_error(status: status_pb2.Status) -> InterwindError:
    """Return the error of a ``google.rpc.Status``; a status without our details gets the class of its code."""
    reason: str | None = None
    metadata: dict[str, str] = {}
    violations: list[FieldViolation] = []
    retry_after_s: float | None = None
    evidence: Any = None
    for detail in status.details:
        info, bad = error_details_pb2.ErrorInfo(), error_details_pb2.BadRequest()
        retry, proof = error_details_pb2.RetryInfo(), finding_pb2.Evidence()
        if detail.Unpack(info) and info.domain == DOMAIN:
            reason, metadata = info.reason, dict(info.metadata)
        elif detail.Unpack(bad):
            violations += [FieldViolation(item.field, item.description) for item in bad.field_violations]
        elif detail.Unpack(retry):
            retry_after_s = retry.retry_delay.ToNanoseconds() / 1e9
        elif detail.Unpack(proof):
            evidence = evidence_from_message(proof)
    code = code_pb2.Code.Name(status.code) if status.code in code_pb2.Code.values() else "INTERNAL"
    cls = _CLASSES.get(metadata.pop("error", ""), _BY_CODE.get(code, InternalError))
    return cls(
        status.message,
        reason=reason,
        violations=violations,
        metadata=metadata,
        retry_after_s=retry_after_s,
        evidence=evidence,
    )


def _add(status: status_pb2.Status, detail: Any) -> None:
    packed = any_pb2.Any()
    packed.Pack(detail)
    status.details.append(packed)


def _cut(text: str, limit: int) -> str:
    return text if len(text) <= limit else text[: limit - 1] + "…"
