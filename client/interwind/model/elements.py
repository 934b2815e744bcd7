"""The elements of a network. Voltage and current count from the first node through the element to the second."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from interwind.errors import InvalidRequest
from interwind.model.devices import Arrester, Diode, SaturableInductor, Switch
from interwind.model.named import Named
from interwind.model.waveform import WAVEFORMS, Waveform
from interwind.model.windings import WindingSet


@dataclass(frozen=True, slots=True)
class Resistor(Named):
    """v = R i."""

    name: str
    a: str
    b: str
    resistance_ohm: float
    _numbers = ("resistance_ohm",)


@dataclass(frozen=True, slots=True)
class Inductor(Named):
    """v = L di/dt, coupled to nothing."""

    name: str
    a: str
    b: str
    inductance_h: float
    _numbers = ("inductance_h",)


@dataclass(frozen=True, slots=True)
class Capacitor(Named):
    """i = C dv/dt."""

    name: str
    a: str
    b: str
    capacitance_f: float
    _numbers = ("capacitance_f",)


@dataclass(frozen=True, slots=True)
class VoltageSource(Named):
    """v_ab = waveform(t), V; in a frequency response ``phasor``, V peak, complex."""

    name: str
    a: str
    b: str
    waveform: Waveform | None = None
    phasor: complex | None = None

    def __post_init__(self) -> None:
        _source(self)


@dataclass(frozen=True, slots=True)
class CurrentSource(Named):
    """Drives waveform(t), A, from ``a`` through itself to ``b``; in a frequency response ``phasor``, A peak."""

    name: str
    a: str
    b: str
    waveform: Waveform | None = None
    phasor: complex | None = None

    def __post_init__(self) -> None:
        _source(self)


def _source(element: VoltageSource | CurrentSource) -> None:
    Named.__post_init__(element)
    if element.waveform is not None and not isinstance(element.waveform, WAVEFORMS):
        raise InvalidRequest.at("waveform", f"{type(element.waveform).__name__} found; a waveform is expected")
    if element.phasor is not None:
        try:
            object.__setattr__(element, "phasor", complex(element.phasor))
        except (TypeError, ValueError) as error:
            raise InvalidRequest.at("phasor", f"{element.phasor!r} found; a complex number is expected") from error


@dataclass(frozen=True, slots=True, eq=False)
class Windings(Named):
    """A set of coupled windings, each given its (start, finish) nodes: v = R i + L di/dt.

    ``terminals`` maps every label of the set to its (start, finish) nodes.
    """

    name: str
    windings: WindingSet
    terminals: Mapping[str, tuple[str, str]]
    _texts = ("name",)

    def __post_init__(self) -> None:
        Named.__post_init__(self)
        if not isinstance(self.windings, WindingSet):
            raise InvalidRequest.at("windings", f"{type(self.windings).__name__} found; a WindingSet is expected")
        given = dict(self.terminals)
        for label in given:
            if label not in self.windings.labels:
                raise InvalidRequest.at(
                    f"terminals[{label!r}]", f"no such winding; there are {', '.join(self.windings.labels)}"
                )
        ordered: dict[str, tuple[str, str]] = {}
        for label in self.windings.labels:
            if label not in given:
                raise InvalidRequest.at("terminals", f"winding {label!r} has none; give its (start, finish) nodes")
            pair = tuple(given[label])
            if len(pair) != 2 or not all(isinstance(node, str) and node for node in pair):
                raise InvalidRequest.at(f"terminals[{label!r}]", f"{pair!r} found; (start, finish) is expected")
            ordered[label] = pair
        object.__setattr__(self, "terminals", ordered)


@dataclass(frozen=True, slots=True)
class IdealTransformer(Named):
    """v_ab = turns_ratio · v_cd, and the current into ``c`` is −turns_ratio times the current into ``a``."""

    name: str
    a: str
    b: str
    c: str
    d: str
    turns_ratio: float
    _texts = ("name", "a", "b", "c", "d")
    _numbers = ("turns_ratio",)


@dataclass(frozen=True, slots=True)
class VoltageByVoltage(Named):
    """v_ab = gain · v_control, the control being a pair of nodes."""

    name: str
    a: str
    b: str
    control: tuple[str, str]
    gain: float
    _numbers = ("gain",)

    def __post_init__(self) -> None:
        _control_nodes(self)


@dataclass(frozen=True, slots=True)
class CurrentByVoltage(Named):
    """i_ab = transconductance_s · v_control, the control being a pair of nodes."""

    name: str
    a: str
    b: str
    control: tuple[str, str]
    transconductance_s: float
    _numbers = ("transconductance_s",)

    def __post_init__(self) -> None:
        _control_nodes(self)


@dataclass(frozen=True, slots=True)
class VoltageByCurrent(Named):
    """v_ab = transresistance_ohm · i(control), the control being the name of an element."""

    name: str
    a: str
    b: str
    control: str
    transresistance_ohm: float
    _texts = ("name", "a", "b", "control")
    _numbers = ("transresistance_ohm",)


@dataclass(frozen=True, slots=True)
class CurrentByCurrent(Named):
    """i_ab = gain · i(control), the control being the name of an element."""

    name: str
    a: str
    b: str
    control: str
    gain: float
    _texts = ("name", "a", "b", "control")
    _numbers = ("gain",)


def _control_nodes(element: VoltageByVoltage | CurrentByVoltage) -> None:
    Named.__post_init__(element)
    pair = tuple(element.control)
    if len(pair) != 2 or not all(isinstance(node, str) and node for node in pair):
        raise InvalidRequest.at("control", f"{element.control!r} found; a pair of nodes is expected")
    object.__setattr__(element, "control", pair)


Element = (
    Resistor | Inductor | Capacitor | VoltageSource | CurrentSource | Windings | Switch | Diode | Arrester
    | SaturableInductor | IdealTransformer | VoltageByVoltage | CurrentByVoltage | VoltageByCurrent | CurrentByCurrent
)  # fmt: skip
ELEMENTS: tuple[type[Any], ...] = (
    Resistor, Inductor, Capacitor, VoltageSource, CurrentSource, Windings, Switch, Diode, Arrester, SaturableInductor,
    IdealTransformer, VoltageByVoltage, CurrentByVoltage, VoltageByCurrent, CurrentByCurrent,
)  # fmt: skip
