"""The elements of a network. Voltage and current count from the first node through the element to the second."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from interwind.errors import InvalidRequest
from interwind.model.frozen import FloatArray, frozen_vector, plain_float
from interwind.model.waveform import WAVEFORMS, Waveform
from interwind.model.windings import WindingSet


class _Named:
    """Checks the texts and numbers that every element has; what they may be is the service's judgement."""

    __slots__ = ()
    _texts: tuple[str, ...] = ("name", "a", "b")
    _numbers: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        for field in self._texts:
            text = getattr(self, field)
            if not isinstance(text, str) or not text:
                raise InvalidRequest.at(field, f"{text!r} found; a non-empty text is expected")
        for field in self._numbers:
            object.__setattr__(self, field, plain_float(getattr(self, field), field))


@dataclass(frozen=True, slots=True)
class Resistor(_Named):
    """v = R i."""

    name: str
    a: str
    b: str
    resistance_ohm: float
    _numbers = ("resistance_ohm",)


@dataclass(frozen=True, slots=True)
class Inductor(_Named):
    """v = L di/dt, coupled to nothing."""

    name: str
    a: str
    b: str
    inductance_h: float
    _numbers = ("inductance_h",)


@dataclass(frozen=True, slots=True)
class Capacitor(_Named):
    """i = C dv/dt."""

    name: str
    a: str
    b: str
    capacitance_f: float
    _numbers = ("capacitance_f",)


@dataclass(frozen=True, slots=True)
class VoltageSource(_Named):
    """v_ab = waveform(t), V; in a frequency response ``phasor``, V peak, complex."""

    name: str
    a: str
    b: str
    waveform: Waveform | None = None
    phasor: complex | None = None

    def __post_init__(self) -> None:
        _source(self)


@dataclass(frozen=True, slots=True)
class CurrentSource(_Named):
    """Drives waveform(t), A, from ``a`` through itself to ``b``; in a frequency response ``phasor``, A peak."""

    name: str
    a: str
    b: str
    waveform: Waveform | None = None
    phasor: complex | None = None

    def __post_init__(self) -> None:
        _source(self)


def _source(element: VoltageSource | CurrentSource) -> None:
    _Named.__post_init__(element)
    if element.waveform is not None and not isinstance(element.waveform, WAVEFORMS):
        raise InvalidRequest.at("waveform", f"{type(element.waveform).__name__} found; a waveform is expected")
    if element.phasor is not None:
        try:
            object.__setattr__(element, "phasor", complex(element.phasor))
        except (TypeError, ValueError) as error:
            raise InvalidRequest.at("phasor", f"{element.phasor!r} found; a complex number is expected") from error


@dataclass(frozen=True, slots=True, eq=False)
class Windings(_Named):
    """A set of coupled windings, each given its (start, finish) nodes: v = R i + L di/dt.

    ``terminals`` maps every label of the set to its (start, finish) nodes.
    """

    name: str
    windings: WindingSet
    terminals: Mapping[str, tuple[str, str]]
    _texts = ("name",)

    def __post_init__(self) -> None:
        _Named.__post_init__(self)
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
class Gate:
    """A switch drive that repeats: closed for ``on_s`` of every ``period_s``, from ``delay_s`` on (a phase)."""

    period_s: float
    on_s: float
    delay_s: float = 0.0

    def __post_init__(self) -> None:
        for field in ("period_s", "on_s", "delay_s"):
            object.__setattr__(self, field, plain_float(getattr(self, field), field))


@dataclass(frozen=True, slots=True, eq=False)
class GateTimes:
    """A switch drive by its instants: toggles at each of ``toggle_s``, shape (n,), s, rising."""

    toggle_s: FloatArray
    initially_closed: bool = False

    def __post_init__(self) -> None:
        object.__setattr__(self, "toggle_s", frozen_vector(self.toggle_s, "toggle_s"))
        object.__setattr__(self, "initially_closed", bool(self.initially_closed))


