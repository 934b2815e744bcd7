"""A network: elements between named nodes, one reference node, and ports where it is looked into."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from interwind.errors import InvalidRequest, field_path
from interwind.model.elements import ELEMENTS, Element, IdealTransformer, Windings
from interwind.model.frozen import plain_float
from interwind.model.json_form import JsonForm


@dataclass(frozen=True, slots=True)
class Port:
    """A pair of nodes: voltage from ``a`` to ``b``, current into ``a``. It loads nothing by itself."""

    name: str
    a: str
    b: str
    reference_ohm: float = 50.0

    def __post_init__(self) -> None:
        for field in ("name", "a", "b"):
            if not isinstance(getattr(self, field), str) or not getattr(self, field):
                raise InvalidRequest.at(field, f"{getattr(self, field)!r} found; a non-empty text is expected")
        object.__setattr__(self, "reference_ohm", plain_float(self.reference_ohm, "reference_ohm"))


@dataclass(frozen=True, slots=True, eq=False)
class Network(JsonForm):
    """Elements between named nodes.

    Parameters
    ----------
    reference : the node whose voltage is 0.
    elements : at least one; their names are distinct.
    ports : where a port response looks in.
    references : further zero nodes, one for each part that has no conducting path to ``reference``; a part without
        one gets the finish of its first winding, said as the finding ISOLATED_PART.

    Raises
    ------
    InvalidRequest : a name stands twice, or a type does not fit; the field is named.
    """

    reference: str
    elements: tuple[Element, ...]
    ports: tuple[Port, ...] = ()
    references: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        if not isinstance(self.reference, str) or not self.reference:
            raise InvalidRequest.at("reference", f"{self.reference!r} found; the name of a node is expected")
        elements = tuple(self.elements)
        if not elements:
            raise InvalidRequest.at("elements", "none found; at least one is expected")
        _distinct(elements, ELEMENTS, "elements")
        ports = tuple(self.ports)
        _distinct(ports, (Port,), "ports")
        object.__setattr__(self, "elements", elements)
        object.__setattr__(self, "ports", ports)
        object.__setattr__(self, "references", tuple(self.references))

    @property
    def nodes(self) -> tuple[str, ...]:
        """Every node name, the reference first, then in order of appearance."""
        found: dict[str, None] = {self.reference: None}
        for element in self.elements:
            found.update(dict.fromkeys(element_nodes(element)))
        return tuple(found)

    def element(self, name: str) -> Element:
        """Return the element of that name."""
        for element in self.elements:
            if element.name == name:
                return element
        raise InvalidRequest.at("name", f"{name!r} is no element of this network")


def element_nodes(element: Element) -> tuple[str, ...]:
    """Return the nodes an element carries current between, in its own order; control nodes carry none."""
    if isinstance(element, Windings):
        return tuple(node for pair in element.terminals.values() for node in pair)
    if isinstance(element, IdealTransformer):
        return (element.a, element.b, element.c, element.d)
    return (element.a, element.b)


def _distinct(items: Iterable[object], allowed: tuple[type, ...], field: str) -> None:
    seen: dict[str, int] = {}
    for position, item in enumerate(items):
        with field_path(f"{field}[{position}]"):
            if not isinstance(item, allowed):
                raise InvalidRequest.at("", f"{type(item).__name__} found; it does not belong among {field}")
            name = item.name  # type: ignore[attr-defined]
            if name in seen:
                raise InvalidRequest.at("name", f"{name!r} is already {field}[{seen[name]}]; names are distinct")
            seen[name] = position
