"""The usual slips of the bench, told from the ratio of what was read to what the other readings say."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from interwind.model.frozen import FloatArray
from interwind_service.tolerances import SLIP_RATIO
from interwind_service.windings.intake import Taken
from interwind_service.windings.readings import windings_of

UNIT_FACTORS = (1e-9, 1e-6, 1e-3, 1e3, 1e6, 1e9)


def slip_of(one: Taken, would_fit: float, L: FloatArray, labels: Sequence[str]) -> str:
    """Return the sentence for the slip that explains an outlying reading, or the advice to take it again.

    ``would_fit`` is the value the other readings speak for, ``L`` (n, n), H, their matrix.
    """
    if would_fit * one.value < 0:
        return "Its sign would fit turned round: check start and finish."
    if would_fit * one.value > 0:
        names = windings_of(one.reading)
        own = [L[labels.index(name), labels.index(name)] for name in names]
        ratio = one.value / would_fit
        if any(_near(ratio, other / own[0]) and not _near(other, own[0]) for other in own[1:]):
            return "It looks referred to the other side of the pair."
        for factor in UNIT_FACTORS:
            if _near(ratio, factor):
                return f"It is off by a factor {factor:g}: check the unit."
        for factor in (0.5, 2.0):
            if _near(ratio, factor):
                return f"It is off by a factor {factor:g}."
    return "Take it again."


def _near(ratio: float, factor: float) -> bool:
    return bool(abs(np.log(ratio / factor)) < np.log(SLIP_RATIO))
