"""The natural modes of a network: its poles, what they do to each observable, and where their energy is."""

from __future__ import annotations

from dataclasses import dataclass

from interwind.model.finding import NO_EVIDENCE, Caution, Evidence, Finding
from interwind.model.frozen import ComplexArray, FloatArray
from interwind.model.observables import Observable


@dataclass(frozen=True, slots=True, eq=False)
class PoleReport:
    """The answer of `poles`: one entry a real pole or a conjugate pair, slowest first.

    ``pole_per_s`` (n,) complex, 1/s, imaginary part not negative; ``frequency_hz`` (n,) = Im p / 2π; ``quality_factor``
    (n,) = |p| / (2 |Re p|), inf without loss; ``residue`` (n, observables) complex, in the unit of the observable per
    second, of the response to the sources' phasors: y(s) = Σ r/(s − p) + conj(r)/(s − conj(p)) + …;
    ``zero_per_s``: for each observable its zeros, complex, 1/s, imaginary part not negative, slowest first;
    ``participants``: (element, winding label or empty text) of the columns of ``participation`` (n, participants), the
    share of each in the energy that the mode stores.
    """

    pole_per_s: ComplexArray
    frequency_hz: FloatArray
    quality_factor: FloatArray
    observables: tuple[Observable, ...]
    residue: ComplexArray
    zero_per_s: tuple[ComplexArray, ...]
    participants: tuple[tuple[str, str], ...]
    participation: FloatArray
    findings: tuple[Finding, ...] = ()
    cautions: tuple[Caution, ...] = ()
    evidence: Evidence = NO_EVIDENCE
