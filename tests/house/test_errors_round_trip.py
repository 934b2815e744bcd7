"""The error tree is one tree: what the service raises is what the caller catches."""

from __future__ import annotations

import grpc
import pytest

from interwind.codec.errors import error_to_status, status_to_error
from interwind.errors import FieldViolation, InterwindError, error_classes
from interwind.model.finding import Evidence

CLASSES = error_classes()


@pytest.mark.parametrize("cls", CLASSES, ids=lambda cls: cls.__name__)
def test_every_class_makes_the_round_trip(cls):
    """Class, reason, message, fields, metadata, delay and evidence arrive as they left."""
    sent = cls(
        "elements[3].resistance_ohm: -1.0 found; at least 0 is expected",
        reason="NARROWER_REASON",
        violations=[FieldViolation("elements[3].resistance_ohm", "-1.0 found")],
        metadata={"resistance_ohm": "-1.0"},
        retry_after_s=0.25,
        evidence=Evidence(method="direct", residual=0.5),
    )
    found = status_to_error(error_to_status(sent))
    assert cls is type(found)
    assert (sent.message, "NARROWER_REASON", 0.25) == (found.message, found.reason, found.retry_after_s)
    assert sent.violations == found.violations
    assert sent.metadata == found.metadata
    assert ("direct", 0.5) == (found.evidence.method, found.evidence.residual)


@pytest.mark.parametrize("cls", CLASSES, ids=lambda cls: cls.__name__)
def test_every_class_has_a_code_and_a_reason(cls):
    """The code is a gRPC status, the reason is UPPER_SNAKE of at most 63 characters, the docstring its own."""
    assert cls.code in grpc.StatusCode.__members__
    assert cls.default_reason.replace("_", "").isupper()
    assert len(cls.default_reason) <= 63
    assert cls.__doc__


def test_no_two_leaves_share_a_reason():
    """A reason alone tells the class."""
    reasons = [cls.default_reason for cls in CLASSES if cls is not InterwindError]
    assert len(reasons) == len(set(reasons))


def test_a_long_error_is_cut_to_what_a_trailer_carries():
    """A trailer above 8 KiB may be dropped on the way: what is left out is counted."""
    violations = [FieldViolation(f"elements[{i}].resistance_ohm", "-1.0 found; " + "x" * 300) for i in range(200)]
    status = error_to_status(CLASSES[1]("y" * 9000, violations=violations))
    assert status.ByteSize() < 6 * 1024  # grows by a third on the wire
    found = status_to_error(status)
    assert len(violations) == len(found.violations) + int(found.metadata["violations_left_out"])
