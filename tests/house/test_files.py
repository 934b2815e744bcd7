"""The tree keeps its shape: known rooms at the top, small files with telling names, no word of anything but itself."""

from __future__ import annotations

import re

TOP = {"README.md", "DEVELOPERS.md", "LICENSE", "pyproject.toml", "proto", "client", "service", "tests", "deploy"}
CEILING = 350
VAGUE = {"utils", "util", "helpers", "helper", "common", "manager", "misc"}
GENERATED = "client/interwind/v1/"
WRITTEN = {".py", ".proto", ".sh", ".md", ".toml", ".yaml", ".yml", ".cfg", ".service", ""}

# Each word is put together from two halves, so that this file does not hold it.
WORDS = ["trans" + "cript", "lec" + "ture", "chat" + "bot", "co" + "pilot", "py" + "pi", "index" + "-url"]
MACHINE = re.compile("|".join(["/wo" + "rk/", "/ro" + "ot/", "/ho" + r"me/\w", "/tmp" + "/team", "/Us" + "ers/"]))
TRACKER = re.compile(r"\b(issue|ticket|PR)\s*#?\d+|(?<![\w&])#\d+\b", re.IGNORECASE)


def written(root, tracked):
    """Path and text of every file that people write, the generated stubs left out."""
    for path in tracked:
        if not path.as_posix().startswith(GENERATED) and path.suffix in WRITTEN:
            yield path, (root / path).read_text(encoding="utf-8")


def test_nothing_else_stands_at_the_top(tracked):
    """The top level holds the rooms of the house and dot-files."""
    assert set() == {path.parts[0] for path in tracked if not path.parts[0].startswith(".")} - TOP


def test_no_file_is_longer_than_the_ceiling(root, tracked):
    """One idea a file: nothing written by hand is longer than 350 lines."""
    long = {
        str(path): text.count("\n") for path, text in written(root, tracked) if path.suffix in (".py", ".proto", ".sh")
    }
    assert {} == {path: lines for path, lines in long.items() if lines > CEILING}


def test_no_name_is_vague(tracked):
    """A newcomer guesses the file's name; a name that fits everything tells nothing."""
    assert [] == [str(path) for path in tracked if VAGUE & {part.split(".")[0].lower() for part in path.parts}]


def test_the_tree_speaks_of_itself_alone(root, tracked):
    """No path of one machine, no tracker number, nothing of how the text came about."""
    offenders = []
    for path, text in written(root, tracked):
        for number, line in enumerate(text.splitlines(), 1):
            if MACHINE.search(line) or TRACKER.search(line) or any(word in line.lower() for word in WORDS):
                offenders.append(f"{path}:{number}: {line.strip()}")
    assert [] == offenders


def test_every_room_has_a_guide(root):
    """The contract, the service, the client and the deployment each explain themselves."""
    assert [] == [
        room for room in ("proto", "service", "client", "deploy") if not (root / room / "README.md").is_file()
    ]
