"""Findings, cautions and evidence <-> messages."""

from __future__ import annotations

from interwind.model.finding import Caution, Evidence, Finding, Severity
from interwind.v1 import finding_pb2


def finding_to_message(finding: Finding) -> finding_pb2.Finding:
    """Return the message of a finding."""
    return finding_pb2.Finding(
        code=finding.code,
        severity=f"SEVERITY_{finding.severity.value}",
        windings=finding.windings,
        field=finding.field,
        message=finding.message,
        measured=finding.measured,
        limit=finding.limit,
    )


def finding_from_message(message: finding_pb2.Finding) -> Finding:
    """Return the finding of a message."""
    name = finding_pb2.Severity.Name(message.severity).removeprefix("SEVERITY_")
    return Finding(
        message.code,
        Severity(name) if name in Severity.__members__ else Severity.INFO,
        tuple(message.windings),
        message.field,
        message.message,
        message.measured,
        message.limit,
    )


def caution_to_message(caution: Caution) -> finding_pb2.Caution:
    """Return the message of a caution."""
    return finding_pb2.Caution(
        code=caution.code, message=caution.message, measured=caution.measured, threshold=caution.threshold
    )


def caution_from_message(message: finding_pb2.Caution) -> Caution:
    """Return the caution of a message."""
    return Caution(message.code, message.message, message.measured, message.threshold)


def evidence_to_message(evidence: Evidence) -> finding_pb2.Evidence:
    """Return the message of an evidence block."""
    return finding_pb2.Evidence(
        method=evidence.method,
        residual=evidence.residual,
        condition=evidence.condition,
        reciprocity_error=evidence.reciprocity_error,
        passivity_margin=evidence.passivity_margin,
        energy_error=evidence.energy_error,
        period_count=evidence.periods_propagated,
        input_sha256=evidence.input_sha256,
        service_version=evidence.service_version,
    )


def evidence_from_message(message: finding_pb2.Evidence) -> Evidence:
    """Return the evidence block of a message."""
    return Evidence(
        message.method,
        message.residual,
        message.condition,
        message.reciprocity_error,
        message.passivity_margin,
        message.energy_error,
        message.period_count,
        message.input_sha256,
        message.service_version,
    )
