"""One RPC as both sides know it, and how large its request is."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from interwind.model.elements import Windings
from interwind.model.network import Network
from interwind.model.recording import Recording

Arguments = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Call:
    """One RPC: the engine function it reaches and the two directions of its request and its answer."""

    path: str
    engine: str
    request_class: type[Any]
    response_class: type[Any]
    streaming: bool
    _to_request: Callable[[Arguments], Any]
    _from_request: Callable[[Any], dict[str, Any]]
    _to_answer: Callable[[Any], Any]
    _from_answer: Callable[..., Any]

    def encode_request(self, **arguments: Any) -> Any:
        """Return the request message of the engine function's arguments."""
        return self._to_request(arguments)

    def decode(self, message: Any) -> dict[str, Any]:
        """Return the engine function's arguments of a request message."""
        return self._from_request(message)

    def encode(self, value: Any) -> Iterator[Any]:
        """Yield the response messages of the engine function's answer; exactly one unless streaming."""
        answer = self._to_answer(value)
        return iter(answer) if self.streaming else iter((answer,))

    def decode_response(self, messages: Iterable[Any], progress: Callable[[int, int], None] | None = None) -> Any:
        """Return the answer of its response messages."""
        if self.streaming:
            return self._from_answer(messages, progress)
        (message,) = messages
        return self._from_answer(message)


def size_of_network(network: Network) -> dict[str, int]:
    """Return the counts of a network that admission needs."""
    sets = [element.windings.size for element in network.elements if isinstance(element, Windings)]
    return {
        "winding_count": max(sets, default=0),
        "unknown_count": len(network.nodes) + sum(sets) + len(network.elements),
        "coupling_count": sum(size**2 for size in sets),
    }


def column_count(network: Network, observe: Any) -> int:
    """Return how many columns an answer has: what is observed, else all node voltages and winding currents."""
    if observe:
        return len(observe)
    return len(network.nodes) + sum(item.windings.size for item in network.elements if isinstance(item, Windings))


def point_count(stop_s: float, step_s: float, recording: Recording | None = None) -> int:
    """Return about how many rows a run returns, for admission; 0 where the numbers make no sense.

    A recording keeps every so many samples of its window, with an envelope three rows for each.
    """
    span_s, rows = stop_s, 1
    if recording is not None:
        last_s = stop_s if recording.until_s is None else min(stop_s, recording.until_s)
        span_s, rows = last_s - recording.from_s, 3 if recording.envelope else 1
        step_s *= recording.every
    ratio = span_s / step_s if step_s > 0 and span_s >= 0 else 0.0
    return rows * (int(ratio) + 1) if 0.0 <= ratio < 2.0**60 else 0
