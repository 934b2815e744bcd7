"""Nobody imports upwards: each room may use the rooms below it, and the rooms that think never see a message."""

from __future__ import annotations

import ast
import sys
from collections.abc import Iterator

LANGUAGE = {"model", "errors"}
# A room not yet placed may use nothing; test_every_room_is_on_the_ladder names it.
UNPLACED: tuple[set[str], set[str]] = (set(), set())
GROUND = {"tolerances", "version", "progress", "rows"}
# Each room of the service: what it may import of the service, and of the client's language.
SERVICE: dict[str, tuple[set[str], set[str]]] = {
    "tolerances": (set(), set()),
    "version": (set(), set()),
    "progress": ({"tolerances"}, set()),
    "rows": ({"tolerances"}, {"model"}),
    "windings": (GROUND, LANGUAGE),
    "network": (GROUND, LANGUAGE),
    "response": (GROUND | {"windings", "network"}, LANGUAGE),
    "engine": (GROUND | {"windings", "network", "response"}, LANGUAGE),
    "workers": (GROUND | {"engine"}, LANGUAGE | {"codec", "v1"}),
    "batch": (GROUND | {"engine", "workers"}, LANGUAGE),
    "server": (GROUND | {"engine", "workers", "batch"}, LANGUAGE | {"codec", "v1"}),
    "testing": (set(), set()),
    "__main__": ({"workers", "server"}, set()),
    "": (set(), set()),
}
# The floors of the largest room, from below; what stands beside them in that room may use them all.
FLOORS: dict[str, set[str]] = {
    "request": set(),
    "drive": set(),
    "equations": set(),
    "sinusoidal": {"request", "equations"},
    "stacked": {"equations"},
    "linear": {"request", "drive", "equations", "sinusoidal"},
    "switched": {"request", "drive"},
    "smooth": {"drive", "switched"},
    "steady": {"request", "drive", "equations", "linear", "switched", "smooth"},
}
CLIENT: dict[str, set[str]] = {
    "errors": set(),
    "model": {"errors"},
    "codec": {"errors", "model", "v1"},
    "channel": {"errors"},
    "embedded": {"errors"},
    "calling": {"errors", "codec", "channel"},
    "uploads": {"errors", "codec", "v1"},
    "batch": {"errors", "model", "codec", "v1", "channel", "calling"},
    "client": {"errors", "model", "codec", "v1", "channel", "embedded", "calling", "uploads", "batch"},
    "plot": {"errors", "model", "codec"},
    "cli": {"errors", "model", "codec", "v1", "channel", "embedded", "client", "plot", ""},
    "": {"errors", "model", "codec", "channel", "embedded", "client", "batch"},
}
# What else a room may stand on, beside the standard library. The rooms that think see no message and no socket.
NUMERIC = {"numpy", "scipy"}
WIRE = {"numpy", "grpc", "google", "grpc_status"}
FOREIGN: dict[str, set[str]] = {
    "interwind_service.tolerances": set(),
    "interwind_service.version": set(),
    "interwind_service.progress": set(),
    "interwind_service.rows": {"numpy"},
    "interwind_service.testing": set(),
    "interwind_service.windings": NUMERIC,
    "interwind_service.network": NUMERIC,
    "interwind_service.response": NUMERIC,
    "interwind_service.engine": NUMERIC,
    "interwind_service.workers": WIRE | {"scipy", "threadpoolctl"},
    "interwind_service.batch": {"numpy", "distributed"},
    "interwind_service.server": WIRE | {"grpc_health", "grpc_reflection", "prometheus_client", "threadpoolctl"},
    "interwind_service.__main__": set(),
    "interwind_service": set(),
    "interwind.errors": set(),
    "interwind.model": {"numpy"},
    "interwind.codec": WIRE,
    "interwind.channel": {"grpc"},
    "interwind.embedded": set(),
    "interwind.calling": {"grpc"},
    "interwind.uploads": set(),
    "interwind.batch": {"numpy"},
    "interwind.client": WIRE,
    "interwind.plot": {"numpy", "matplotlib"},
    "interwind.cli": {"numpy", "google"},
    "interwind": set(),
}


def imports(tree: ast.Module) -> Iterator[tuple[int, str]]:
    """Every dotted name a module imports, also inside functions; ``from a import b`` counts as ``a.b``."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from ((node.lineno, alias.name) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"line {node.lineno}: relative imports hide the room; write the full name"
            yield from ((node.lineno, f"{node.module}.{alias.name}") for alias in node.names)


def room_of(dotted: str, names: set[str]) -> str:
    """The room a dotted name stands in: its second part, when that is a module, else the package itself."""
    parts = dotted.split(".")
    return parts[1] if len(parts) > 1 and ".".join(parts[:2]) in names else ""


def packages_of(modules) -> set[str]:
    """Every module and every package on the way to it."""
    return {".".join(name.split(".")[:depth]) for name in modules for depth in range(1, name.count(".") + 2)}


def test_every_import_goes_down_the_ladder(modules):
    """A room imports only the rooms below it, and only the libraries its work needs."""
    names = packages_of(modules) | {"interwind.v1"}
    offenders = []
    for name, tree in modules.items():
        package, room = name.split(".")[0], room_of(name, names)
        for line, target in imports(tree):
            top, where = target.split(".")[0], room_of(target, names)
            if top == package and where == room:
                continue
            if top == "interwind_service":
                allowed = package == top and where in SERVICE.get(room, UNPLACED)[0] | {""}
            elif top == "interwind":
                allowed = where in (
                    SERVICE.get(room, UNPLACED)[1] if package == "interwind_service" else CLIENT.get(room, ())
                )
            else:
                home = f"{package}.{room}" if room else package
                allowed = top in sys.stdlib_module_names or top in FOREIGN.get(home, ())
            if not allowed:
                offenders.append(f"{name}:{line} imports {target}")
    assert [] == offenders


def test_every_room_is_on_the_ladder(modules):
    """A new room is placed on the ladder before it is furnished."""
    names = packages_of(modules)
    rooms = {(name.split(".")[0], room_of(name, names)) for name in modules}
    known = {("interwind_service", room) for room in SERVICE} | {("interwind", room) for room in CLIENT}
    assert set() == rooms - known


def floor_of(dotted: str) -> str:
    """The floor of the response room that a dotted name stands on, "" where it stands on none."""
    parts = dotted.split(".")
    return parts[2] if parts[:2] == ["interwind_service", "response"] and len(parts) > 3 else ""


def test_every_floor_stands_on_lower_ones(modules):
    """Nothing on a floor uses a higher floor, or what the engine calls."""
    offenders = []
    for name, tree in modules.items():
        if (floor := floor_of(name)) == "":
            continue
        for line, target in imports(tree):
            inside = target.startswith("interwind_service.response.")
            if inside and floor_of(target) not in FLOORS.get(floor, set()) | {floor}:
                offenders.append(f"{name}:{line} imports {target}")
    assert [] == offenders
    assert set(FLOORS) == {floor_of(name) for name in modules} - {""}
