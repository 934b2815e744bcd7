"""`to_json` and `from_json` for every value that has a message; the mapping itself is protobuf's own.

The model knows no messages, so the codec hands its two functions over when it is loaded (`register`).
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Self

_encode: Callable[[Any], str] | None = None
_decode: Callable[[type[Any], str], Any] | None = None


def register(encode: Callable[[Any], str], decode: Callable[[type[Any], str], Any]) -> None:
    """Take the codec's two directions; called once by `interwind.codec`."""
    global _encode, _decode
    _encode, _decode = encode, decode


class JsonForm:
    """Mixin of the values that travel: text in protobuf's JSON mapping, and back."""

    __slots__ = ()

    def to_json(self) -> str:
        """Return the value as JSON text."""
        assert_registered()
        return _encode(self)  # type: ignore[misc]

    @classmethod
    def from_json(cls, text: str) -> Self:
        """Read the value back from JSON text; `InvalidRequest` names what does not fit."""
        assert_registered()
        return _decode(cls, text)  # type: ignore[misc,no-any-return]


def assert_registered() -> None:
    """Say plainly that the package was loaded in a way that left the codec out."""
    if _encode is None:
        raise RuntimeError("import interwind before using to_json or from_json: it loads the codec")
