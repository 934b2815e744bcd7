"""How windings are named in a message."""

from __future__ import annotations

from interwind_service.tolerances import LABELS_SPELLED_OUT


def spelled(labels: tuple[str, ...]) -> str:
    """Return the labels as text, the first few spelled out and the rest counted."""
    more = len(labels) - LABELS_SPELLED_OUT
    return ", ".join(labels[:LABELS_SPELLED_OUT]) + (f" and {more} more" if more > 0 else "")
