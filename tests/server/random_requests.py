"""Requests nobody would write, drawn by Hypothesis from the descriptors of the contract and from changed good ones."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from hypothesis import strategies as st

import interwind as iw
from interwind.codec.calls import BY_ENGINE
from interwind.v1 import array_pb2

NAMES = st.sampled_from(["a", "b", "c", "g", "drive", "rail", "T1", "r1", "", "é", "x" * 300])
NUMBERS = st.one_of(
    st.sampled_from([0.0, -0.0, 1.0, -1.0, 0.5, 50.0, 1e-3, 1e-6, 1e-9, 1e-12, 1e6, 1e9]),
    st.sampled_from([float("nan"), float("inf"), float("-inf"), 5e-324, 1e-300, 1e300, 1.7e308]),
    st.floats(-2.0, 2.0),
)
COUNTS = st.sampled_from([0, 1, 2, 3, 4, -1, 17, 1 << 40, -(1 << 62)])


@st.composite
def arrays(draw: st.DrawFn) -> array_pb2.Array:
    """An array that is mostly square or a vector, and sometimes contradicts itself."""
    shape = draw(st.sampled_from([[2, 2], [2, 2], [3, 3], [2], [1], [], [0], [2, 3], [-1], [1 << 40, 1 << 40]]))
    count = int(np.prod([max(length, 0) for length in shape])) if max(shape, default=1) < 10 else 4
    count += draw(st.sampled_from([0, 0, 0, 0, 1]))
    numbers = draw(st.lists(NUMBERS, min_size=count, max_size=count))
    message = array_pb2.Array(shape=shape, dtype=draw(st.sampled_from([0, 1, 1, 1, 1, 2, 3, 9])))
    way = draw(st.sampled_from(["data", "data", "values", "values", "hash", "none"]))
    if way == "data":
        message.data = np.array(numbers, "<f8").tobytes()[: draw(st.sampled_from([None, None, None, -1]))]
    elif way == "values":
        message.values.values.extend(numbers)
    elif way == "hash":
        message.content_hash = draw(st.sampled_from(["", "ab" * 32, "../../etc/passwd", "Z" * 64]))
    return message


@st.composite
def messages(draw: st.DrawFn, message_class: type[Any], depth: int = 0) -> Any:
    """Any message of a class: every field drawn on its own."""
    message = message_class()
    for field in message.DESCRIPTOR.fields:
        chosen = field.containing_oneof
        if chosen is not None and (
            message.WhichOneof(chosen.name) or field is not draw(st.sampled_from(list(chosen.fields)))
        ):
            continue
        if field.is_repeated if hasattr(field, "is_repeated") else field.label == field.LABEL_REPEATED:
            for _ in range(draw(st.integers(0, 2 if depth else 4))):
                _put(draw, message, field, depth, repeated=True)
        elif field.message_type is None or draw(st.booleans()) or depth == 0:
            _put(draw, message, field, depth, repeated=False)
    return message


def _put(draw: Callable[..., Any], message: Any, field: Any, depth: int, *, repeated: bool) -> None:
    if field.message_type is not None:
        if field.message_type.GetOptions().map_entry:
            return
        if depth > 6:
            return
        kind = field.message_type._concrete_class
        value = draw(arrays()) if field.message_type.name == "Array" else draw(messages(kind, depth + 1))
        target = getattr(message, field.name)
        target.append(value) if repeated else target.CopyFrom(value)
        return
    value = {
        field.CPPTYPE_STRING: lambda: draw(NAMES) if field.type == field.TYPE_STRING else draw(st.binary(max_size=20)),
        field.CPPTYPE_DOUBLE: lambda: draw(NUMBERS),
        field.CPPTYPE_BOOL: lambda: draw(st.booleans()),
        field.CPPTYPE_ENUM: lambda: draw(st.sampled_from([v.number for v in field.enum_type.values])),
        field.CPPTYPE_INT32: lambda: max(-(1 << 31), min((1 << 31) - 1, draw(COUNTS))),
        field.CPPTYPE_INT64: lambda: draw(COUNTS),
    }[field.cpp_type]()
    if repeated:
        getattr(message, field.name).append(value)
    else:
        setattr(message, field.name, value)


def good_requests() -> dict[str, Any]:
    """One request of each call that is answered with numbers."""
    pair = iw.WindingSet(("drive", "rail"), [[1e-3, 0.2e-3], [0.2e-3, 60e-6]], [0.6, 0.03])
    common = [
        iw.Windings("T1", pair, {"drive": ("a", "g"), "rail": ("b", "g")}),
        iw.VoltageSource("v1", "a", "g", waveform=iw.Step(1.0), phasor=1.0),
        iw.Resistor("r1", "b", "g", 50.0),
        iw.Capacitor("c1", "b", "g", 1e-10),
    ]
    linear = iw.Network("g", common, [iw.Port("p1", "b", "g")])
    gate = iw.Gate(1e-5, 4e-6)
    devices = [iw.Switch("s1", "c", "a", gate, 0.1, 1e6), iw.Diode("d1", "g", "a", 0.5, 0.01, 1e6)]
    source = iw.VoltageSource("v1", "c", "g", iw.Constant(1.0))
    switched = iw.Network("g", [common[0], source, *common[2:], *devices])
    readings = [
        iw.OpenInductance("drive", 1e-3, 1e-6), iw.OpenInductance("rail", 60e-6, 1e-7),
        iw.ShortedInductance("drive", ("rail",), 3e-4, 1e-6),
    ]  # fmt: skip
    arguments = {
        "check": {"windings": pair},
        "repair": {"windings": pair, "trusted": (("drive", "rail"),), "method": iw.RepairMethod.NEAREST},
        "identify": {"labels": pair.labels, "readings": readings},
        "characterize": {"windings": pair, "connections": (iw.InSeries("s", ("drive", "rail")),)},
        "stamp": {"network": linear},
        "frequency_response": {"network": linear, "frequency_hz": np.array([0.0, 1e3, 1e6])},
        "poles": {"network": linear, "around_hz": 1e5},
        "port_response": {"network": linear, "frequency_hz": np.array([1e3, 1e6])},
        "port_figures": {"network": linear, "frequency_hz": np.array([1e3]), "figures": [iw.InputImpedance("p1")]},
        "time_response": {"network": linear, "stop_s": 1e-5, "step_s": 1e-7},
        "periodic_response": {"network": switched, "period_s": 1e-5, "step_s": 1e-6},
    }
    return {name: BY_ENGINE[name].encode_request(**values) for name, values in arguments.items()}


GOOD = good_requests()


@st.composite
def changed(draw: st.DrawFn, engine: str) -> Any:
    """A good request with one to three fields, anywhere in its depth, drawn anew."""
    message = type(GOOD[engine])()
    message.CopyFrom(GOOD[engine])
    for _ in range(draw(st.integers(1, 3))):
        _change(draw, message)
    return message


def _change(draw: Callable[..., Any], message: Any) -> None:
    """Walk down to some field and draw it anew, or take an entry away, or put one in twice."""
    field = draw(st.sampled_from(list(message.DESCRIPTOR.fields)))
    value = getattr(message, field.name)
    repeated = field.is_repeated if hasattr(field, "is_repeated") else field.label == field.LABEL_REPEATED
    if repeated and field.message_type is not None and not field.message_type.GetOptions().map_entry and len(value):
        position = draw(st.integers(0, len(value) - 1))
        act = draw(st.sampled_from(["down", "down", "down", "drop", "twice"]))
        if act == "drop":
            del value[position]
        elif act == "twice":
            value.append(value[position])
        else:
            _change(draw, value[position])
    elif field.message_type is not None and not repeated and message.HasField(field.name):
        if field.message_type.name == "Array":
            value.CopyFrom(draw(arrays()))
        else:
            _change(draw, value)
    elif repeated or field.message_type is None:
        _put(draw, message, field, 3, repeated=repeated)


@st.composite
def requests(draw: st.DrawFn) -> tuple[str, Any]:
    """An engine function's name and a request for it."""
    engine = draw(st.sampled_from(sorted(GOOD)))
    if draw(st.integers(0, 3)) == 0:
        return engine, draw(messages(type(GOOD[engine])))
    return engine, draw(changed(engine))
