"""Port figures <-> messages."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import fields
from typing import Any

from interwind.codec.array import array_from_message, array_to_message
from interwind.codec.windings import frozen_from, noticed_from_message, noticed_to_messages
from interwind.errors import InvalidRequest, field_path
from interwind.model import port_figures as model
from interwind.v1 import response_service_pb2 as pb2

_PAIRS: dict[str, Any] = {
    "scattering": model.Scattering,
    "voltage_transfer": model.VoltageTransfer,
    "current_transfer": model.CurrentTransfer,
}
_PLACES: dict[str, Any] = {"input_impedance": model.InputImpedance, "input_angle": model.InputAngle}
_PORTS: dict[str, tuple[Any, str]] = {
    "optimum_load": (model.OptimumLoad, "receiver"),
    "optimum_drive": (model.OptimumDrive, "transmitter"),
}
_MODES: dict[int, Any] = {pb2.PORT_MODE_DIFFERENTIAL: model.Differential, pb2.PORT_MODE_COMMON: model.Common}
_KINDS: dict[type[Any], str] = {
    **{cls: kind for kind, cls in _PAIRS.items()},
    **{cls: kind for kind, cls in _PLACES.items()},
    **{cls: kind for kind, (cls, _) in _PORTS.items()},
    model.InsertionLoss: "insertion_loss",
    model.LinkEfficiency: "link_efficiency",
}


def figures_to_messages(figures: Iterable[Any]) -> list[pb2.PortFigure]:
    """Return the messages of the figures asked for."""
    if isinstance(figures, model.PortFigure):
        raise InvalidRequest.at("figures", f"{type(figures).__name__} found; a list of figures is expected")
    messages = []
    for position, figure in enumerate(figures):
        if type(figure) not in _KINDS:
            raise InvalidRequest.at(
                f"figures[{position}]", f"{type(figure).__name__} found; one of the port figures is expected"
            )
        messages.append(_figure_to_message(figure))
    return messages


def figures_from_messages(messages: Iterable[Any]) -> tuple[model.PortFigure, ...]:
    """Return the figures of messages."""
    figures = []
    for position, message in enumerate(messages):
        with field_path(f"figures[{position}]"):
            figures.append(_figure_from_message(message))
    return tuple(figures)


def port_figures_to_message(answer: model.PortFigures) -> pb2.ComputePortFiguresResponse:
    """Return the message of an answer."""
    return pb2.ComputePortFiguresResponse(
        frequency_hz=array_to_message(answer.frequency_hz),
        figures=figures_to_messages(answer.figures),
        samples=array_to_message(answer.samples),
        **noticed_to_messages(answer),
    )


def port_figures_from_message(message: pb2.ComputePortFiguresResponse) -> model.PortFigures:
    """Return the answer of a message."""
    samples = array_from_message(message.samples, "samples", real=False)
    samples.setflags(write=False)
    return model.PortFigures(
        figures_from_messages(message.figures),
        frozen_from(message.frequency_hz, "frequency_hz"),
        samples,
        **noticed_from_message(message),
    )


def figure_heading(figure: model.PortFigure) -> str:
    """Spell a figure as a column heading: ``scattering p2 p1``, ``insertion_loss differential p1 p2 p3 50 50``."""
    return " ".join([_KINDS[type(figure)], *_words(figure)])


def _words(value: Any) -> Iterator[str]:
    if isinstance(value, str):
        yield value
    elif isinstance(value, tuple):
        yield ",".join(value)
    elif isinstance(value, float | int):
        yield f"{value:g}"
    else:
        if isinstance(value, model.Differential | model.Common):
            yield type(value).__name__.lower()
        for field in fields(value):
            yield from _words(getattr(value, field.name))


def _figure_to_message(figure: Any) -> pb2.PortFigure:
    kind = _KINDS[type(figure)]
    content: Any
    if kind in _PAIRS:
        content = pb2.PlacePair(measured=_place_to_message(figure.measured), driven=_place_to_message(figure.driven))
    elif kind in _PLACES:
        content = _place_to_message(figure.place)
    elif kind in _PORTS:
        content = _link_to_message(figure.link, getattr(figure, _PORTS[kind][1]))
    elif kind == "link_efficiency":
        content = _link_to_message(figure, "")
    else:
        content = pb2.InsertionLoss(
            source=_place_to_message(figure.source),
            load=_place_to_message(figure.load),
            source_ohm=figure.source_ohm,
            load_ohm=figure.load_ohm,
        )
    return pb2.PortFigure(**{kind: content})


def _figure_from_message(message: Any) -> model.PortFigure:
    kind = message.WhichOneof("figure")
    if kind is None:
        raise InvalidRequest.at("figure", "none found; state which figure is asked for")
    content = getattr(message, kind)
    figure: model.PortFigure
    if kind in _PAIRS:
        figure = _PAIRS[kind](_place_from_message(content.measured), _place_from_message(content.driven))
        return figure
    if kind in _PLACES:
        figure = _PLACES[kind](_place_from_message(content))
        return figure
    if kind == "insertion_loss":
        source, load = _place_from_message(content.source), _place_from_message(content.load)
        return model.InsertionLoss(source, load, content.source_ohm, content.load_ohm)
    link = model.LinkEfficiency(tuple(content.transmitters), tuple(content.receivers))
    figure = link if kind == "link_efficiency" else _PORTS[kind][0](link, content.port)
    return figure


def _place_to_message(place: model.Place) -> pb2.PortPlace:
    if isinstance(place, str):
        return pb2.PortPlace(a=place)
    mode = pb2.PORT_MODE_DIFFERENTIAL if isinstance(place, model.Differential) else pb2.PORT_MODE_COMMON
    return pb2.PortPlace(mode=mode, a=place.a, b=place.b)


def _place_from_message(message: Any) -> model.Place:
    if message.mode == pb2.PORT_MODE_UNSPECIFIED:
        return str(message.a)
    if message.mode not in _MODES:
        raise InvalidRequest.at("mode", f"{message.mode} found; a mode of a pair of ports is expected")
    place: model.Place = _MODES[message.mode](message.a, message.b)
    return place


def _link_to_message(link: model.LinkEfficiency, port: str) -> pb2.PowerLink:
    return pb2.PowerLink(transmitters=link.transmitters, receivers=link.receivers, port=port)
