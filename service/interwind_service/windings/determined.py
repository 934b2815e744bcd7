"""Whether readings determine every entry of the matrix, and if not, which one is open and what to measure."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from interwind.errors import InvalidRequest
from interwind.model.frozen import FloatArray
from interwind_service.tolerances import READING_BLUNTEST, READING_SHARPEST, UNDETERMINED_SINGULAR_VALUE
from interwind_service.windings.fit import upper_row
from interwind_service.windings.intake import Taken
from interwind_service.windings.readings import predicted


def require_determined(used: Sequence[Taken], labels: Sequence[str], L: FloatArray) -> None:
    """Refuse readings that leave an entry open.

    The derivatives of the readings with respect to L_ij / sqrt(L_ii L_jj), each scaled to norm 1, must have full column
    rank; otherwise the entry with the largest part in their null space is named.

    Raises
    ------
    InvalidRequest : reason UNDETERMINED, with the winding or the pair and the reading that would settle it; or an
        uncertainty that rounding, or nothing at all, could hold to.
    """
    n = len(labels)
    root = np.sqrt(L.diagonal())
    rows = np.array([upper_row(predicted(one.reading, L, labels)[1] * np.outer(root, root)) for one in used])
    scale = np.linalg.norm(rows, axis=1)
    _require_sensible(used, scale)
    rows = rows / scale[:, None]
    _, values, V = np.linalg.svd(rows)
    rank = int(np.count_nonzero(values > UNDETERMINED_SINGULAR_VALUE * values[0]))
    if rank == rows.shape[1]:
        return
    open_part = np.linalg.norm(V[rank:], axis=0)
    i, j = (int(k[np.argmax(open_part)]) for k in np.triu_indices(n))
    if i == j:
        what, advice = labels[i], f"the inductance of {labels[i]} with all others open"
    else:
        what = f"{labels[i]}-{labels[j]}"
        advice = (
            f"the inductance of {labels[i]} with {labels[j]} shorted, or, where they are coupled weakly, of both in "
            "series aiding and opposing"
        )
    raise InvalidRequest.at(
        "readings",
        f"{len(used)} found; they leave {rows.shape[1] - rank} of {rows.shape[1]} inductances open, first of all "
        f"{what}: measure {advice}",
        reason="UNDETERMINED",
        windings=what,
        open_count=rows.shape[1] - rank,
    )


def _require_sensible(used: Sequence[Taken], scale: FloatArray) -> None:
    """Refuse an uncertainty out of all proportion to how far its reading (``scale`` (m,)) moves with the matrix."""
    for position, one in enumerate(used):
        least, most = READING_SHARPEST * scale[position], READING_BLUNTEST * scale[position]
        if not least <= one.uncertainty <= most:
            raise InvalidRequest.at(
                f"readings[{position}].uncertainty_h",
                f"{one.uncertainty!r} found; {least:.3g} to {most:.3g} is expected of a reading of that size: what is "
                "sharper rounding would decide, what is blunter says nothing and can be left out",
            )
