"""Switches, diodes and the elements whose law is not a straight line."""

from __future__ import annotations

from dataclasses import dataclass

from interwind.errors import InvalidRequest
from interwind.model.frozen import FloatArray, frozen_vector, plain_float
from interwind.model.named import Named


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
class Switch(Named):
    """A timed switch: its conducting resistance while closed, its blocking one while open (0 and inf are ideal)."""

    name: str
    a: str
    b: str
    closed: Gate | GateTimes
    conducting_resistance_ohm: float = 0.0
    blocking_resistance_ohm: float = float("inf")
    _numbers = ("conducting_resistance_ohm", "blocking_resistance_ohm")

    def __post_init__(self) -> None:
        Named.__post_init__(self)
        if not isinstance(self.closed, Gate | GateTimes):
            raise InvalidRequest.at("closed", f"{self.closed!r} found; Gate or GateTimes is expected")


@dataclass(frozen=True, slots=True)
class Diode(Named):
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
        Named.__post_init__(self)
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
class Arrester(Named):
    """i = I_ref |v/V_ref|^exponent sign(v)."""

    name: str
    a: str
    b: str
    reference_voltage_v: float
    reference_current_a: float
    exponent: float
    _numbers = ("reference_voltage_v", "reference_current_a", "exponent")


@dataclass(frozen=True, slots=True, eq=False)
class SaturableInductor(Named):
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
        Named.__post_init__(self)
        current = frozen_vector(self.current_a, "current_a")
        flux = frozen_vector(self.flux_linkage_wb, "flux_linkage_wb")
        if current.size == 0 or current.shape != flux.shape:
            raise InvalidRequest.at("flux_linkage_wb", f"{flux.size} values found for {current.size} currents")
        object.__setattr__(self, "current_a", current)
        object.__setattr__(self, "flux_linkage_wb", flux)
