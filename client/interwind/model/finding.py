"""What was noticed: findings about the data, cautions about the work, and the evidence behind the numbers."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import Enum


class Severity(Enum):
    """How much a finding matters."""

    INFO = "INFO"
    WARNING = "WARNING"
    ERROR = "ERROR"


class Verdict(Enum):
    """Whether the windings can exist."""

    VALID = "VALID"
    INVALID = "INVALID"
    UNDECIDED = "UNDECIDED"


@dataclass(frozen=True, slots=True)
class Finding:
    """One thing noticed: its stable code, the windings concerned, the field, and the numbers compared (NaN: none)."""

    code: str
    severity: Severity
    windings: tuple[str, ...] = ()
    field: str = ""
    message: str = ""
    measured: float = math.nan
    limit: float = math.nan


@dataclass(frozen=True, slots=True)
class Caution:
    """One hazard that the content calls for: its stable code and sentence, value found and threshold (NaN: none)."""

    code: str
    message: str
    measured: float = math.nan
    threshold: float = math.nan


@dataclass(frozen=True, slots=True)
class Evidence:
    """Why the numbers may be believed. NaN where a figure does not apply.

    residual = max |b − A x|∞ / (|A|∞ |x|∞ + |b|∞); condition = largest 1-norm estimate after scaling;
    reciprocity_error = max|Y − Yᵀ| / max|Y|; passivity_margin = min eig (Y + Yᴴ)/2 over |Y|;
    energy_error = |supplied − dissipated − Δstored − lost in jumps| / max(supplied, peak stored).
    """

    method: str = ""
    residual: float = math.nan
    condition: float = math.nan
    reciprocity_error: float = math.nan
    passivity_margin: float = math.nan
    energy_error: float = math.nan
    periods_propagated: int = 0
    input_sha256: str = ""
    service_version: str = ""


NO_EVIDENCE = Evidence()
