"""Whether a period is one: every gate and every waveform repeats in it, or the one that does not is named."""

from __future__ import annotations

import numpy as np

from interwind.errors import InvalidRequest
from interwind.model import waveform as wf
from interwind.model.devices import Gate, Switch
from interwind.model.elements import CurrentSource, VoltageSource
from interwind.model.network import Network
from interwind_service import tolerances as tol


def require_commensurate(network: Network, period_s: float) -> None:
    """Refuse a period in which some drive does not repeat.

    Raises
    ------
    InvalidRequest : the drive, its own period, and the period asked for.
    """
    for position, element in enumerate(network.elements):
        if isinstance(element, Switch):
            gate = element.closed
            if isinstance(gate, Gate):
                if 0.0 < gate.on_s < gate.period_s:
                    _require(f"elements[{position}].closed.period_s", element.name, gate.period_s, period_s)
            elif np.any(gate.toggle_s > 0.0):
                raise _aperiodic(f"elements[{position}].closed", element.name, "Gate")
        elif isinstance(element, VoltageSource | CurrentSource):
            own = _own_period(element.waveform, f"elements[{position}].waveform", element.name)
            if own is not None:
                _require(f"elements[{position}].waveform", element.name, own, period_s)


def _own_period(waveform: wf.Waveform | None, path: str, name: str) -> float | None:
    if waveform is None or isinstance(waveform, wf.Constant):
        return None
    if isinstance(waveform, wf.Step) and waveform.at_s <= 0.0:
        return None
    if isinstance(waveform, wf.PiecewiseLinear | wf.SampledRecord) and np.ptp(waveform.value) == 0.0:
        return None
    if isinstance(waveform, wf.Sine):
        return 1.0 / abs(waveform.frequency_hz) if waveform.frequency_hz != 0.0 else None
    if isinstance(waveform, wf.Trapezoid):
        return waveform.period_s
    raise _aperiodic(path, name, "Sine or Trapezoid")


def _require(path: str, name: str, own_s: float, period_s: float) -> None:
    cycles = period_s / own_s if own_s > 0.0 else np.inf
    whole = max(1, round(cycles)) if np.isfinite(cycles) else 1
    if abs(cycles - whole) > tol.COMMENSURATE * whole:
        raise InvalidRequest.at(
            "period_s",
            f"{period_s!r} s holds {cycles:.9g} cycles of {name!r} ({path}), which repeats every {own_s!r} s; "
            f"a whole number is expected, such as {whole * own_s!r} s",
        )


def _aperiodic(path: str, name: str, instead: str) -> InvalidRequest:
    return InvalidRequest.at(path, f"{name!r} does not repeat; a periodic response needs a {instead} or a constant")
