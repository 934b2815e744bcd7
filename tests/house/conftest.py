"""The tree as the house tests see it: the files git tracks, and the parsed Python among them."""

from __future__ import annotations

import ast
import subprocess
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]


@pytest.fixture(scope="session")
def root() -> Path:
    """The top of the project."""
    return ROOT


@pytest.fixture(scope="session")
def tracked(root: Path) -> list[Path]:
    """Every file of the project, relative to its top: what git tracks, and what it would not ignore."""
    listing = subprocess.run(
        ["git", "ls-files", "--cached", "--others", "--exclude-standard", "-z"],
        cwd=root, capture_output=True, check=True, text=True,
    )  # fmt: skip
    return sorted({Path(name) for name in listing.stdout.split("\0") if name and (root / name).is_file()})


@pytest.fixture(scope="session")
def modules(root: Path, tracked: list[Path]) -> dict[str, ast.Module]:
    """Every module of both packages by its dotted name, parsed; the generated stubs are left out."""
    found: dict[str, ast.Module] = {}
    for path in tracked:
        if path.suffix == ".py" and path.parts[0] in ("client", "service") and "v1" not in path.parts:
            parts = path.with_suffix("").parts[1:]
            name = ".".join(parts[:-1] if parts[-1] == "__init__" else parts)
            found[name] = ast.parse((root / path).read_text(encoding="utf-8"), filename=str(path))
    return found
