"""Every error class makes the round trip over the wire, cut to what a trailer may carry."""

from __future__ import annotations

import pytest
from google.rpc import status_pb2

from interwind.codec.errors import DETAIL_LIMIT_BYTES, VIOLATION_LIMIT, error_to_status, status_to_error, to_status
from interwind.errors import FieldViolation, InvalidNetwork, Overloaded, error_classes
from interwind.model.finding import Evidence


@pytest.mark.parametrize("cls", error_classes(), ids=lambda cls: cls.__name__)
def test_round_trip(cls):
    """Class, reason, message, violations, numbers and delay all come back."""
    error = cls(
        "elements[3].resistance_ohm: -1.0 ohm found",
        reason="SOME_REASON",
        violations=[FieldViolation("elements[3].resistance_ohm", "-1.0 ohm found")],
        metadata={"resistance_ohm": "-1.0"},
        retry_after_s=0.25,
        evidence=Evidence(method="LU", residual=1e-3),
    )

    back = status_to_error(status_pb2.Status.FromString(to_status(error)))

    assert type(back) is cls
    assert (back.reason, back.message, back.violations) == (error.reason, error.message, error.violations)
    assert (back.metadata, back.retry_after_s) == (error.metadata, error.retry_after_s)
    assert back.evidence.residual == 1e-3


@pytest.mark.parametrize("count", [1, 32, 10_000])
@pytest.mark.parametrize("length", [10, 10_000])
def test_size_cap(count, length):
    """However much is wrong, the details fit the trailer, and what was left out is told."""
    error = InvalidNetwork(
        "m" * length,
        violations=[FieldViolation(f"elements[{i}].name", "d" * length) for i in range(count)],
        metadata={f"key{i}": "v" * length for i in range(count)},
    )

    status = error_to_status(error)

    assert status.ByteSize() <= DETAIL_LIMIT_BYTES
    back = status_to_error(status)
    assert type(back) is InvalidNetwork
    kept = len(back.violations)
    assert kept <= VIOLATION_LIMIT
    assert kept == count or back.metadata["violations_left_out"] == str(count - kept)


def test_foreign_status_gets_the_class_of_its_code():
    """A status that the library made, without our details, still becomes one of our errors."""
    assert type(status_to_error(status_pb2.Status(code=8, message="queue"))) is Overloaded
