"""All sources of a network as one generator ξ' = S ξ, u = U ξ, with the instants at which ξ changes otherwise."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
import scipy.linalg as sl
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork, field_path
from interwind.model.elements import CurrentSource, VoltageSource
from interwind.model.waveform import Constant, Waveform
from interwind_service.network.topology import Topology
from interwind_service.response.drive.waveform import Channel, channels_of
from interwind_service.tolerances import FORCED_CURRENT_ROUNDING

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Generator:
    """``S`` (g, g), 1/s; ``U`` (inputs, g); ``rate`` (g,) = largest |eigenvalue| of its channel, 1/s; ``events`` (E,)
    rising, distinct, s; ``unit`` : the state that is 1 at all times, −1 without one.
    """

    S: FloatArray
    U: FloatArray
    rate: FloatArray
    events: FloatArray
    states: tuple[Callable[[FloatArray], FloatArray], ...]
    unit: int = -1

    def state(self, time_s: FloatArray) -> FloatArray:
        """Return ξ at times (T,), shape (T, g), limits from the right."""
        if not self.states:
            return np.zeros((len(time_s), 0))
        return np.hstack([state(time_s) for state in self.states])

    def before(self, events: FloatArray) -> FloatArray:
        """Return ξ just before each event, shape (E, g)."""
        return self.state(np.nextafter(events, -np.inf))


def generator_of(topology: Topology, stop_s: float, step_s: float, *, unit: bool = False) -> Generator:
    """Join the waveforms of all independent sources; equal generators are shared. ``unit`` adds the constant 1.

    Raises
    ------
    InvalidRequest : a waveform number outside its domain, by its path.
    InvalidNetwork : current is driven into a part of the network without a return.
    """
    sources: list[list[Channel]] = []
    for branch in topology.input_branch.tolist():
        position = int(topology.element[branch])
        element = topology.network.elements[position]
        waveform: Waveform | None = element.waveform if isinstance(element, VoltageSource | CurrentSource) else None
        with field_path(f"elements[{position}].waveform"):
            sources.append([] if waveform is None else channels_of(waveform, stop_s, step_s))
    generator = _join(sources, channels_of(Constant(1.0), stop_s, step_s) if unit else [], stop_s)
    forced = topology.parts.forced @ generator.U
    if forced.size and np.abs(forced).max() > FORCED_CURRENT_ROUNDING * np.abs(generator.U).max(initial=0.0):
        part = int(np.argmax(np.abs(forced).max(axis=1)))
        inside = [topology.nodes[k] for k in np.flatnonzero(topology.parts.of_node == part)][:8]
        raise InvalidNetwork.at(
            "elements",
            f"current is driven into the part of nodes {', '.join(inside)}, which has no return path; connect it to "
            f"{topology.network.reference!r} or drive as much out of it",
            reason="FORCED_CURRENT",
        )
    return generator


def _join(sources: Sequence[Sequence[Channel]], further: Sequence[Channel], stop_s: float) -> Generator:
    """Join the channels of the sources and further ones that no source reads."""
    matrices: list[FloatArray] = []
    states: list[Callable[[FloatArray], FloatArray]] = []
    events: list[FloatArray] = []
    place: dict[object, slice] = {}
    reads: list[tuple[int, slice, FloatArray]] = []
    size = 0
    for source, channels in enumerate([*sources, further]):
        for channel in channels:
            where = place.get(channel.key) if channel.key is not None else None
            if where is None:
                where = slice(size, size + len(channel.matrix))
                size = where.stop
                matrices.append(channel.matrix)
                states.append(channel.state)
                events += [channel.events] if len(channel.events) else []
                if channel.key is not None:
                    place[channel.key] = where
            reads.append((source, where, channel.output))
    U = np.zeros((len(sources) + 1, size))
    for source, where, output in reads:
        U[source, where] += output
    times = np.unique(np.concatenate(events)) if len(events) > 1 else np.concatenate([*events, np.zeros(0)])
    inside = slice(*np.searchsorted(times, (0.0, stop_s), side="right"))
    S = sl.block_diag(*matrices) if matrices else np.zeros((0, 0))
    rates = [np.full(len(matrix), np.abs(np.linalg.eigvals(matrix)).max()) for matrix in matrices]
    rate = np.concatenate(rates) if rates else np.zeros(0)
    unit = place["constant"].start if "constant" in place else -1
    return Generator(S, U[:-1], rate, times[inside], tuple(states), unit)
