"""The one error tree, the same class on both sides of the wire.

::

    InterwindError
    ├── InvalidRequest          the request cannot be understood or is out of its domain
    │   ├── InvalidWindings     these windings cannot exist
    │   └── InvalidNetwork      this network has no solution
    ├── OutOfRange              an index or token past the end
    ├── NotFound                no such batch or array
    ├── NotReady                ask again when the state has changed
    ├── Overloaded              the queue or the memory budget is full; retry after retry_after_s
    ├── Unavailable             no server there, or it is draining
    │   └── WorkerLost          the worker that computed this call died
    ├── DeadlineExceeded        the time allowed for the call ran out
    ├── Cancelled               the caller withdrew
    ├── Unauthenticated         no token, or an unknown one
    ├── PermissionDenied        known, but not allowed
    ├── AccuracyNotReached      the numbers missed their tolerance and are not returned
    ├── ArrayEvicted            an uploaded array is gone; upload it again
    ├── JobFailed               a batch item failed for good
    ├── DataLoss                a stored result fails its checksum
    └── InternalError           a defect of the service, told by an incident number only

Each class carries its ``code`` (the name of a gRPC status, as text, so that this module imports nothing) and its
``reason`` (UPPER_SNAKE, stable). An instance may narrow the reason.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from typing import Any, ClassVar

DOMAIN = "interwind.v1"


@dataclass(frozen=True, slots=True)
class FieldViolation:
    """One field at fault: its path, such as ``elements[3].resistance_ohm``, and what is wrong with it."""

    field: str
    description: str


class InterwindError(Exception):
    """Root of the tree. The message names the field, the value found, the limit and the next move."""

    code: ClassVar[str] = "INTERNAL"
    default_reason: ClassVar[str] = "INTERNAL"

    def __init__(
        self,
        message: str,
        *,
        reason: str | None = None,
        violations: Sequence[FieldViolation] = (),
        metadata: Mapping[str, str] | None = None,
        retry_after_s: float | None = None,
        evidence: Any = None,
    ) -> None:
        super().__init__(message)
        self.message = message
        self.reason = reason or self.default_reason
        self.violations = tuple(violations)
        self.metadata = dict(metadata or {})
        self.retry_after_s = retry_after_s
        self.evidence = evidence

    def __str__(self) -> str:
        return self.message


class InvalidRequest(InterwindError):
    """The request cannot be understood, or a value is outside its domain."""

    code = "INVALID_ARGUMENT"
    default_reason = "INVALID_REQUEST"

    @classmethod
    def at(cls, field: str, description: str, *, reason: str | None = None, **metadata: object) -> InvalidRequest:
        """Build the error for one field; the message is ``field: description``."""
        return cls(
            f"{field}: {description}",
            reason=reason,
            violations=(FieldViolation(field, description),),
            metadata={key: str(value) for key, value in metadata.items()},
        )


class InvalidWindings(InvalidRequest):
    """Windings that cannot exist."""

    default_reason = "INVALID_WINDINGS"


class InvalidNetwork(InvalidRequest):
    """A network without a solution, or without a unique one."""

    default_reason = "INVALID_NETWORK"


class OutOfRange(InterwindError):
    """An index, an offset or a page token past the end."""

    code = "OUT_OF_RANGE"
    default_reason = "OUT_OF_RANGE"


class NotFound(InterwindError):
    """No batch or array of that name."""

    code = "NOT_FOUND"
    default_reason = "NOT_FOUND"


class NotReady(InterwindError):
    """The state does not allow this yet; ask again when it has changed."""

    code = "FAILED_PRECONDITION"
    default_reason = "NOT_READY"


class Overloaded(InterwindError):
    """The queue, a quota or the memory budget is full; try again after ``retry_after_s``."""

    code = "RESOURCE_EXHAUSTED"
    default_reason = "OVERLOADED"


class Unavailable(InterwindError):
    """No server answers, or it is starting up or draining."""

    code = "UNAVAILABLE"
    default_reason = "UNAVAILABLE"


class WorkerLost(Unavailable):
    """The worker process that computed this call died; nothing of it was kept."""

    default_reason = "WORKER_LOST"


class DeadlineExceeded(InterwindError):
    """The time allowed for the call ran out."""

    code = "DEADLINE_EXCEEDED"
    default_reason = "DEADLINE_EXCEEDED"


class Cancelled(InterwindError):
    """The caller withdrew the call."""

    code = "CANCELLED"
    default_reason = "CANCELLED"


class Unauthenticated(InterwindError):
    """No token was sent, or an unknown one."""

    code = "UNAUTHENTICATED"
    default_reason = "UNAUTHENTICATED"


class PermissionDenied(InterwindError):
    """The token is known, but not allowed to do this."""

    code = "PERMISSION_DENIED"
    default_reason = "PERMISSION_DENIED"


class AccuracyNotReached(InterwindError):
    """The numbers missed their tolerance and are not returned; ``evidence`` says by how much."""

    code = "FAILED_PRECONDITION"
    default_reason = "ACCURACY_NOT_REACHED"


class ArrayEvicted(InterwindError):
    """An uploaded array is no longer held; upload it again and repeat the call."""

    code = "FAILED_PRECONDITION"
    default_reason = "ARRAY_EVICTED"


class JobFailed(InterwindError):
    """A batch item failed for good."""

    code = "ABORTED"
    default_reason = "JOB_FAILED"


class DataLoss(InterwindError):
    """A stored or received result fails its checksum."""

    code = "DATA_LOSS"
    default_reason = "DATA_LOSS"


class InternalError(InterwindError):
    """A defect of the service; the message carries an incident number only."""

    code = "INTERNAL"
    default_reason = "INTERNAL"


def error_classes() -> tuple[type[InterwindError], ...]:
    """Return every class of the tree, root first, depth first."""

    def walk(cls: type[InterwindError]) -> Iterator[type[InterwindError]]:
        yield cls
        for child in cls.__subclasses__():
            yield from walk(child)

    return tuple(walk(InterwindError))


@contextmanager
def field_path(prefix: str) -> Iterator[None]:
    """Put ``prefix`` before the field paths of errors raised inside: nested values need not know where they stand."""
    try:
        yield
    except InvalidRequest as error:
        raise at_path(prefix, error) from error


def at_path(prefix: str, error: InvalidRequest) -> InvalidRequest:
    """Return the error with ``prefix`` before its field paths."""
    violations = tuple(
        FieldViolation(join_path(prefix, violation.field), violation.description) for violation in error.violations
    )
    message = error.message
    if len(violations) == 1 and message == f"{error.violations[0].field}: {error.violations[0].description}":
        message = f"{violations[0].field}: {violations[0].description}"
    return type(error)(
        message, reason=error.reason, violations=violations, metadata=error.metadata, evidence=error.evidence
    )


def join_path(prefix: str, field: str) -> str:
    """Join two parts of a field path: ``elements[3]`` + ``resistance_ohm``, or ``coupling`` + ``[0][1]``."""
    return prefix + field if not prefix or not field or field.startswith("[") else f"{prefix}.{field}"
