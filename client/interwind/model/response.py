"""Answers of the solver: arrays per observable, with the evidence for them."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field

from interwind.errors import InvalidRequest
from interwind.model.finding import NO_EVIDENCE, Caution, Evidence, Finding
from interwind.model.frozen import ComplexArray, FloatArray
from interwind.model.observables import ElementCurrent, ElementVoltage, Observable, WindingCurrent
from interwind.model.recording import RecordFigures


@dataclass(frozen=True, slots=True)
class SteadyStart:
    """Start at the DC point of the sources at t = 0."""


DEFAULT_TOLERANCE_DB = 0.01

Initial = Mapping[ElementVoltage | ElementCurrent | WindingCurrent, float] | SteadyStart | None


@dataclass(frozen=True, slots=True)
class AdaptiveSweep:
    """Frequencies from ``start_hz`` to ``stop_hz``, chosen so that every peak is within ``tolerance_db``."""

    start_hz: float
    stop_hz: float
    tolerance_db: float = DEFAULT_TOLERANCE_DB


@dataclass(frozen=True, slots=True, eq=False)
class MnaSystem:
    """G x + C dx/dt = B u: dense float64 ``G``, ``C`` (m, m), ``B`` (m, inputs).

    ``unknowns`` in row order, ``inputs`` by element name.
    """

    G: FloatArray
    C: FloatArray
    B: FloatArray
    unknowns: tuple[Observable, ...]
    inputs: tuple[str, ...]
    findings: tuple[Finding, ...] = ()
    cautions: tuple[Caution, ...] = ()
    evidence: Evidence = NO_EVIDENCE


@dataclass(frozen=True, slots=True, eq=False)
class _Columns:
    """Columns of numbers, one an observable."""

    observables: tuple[Observable, ...]
    samples: FloatArray | ComplexArray
    findings: tuple[Finding, ...] = field(default=(), kw_only=True)
    cautions: tuple[Caution, ...] = field(default=(), kw_only=True)
    evidence: Evidence = field(default=NO_EVIDENCE, kw_only=True)

    def __getitem__(self, observable: Observable) -> FloatArray | ComplexArray:
        try:
            return self.samples[:, self.observables.index(observable)]
        except ValueError as error:
            raise InvalidRequest.at("observe", f"{observable!r} was not asked for; ask for it in observe") from error

    def __iter__(self) -> Iterator[Observable]:
        return iter(self.observables)

    def __len__(self) -> int:
        return len(self.observables)

    def __contains__(self, observable: object) -> bool:
        return observable in self.observables


@dataclass(frozen=True, slots=True, eq=False)
class FrequencyResponse(_Columns):
    """Complex peak values: ``frequency_hz`` (F,), Hz; ``samples`` (F, observables), a NaN row where singular."""

    frequency_hz: FloatArray = field(kw_only=True)


@dataclass(frozen=True, slots=True, eq=False)
class PortResponse:
    """``impedance_ohm``, ``admittance_s``, ``scattering``, each (F, P, P); NaN where Z or Y does not exist."""

    ports: tuple[str, ...]
    frequency_hz: FloatArray
    impedance_ohm: ComplexArray
    admittance_s: ComplexArray
    scattering: ComplexArray
    findings: tuple[Finding, ...] = ()
    cautions: tuple[Caution, ...] = ()
    evidence: Evidence = NO_EVIDENCE


@dataclass(frozen=True, slots=True)
class Event:
    """A switch or diode changed its state: ``state`` is "closed", "open", "conducting" or "blocking"."""

    time_s: float
    element: str
    state: str


@dataclass(frozen=True, slots=True)
class EnergyLedger:
    """Where the energy went over the run, J: supplied = dissipated + Δstored + lost_in_jumps + numerical."""

    supplied_j: float
    dissipated_j: float
    stored_change_j: float
    lost_in_jumps_j: float
    numerical_j: float
    dissipated_by_element_j: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True, slots=True, eq=False)
class TimeResponse(_Columns):
    """Samples (T, observables) at ``time_s`` (T,), s, limits from the right; ``events``; the energy ``ledger``.

    With a `Recording`: its ``figures``, and with an envelope ``lowest`` and ``highest`` (T, observables), else None.
    """

    time_s: FloatArray = field(kw_only=True)
    events: tuple[Event, ...] = field(default=(), kw_only=True)
    ledger: EnergyLedger | None = field(default=None, kw_only=True)
    figures: RecordFigures | None = field(default=None, kw_only=True)
    lowest: FloatArray | None = field(default=None, kw_only=True)
    highest: FloatArray | None = field(default=None, kw_only=True)
