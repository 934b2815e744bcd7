"""The figures of the demonstration: each is printed beside its golden value and compared to the last golden digit."""

from __future__ import annotations

import os
import sys
from typing import Any


class Figures:
    """Prints ``figure NAME computed VALUE golden VALUE`` and remembers which differ."""

    def __init__(self) -> None:
        self.count = 0
        self.wrong: list[str] = []

    def compare(self, name: str, computed: Any, golden: str) -> None:
        """Compare one figure: texts must be equal, numbers may differ by one unit of the last golden digit."""
        if isinstance(computed, str | int):
            shown, agrees = str(computed), str(computed) == golden
        else:
            decimals = len(golden.partition(".")[2])
            shown = f"{computed:.{decimals + 1}f}"
            agrees = abs(computed - float(golden)) <= 10.0**-decimals
        print(f"figure {name} computed {shown} golden {golden}" + ("" if agrees else "  DIFFERS"), flush=True)
        self.count += 1
        if not agrees:
            self.wrong.append(name)


def title(text: str) -> None:
    """Print a heading, in bold on a terminal that wants it."""
    plain = "NO_COLOR" in os.environ or os.environ.get("TERM") == "dumb" or not sys.stdout.isatty()
    print(f"\n{text}" if plain else f"\n\033[1m{text}\033[0m", flush=True)


def cautions(*answers: Any) -> None:
    """Print every caution of some answers once."""
    for message in dict.fromkeys(caution.message for answer in answers for caution in answer.cautions):
        print(f"caution: {message}", flush=True)
