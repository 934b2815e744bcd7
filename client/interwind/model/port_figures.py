"""What people read off a port response: one number a frequency for each figure asked for.

A place is the name of a port, or the mode of a pair of ports of equal reference resistance r: `Differential`, voltage
v_a − v_b, current (i_a − i_b)/2, reference 2r; `Common`, voltage (v_a + v_b)/2, current i_a + i_b, reference r/2.

References: Bockelman & Eisenstadt 1995 (mixed-mode scattering); CISPR 17 (insertion loss).
"""

from __future__ import annotations

from dataclasses import dataclass, field

from interwind.errors import InvalidRequest
from interwind.model.finding import NO_EVIDENCE, Caution, Evidence, Finding
from interwind.model.frozen import ComplexArray, FloatArray


@dataclass(frozen=True, slots=True)
class Differential:
    """The differential mode of ports ``a`` and ``b``."""

    a: str
    b: str


@dataclass(frozen=True, slots=True)
class Common:
    """The common mode of ports ``a`` and ``b``."""

    a: str
    b: str


Place = str | Differential | Common


@dataclass(frozen=True, slots=True)
class Scattering:
    """Wave leaving at ``measured`` per wave entering at ``driven``, every place matched; between modes: conversion."""

    measured: Place
    driven: Place


@dataclass(frozen=True, slots=True)
class InsertionLoss:
    """20 log |V of the load joined straight to the source / V with the network in between|, dB; other ports matched."""

    source: Place
    load: Place
    source_ohm: float = 50.0
    load_ohm: float = 50.0


@dataclass(frozen=True, slots=True)
class VoltageTransfer:
    """Voltage at ``measured`` per volt at ``driven``, all other places open."""

    measured: Place
    driven: Place


@dataclass(frozen=True, slots=True)
class CurrentTransfer:
    """Current out of ``measured``, shorted, per ampere into ``driven``, all other places open."""

    measured: Place
    driven: Place


@dataclass(frozen=True, slots=True)
class InputImpedance:
    """Impedance at a place, every other matched, ohm."""

    place: Place


@dataclass(frozen=True, slots=True)
class InputAngle:
    """Angle of the impedance at a place, every other matched, rad."""

    place: Place


@dataclass(frozen=True, slots=True)
class LinkEfficiency:
    """Most of the power entering ``transmitters`` that can leave at ``receivers``, by the best drives and loads."""

    transmitters: tuple[str, ...]
    receivers: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class OptimumLoad:
    """Load impedance at ``receiver`` that gives the `LinkEfficiency` of ``link``, ohm."""

    link: LinkEfficiency
    receiver: str


@dataclass(frozen=True, slots=True)
class OptimumDrive:
    """Share of ``transmitter`` in the best drive currents of ``link``: Euclidean norm 1, the first one real."""

    link: LinkEfficiency
    transmitter: str


PortFigure = (
    Scattering | InsertionLoss | VoltageTransfer | CurrentTransfer | InputImpedance | InputAngle
    | LinkEfficiency | OptimumLoad | OptimumDrive
)  # fmt: skip

_REAL = (InsertionLoss, InputAngle, LinkEfficiency)


@dataclass(frozen=True, slots=True, eq=False)
class PortFigures:
    """The answer of `port_figures`: ``samples`` (F, figures) complex, NaN where a figure does not exist.

    Indexed by the figure: (F,), real where the figure is.
    """

    figures: tuple[PortFigure, ...]
    frequency_hz: FloatArray
    samples: ComplexArray
    findings: tuple[Finding, ...] = field(default=(), kw_only=True)
    cautions: tuple[Caution, ...] = field(default=(), kw_only=True)
    evidence: Evidence = field(default=NO_EVIDENCE, kw_only=True)

    def __getitem__(self, figure: PortFigure) -> FloatArray | ComplexArray:
        try:
            column = self.samples[:, self.figures.index(figure)]
        except ValueError as error:
            raise InvalidRequest.at("figures", f"{figure!r} was not asked for; ask for it in figures") from error
        return column.real if isinstance(figure, _REAL) else column
