"""States at the start <-> messages: a list on the wire, a mapping in the model, so no state may have two values."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

from interwind.codec.observable import observable_from_message, observable_to_message
from interwind.errors import InvalidRequest, field_path
from interwind.model.response import Initial, SteadyStart


def initial_to_messages(initial: Initial, messages: Any) -> bool:
    """Add the stated values to a repeated field; return whether the run starts at the DC point instead."""
    if isinstance(initial, SteadyStart):
        return True
    for observable, value in (initial or {}).items():
        with field_path("initial"):
            messages.add(observable=observable_to_message(observable), value=float(value))
    return False


def initial_from_messages(messages: Iterable[Any], *, steady_start: bool) -> Initial:
    """Return the start of a message.

    Raises
    ------
    InvalidRequest : one state with two values, by the place of the second; values beside ``steady_start``.
    """
    stated: dict[Any, tuple[int, float]] = {}
    for position, item in enumerate(messages):
        with field_path(f"initial[{position}].observable"):
            observable = observable_from_message(item.observable)
        first, value = stated.setdefault(observable, (position, item.value))
        if item.value != value:
            raise InvalidRequest.at(
                f"initial[{position}]",
                f"{item.value!r} found for {observable!r}, but initial[{first}] states {value!r}: "
                f"{abs(item.value - value):.6g} apart; state it once",
                reason="CONTRADICTORY_START",
            )
    if steady_start and stated:
        raise InvalidRequest.at("initial", "values found beside steady_start; state one or the other")
    if steady_start:
        return SteadyStart()
    return {observable: value for observable, (_, value) in stated.items()} or None
