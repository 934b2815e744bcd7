"""The domain of every number of a network; each refusal names its field, the value, the limit and the next move."""

from __future__ import annotations

import math
from collections.abc import Callable

from interwind.errors import InvalidNetwork, field_path
from interwind.model import elements as el
from interwind.model.devices import Gate, GateTimes
from interwind.model.network import Network, Port
from interwind_service import tolerances as tol

_Check = Callable[[float], str | None]


_RANGE = f"{tol.LEAST_MAGNITUDE:g} to {tol.LARGEST_MAGNITUDE:g}"


def within_range(value: float) -> bool:
    """Whether a magnitude is one that no product of a few of its like takes out of floating point."""
    return tol.LEAST_MAGNITUDE <= value <= tol.LARGEST_MAGNITUDE


def _at_least_zero(value: float) -> str | None:
    if not math.isfinite(value):
        return "a finite number is expected; leave the element out if it is not there"
    if value < 0.0:
        return "it may not be negative; a passive element has none below 0"
    return None if value == 0.0 or within_range(value) else f"0 or {_RANGE} is expected; check its unit"


def _above_zero(value: float) -> str | None:
    return None if within_range(value) else f"a number above 0, {_RANGE}, is expected"


def _finite(value: float) -> str | None:
    return None if value == 0.0 or within_range(abs(value)) else f"0 or a magnitude of {_RANGE} is expected"


def _zero_to_infinity(value: float) -> str | None:
    if value in (0.0, math.inf) or within_range(value):
        return None
    return f"0, {_RANGE} or inf is expected; 0 conducts ideally, inf blocks ideally"


_DOMAIN: dict[type, dict[str, _Check]] = {
    el.Resistor: {"resistance_ohm": _at_least_zero},
    el.Inductor: {"inductance_h": _at_least_zero},
    el.Capacitor: {"capacitance_f": _at_least_zero},
    el.Switch: {"conducting_resistance_ohm": _at_least_zero, "blocking_resistance_ohm": _zero_to_infinity},
    el.Diode: {
        "forward_voltage_v": _at_least_zero,
        "conducting_resistance_ohm": _at_least_zero,
        "blocking_resistance_ohm": _zero_to_infinity,
        "saturation_current_a": _above_zero,
        "thermal_voltage_v": _above_zero,
    },
    el.Arrester: {"reference_voltage_v": _above_zero, "reference_current_a": _above_zero, "exponent": _above_zero},
    el.SaturableInductor: {"residual_wb": _finite},
    el.IdealTransformer: {"turns_ratio": _finite},
    el.VoltageByVoltage: {"gain": _finite},
    el.CurrentByVoltage: {"transconductance_s": _finite},
    el.VoltageByCurrent: {"transresistance_ohm": _finite},
    el.CurrentByCurrent: {"gain": _finite},
    Port: {"reference_ohm": _above_zero},
}


def check_values(network: Network) -> None:
    """Refuse any element or port value outside its domain, by its path such as ``elements[3].resistance_ohm``."""
    for field, items in (("elements", network.elements), ("ports", network.ports)):
        for position, item in enumerate(items):
            with field_path(f"{field}[{position}]"):
                _check_item(item)


def _check_item(item: el.Element | Port) -> None:
    for name, check in _DOMAIN.get(type(item), {}).items():
        value = getattr(item, name)
        if value is None:
            continue
        if (reason := check(float(value))) is not None:
            raise InvalidNetwork.at(name, f"{value!r} found; {reason}", value=value)
    if isinstance(item, el.VoltageSource | el.CurrentSource) and item.phasor is not None:
        if (reason := _finite(math.hypot(item.phasor.real, item.phasor.imag))) is not None:
            raise InvalidNetwork.at("phasor", f"{item.phasor!r} found; {reason}")
    if isinstance(item, el.IdealTransformer) and item.turns_ratio == 0.0:
        raise InvalidNetwork.at("turns_ratio", "0.0 found; it may not be 0; a short circuit is a resistor of 0 ohm")
    if isinstance(item, el.Switch):
        _check_gate(item.closed)
    if isinstance(item, el.SaturableInductor):
        _check_table(item)


def _check_gate(gate: Gate | GateTimes) -> None:
    with field_path("closed"):
        if isinstance(gate, Gate):
            if not (math.isfinite(gate.period_s) and gate.period_s > 0.0):
                raise InvalidNetwork.at("period_s", f"{gate.period_s!r} s found; a finite time above 0 is expected")
            if not 0.0 <= gate.on_s <= gate.period_s:
                raise InvalidNetwork.at(
                    "on_s", f"{gate.on_s!r} s found; 0 to the period, {gate.period_s!r} s, is expected"
                )
            if not math.isfinite(gate.delay_s):
                raise InvalidNetwork.at("delay_s", f"{gate.delay_s!r} s found; a finite time is expected")
            return
        times = gate.toggle_s.tolist()
        for k, time_s in enumerate(times):
            if not math.isfinite(time_s) or time_s < 0.0:
                raise InvalidNetwork.at(f"toggle_s[{k}]", f"{time_s!r} s found; a finite time from 0 on is expected")
            if k and time_s <= times[k - 1]:
                raise InvalidNetwork.at(f"toggle_s[{k}]", f"{time_s!r} s found after {times[k - 1]!r} s; times rise")


def _check_table(item: el.SaturableInductor) -> None:
    for name in ("current_a", "flux_linkage_wb"):
        points = getattr(item, name).tolist()
        for k, value in enumerate(points):
            if not math.isfinite(value) or value < 0.0 or (k and value <= points[k - 1]):
                raise InvalidNetwork.at(f"{name}[{k}]", f"{value!r} found; finite and rising from 0 is expected")
    if item.current_a[-1] == 0.0:
        raise InvalidNetwork.at("current_a", "only 0.0 found; at least one point above 0 is expected")


def switch_closed_at_zero(switch: el.Switch) -> bool:
    """Whether a switch stands closed just after t = 0."""
    gate = switch.closed
    if isinstance(gate, Gate):
        return (0.0 - gate.delay_s) % gate.period_s < gate.on_s
    return gate.initially_closed ^ bool(int((gate.toggle_s <= 0.0).sum()) % 2)