@dataclass(frozen=True, slots=True)
class Switch(_Named):
    """A timed switch: its conducting resistance while closed, its blocking one while open (0 and inf are ideal)."""

    name: str
    a: str
    b: str
    closed: Gate | GateTimes
    conducting_resistance_ohm: float = 0.0
    blocking_resistance_ohm: float = float("inf")
    _numbers = ("conducting_resistance_ohm", "blocking_resistance_ohm")

    def __post_init__(self) -> None:
        _Named.__post_init__(self)
        if not isinstance(self.closed, Gate | GateTimes):
            raise InvalidRequest.at("closed", f"{self.closed!r} found; Gate or GateTimes is expected")


@dataclass(frozen=True, slots=True)
class Diode(_Named):
    """Piecewise linear (the defaults are ideal), or exponential when both its numbers are given.

    Piecewise linear: conducting v = V_f + r i, blocking i = v / R_blocking. Exponential: i = I_s (e^(v/V_T) − 1).
    """

    name: str
    anode: str
    cathode: str
    forward_voltage_v: float = 0.0
    conducting_resistance_ohm: float = 0.0
    blocking_resistance_ohm: float = float("inf")
    saturation_current_a: float | None = None
    thermal_voltage_v: float | None = None
    _texts = ("name", "anode", "cathode")
    _numbers = ("forward_voltage_v", "conducting_resistance_ohm", "blocking_resistance_ohm")

    def __post_init__(self) -> None:
        _Named.__post_init__(self)
        if (self.saturation_current_a is None) != (self.thermal_voltage_v is None):
            raise InvalidRequest.at(
                "saturation_current_a", "an exponential diode needs both it and thermal_voltage_v; one is missing"
            )
        if self.exponential:
            for field in ("saturation_current_a", "thermal_voltage_v"):
                object.__setattr__(self, field, plain_float(getattr(self, field), field))

    @property
    def exponential(self) -> bool:
        """Whether the exponential law is meant."""
        return self.saturation_current_a is not None

    @property
    def a(self) -> str:
        """The anode, its first node."""
        return self.anode

    @property
    def b(self) -> str:
        """The cathode, its second node."""
        return self.cathode


@dataclass(frozen=True, slots=True)
class Arrester(_Named):
    """i = I_ref |v/V_ref|^exponent sign(v)."""

    name: str
    a: str
    b: str
    reference_voltage_v: float
    reference_current_a: float
    exponent: float
    _numbers = ("reference_voltage_v", "reference_current_a", "exponent")


@dataclass(frozen=True, slots=True, eq=False)
class SaturableInductor(_Named):
    """A single-valued flux-current table, odd about 0, its last slope carried on; starts at ``residual_wb``.

    ``current_a`` and ``flux_linkage_wb`` shape (n,), rising, from 0 or from their first positive point.
    """

    name: str
    a: str
    b: str
    current_a: FloatArray
    flux_linkage_wb: FloatArray
    residual_wb: float = 0.0
    _numbers = ("residual_wb",)

    def __post_init__(self) -> None:
        _Named.__post_init__(self)
        current = frozen_vector(self.current_a, "current_a")
        flux = frozen_vector(self.flux_linkage_wb, "flux_linkage_wb")
        if current.size == 0 or current.shape != flux.shape:
            raise InvalidRequest.at("flux_linkage_wb", f"{flux.size} values found for {current.size} currents")
        object.__setattr__(self, "current_a", current)
        object.__setattr__(self, "flux_linkage_wb", flux)


@dataclass(frozen=True, slots=True)
class IdealTransformer(_Named):
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
class VoltageByVoltage(_Named):
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
class CurrentByVoltage(_Named):
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
class VoltageByCurrent(_Named):
    """v_ab = transresistance_ohm · i(control), the control being the name of an element."""

    name: str
    a: str
    b: str
    control: str
    transresistance_ohm: float
    _texts = ("name", "a", "b", "control")
    _numbers = ("transresistance_ohm",)


@dataclass(frozen=True, slots=True)
class CurrentByCurrent(_Named):
    """i_ab = gain · i(control), the control being the name of an element."""

    name: str
    a: str
    b: str
    control: str
    gain: float
    _texts = ("name", "a", "b", "control")
    _numbers = ("gain",)


def _control_nodes(element: VoltageByVoltage | CurrentByVoltage) -> None:
    _Named.__post_init__(element)
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
