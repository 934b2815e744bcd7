"""What every element has: texts and numbers whose types are checked where it is made."""

from __future__ import annotations

from interwind.errors import InvalidRequest
from interwind.model.frozen import plain_float


class Named:
    """Checks the texts and numbers that every element has; what they may be is the service's judgement."""

    __slots__ = ()
    _texts: tuple[str, ...] = ("name", "a", "b")
    _numbers: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        for field in self._texts:
            text = getattr(self, field)
            if not isinstance(text, str) or not text:
                raise InvalidRequest.at(field, f"{text!r} found; a non-empty text is expected")
        for field in self._numbers:
            object.__setattr__(self, field, plain_float(getattr(self, field), field))
