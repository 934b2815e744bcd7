"""Every finding code that the room of windings can utter is in the catalogue, with its meaning and its cure."""

from __future__ import annotations

import ast
from pathlib import Path

import interwind_service.windings
from interwind.model.finding_codes import FINDING_CODES

ROOM = Path(interwind_service.windings.__file__).parent


def uttered() -> set[str]:
    """Text constants in the shape of a code, wherever a finding is made from them."""
    codes = set()
    for path in ROOM.glob("*.py"):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Call) and getattr(node.func, "id", "") == "Finding" and node.args:
                first = node.args[0]
                codes |= {c.value for c in ast.walk(first) if isinstance(c, ast.Constant) and isinstance(c.value, str)}
    return codes


def test_codes_are_documented():
    """A code without an entry would leave the reader without a cure."""
    assert uttered() - set(FINDING_CODES) == set()


def test_entries_are_sentences():
    """Meaning and cure are full sentences."""
    for code, entry in FINDING_CODES.items():
        assert code.isupper()
        for text in (entry.meaning, entry.cure):
            assert text[0].isupper()
            assert text.endswith(".")
