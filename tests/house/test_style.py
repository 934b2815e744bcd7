"""Habits that a reader relies on: thresholds in one place, errors mapped in one place, numerics that never log."""

from __future__ import annotations

import ast

# Below this a literal is a tolerance, not a coefficient; above its inverse it is a stand-in for infinity.
SMALL = 1e-3
NUMBERS = "interwind_service.tolerances"
TABLES = {"interwind_service.response.switched.tableau"}
UNIT_PREFIXES = {"UNIT_FACTORS", "_MICRO"}
NUMERIC_ROOMS = ("windings", "network", "response", "engine", "tolerances")
# The outermost edges: one for calls, one for the worker process that serves them.
EDGES = {"interwind_service.server.boundary", "interwind_service.workers.process"}

# The date is told and retention bridges the gap between two servers with it; whatever else waits, waits monotonically.
WALL_CLOCKS = {"time.time", "time.time_ns", "datetime.now", "datetime.utcnow", "datetime.today", "date.today"}
WALL_CLOCK_READERS = {"interwind_service.batch.store"}

# Methods whose signature somebody else wrote: concurrent.futures.Executor.
GIVEN_SIGNATURES = {"shutdown"}


def thresholds(root):
    """The files that hold the thresholds."""
    return sorted((root / "service/interwind_service/tolerances").glob("*.py"))


def service(modules):
    """The modules of the service by name."""
    return {name: tree for name, tree in modules.items() if name.startswith("interwind_service")}


def test_thresholds_stand_in_one_file(modules):
    """A number such as a tolerance has a name and a reason, and both stand in tolerances; unit prefixes are none."""
    offenders = []
    for name, tree in service(modules).items():
        prefixes = {
            constant
            for node in tree.body
            if isinstance(node, ast.Assign) and UNIT_PREFIXES & {ast.unparse(target) for target in node.targets}
            for constant in ast.walk(node)
        }
        for node in ast.walk(tree):
            small = isinstance(node, ast.Constant) and isinstance(node.value, float) and 0 < node.value < SMALL
            if small and node not in prefixes and not name.startswith(NUMBERS) and name not in TABLES:
                offenders.append(f"{name}:{node.lineno}: {node.value!r}")
    assert [] == offenders


def test_every_threshold_has_its_reason(root):
    """Every threshold is named in upper case, its reason on its line or at the head of its paragraph."""
    offenders = []
    for path in thresholds(root):
        lines = path.read_text(encoding="utf-8").splitlines()
        for node in ast.parse("\n".join(lines)).body:
            if isinstance(node, ast.Assign | ast.AnnAssign):
                target = node.targets[0] if isinstance(node, ast.Assign) else node.target
                above = node.lineno - 2
                while lines[above] and not lines[above].startswith("#"):
                    above -= 1
                said = lines[above].startswith("#") or "#" in lines[node.end_lineno - 1]
                if not (isinstance(target, ast.Name) and target.id.isupper() and said):
                    offenders.append(f"{path.name}:{node.lineno}: {lines[node.lineno - 1]}")
    assert [] == offenders


def test_no_threshold_is_named_twice(root):
    """One name, one value: the files of thresholds share one namespace."""
    named = [
        node.targets[0].id
        for path in thresholds(root)
        for node in ast.parse(path.read_text(encoding="utf-8")).body
        if isinstance(node, ast.Assign) and isinstance(node.targets[0], ast.Name)
    ]
    assert sorted(set(named)) == sorted(named)


def test_every_threshold_is_used(modules):
    """A threshold nobody reads is deleted."""
    defined = {
        node.targets[0].id
        for name, tree in modules.items()
        if name.startswith(NUMBERS)
        for node in tree.body
        if isinstance(node, ast.Assign) and isinstance(node.targets[0], ast.Name)
    }
    used = set()
    for tree in service(modules).values():
        for node in ast.walk(tree):
            if isinstance(node, ast.Attribute):
                used.add(node.attr)
            elif isinstance(node, ast.Name) and isinstance(node.ctx, ast.Load):
                used.add(node.id)
    assert set() == defined - used


def test_everything_is_caught_in_one_place_only(modules):
    """Outside the edges an exception is known by its class, or passed on after tidying up."""
    offenders = []
    for name, tree in modules.items():
        for node in ast.walk(tree):
            if isinstance(node, ast.ExceptHandler) and name not in EDGES:
                caught = "everything" if node.type is None else ast.unparse(node.type)
                last = node.body[-1]
                passed_on = isinstance(last, ast.Raise) and last.exc is None
                if caught in ("everything", "Exception", "BaseException") and not passed_on:
                    offenders.append(f"{name}:{node.lineno}")
    assert [] == offenders


def test_assert_is_for_tests(modules):
    """A check that vanishes under -O is no check."""
    found = [
        f"{name}:{node.lineno}"
        for name, tree in modules.items()
        for node in ast.walk(tree)
        if isinstance(node, ast.Assert)
    ]
    assert [] == found


def test_numerics_never_log(modules):
    """What the numerics have to say is in the answer: a finding, a caution, the evidence."""
    offenders = []
    for name, tree in service(modules).items():
        if name.split(".")[1:2] and name.split(".")[1] in NUMERIC_ROOMS:
            for node in ast.walk(tree):
                if isinstance(node, ast.Import) and any(alias.name in ("logging", "warnings") for alias in node.names):
                    offenders.append(f"{name}:{node.lineno}")
                if isinstance(node, ast.Name) and node.id == "print":
                    offenders.append(f"{name}:{node.lineno}")
    assert [] == offenders


def test_the_wall_clock_is_read_in_one_place(modules):
    """It may jump by years; nothing that runs, waits or is kept alive may depend on it."""
    offenders = [
        f"{name}:{node.lineno}"
        for name, tree in modules.items()
        if name not in WALL_CLOCK_READERS
        for node in ast.walk(tree)
        if (isinstance(node, ast.Attribute) and ast.unparse(node).removeprefix("datetime.") in WALL_CLOCKS)
        or (isinstance(node, ast.ImportFrom) and node.module == "time" and "time" in {n.name for n in node.names})
    ]
    assert [] == offenders


def test_no_boolean_by_position(modules):
    """A bare True at a call tells the reader nothing: a flag of a public function is by keyword, or an enum."""
    offenders = []
    for name, tree in modules.items():
        for node in ast.walk(tree):
            if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef) and not node.name.startswith("_"):
                if node.name in GIVEN_SIGNATURES:
                    continue
                positional = node.args.posonlyargs + node.args.args
                flags = [a.arg for a in positional if isinstance(a.annotation, ast.Name) and a.annotation.id == "bool"]
                offenders.extend(f"{name}:{node.lineno} {node.name}({flag})" for flag in flags)
    assert [] == offenders
