"""How windings in parallel share their current, over frequency.

    Z(ω) = R + jωL,   Z i = v,   v the same across all windings in parallel, 0 across shorted ones, the rest open

At zero frequency the resistances decide, at high frequency the inductances: the row sums of the inverse matrices.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from interwind.errors import InvalidRequest
from interwind.model.characterization import CurrentSharing
from interwind.model.connection import Connection, InParallel, Shorted
from interwind.model.frozen import ComplexArray, FloatArray
from interwind_service.tolerances import SINGULAR_RECIPROCAL_CONDITION
from interwind_service.windings.interconnect import Coils, senses


def current_sharing(
    set_: Coils, connection: InParallel, connections: Sequence[Connection], frequency_hz: FloatArray
) -> CurrentSharing:
    """Return the share of each winding of one parallel connection; other windings are open but for those shorted.

    Parameters
    ----------
    set_ : the windings before any of them is joined in parallel.
    frequency_hz : shape (F,), Hz, not negative.

    Raises
    ------
    InvalidRequest : a frequency is negative or not finite.
    """
    bad = np.flatnonzero(~(np.isfinite(frequency_hz) & (frequency_hz >= 0)))
    if len(bad):
        raise InvalidRequest.at(
            f"frequency_hz[{bad[0]}]", f"{frequency_hz[bad[0]]!r} found; a finite frequency of 0 Hz or more is expected"
        )
    members = [set_.place(label) for label in connection.windings]
    shorted = [set_.place(c.winding) for c in connections if isinstance(c, Shorted) and c.winding in set_.labels]
    rows = members + [k for k in shorted if k not in members]
    L, R = set_.inductance_h[np.ix_(rows, rows)], set_.resistance_ohm[np.ix_(rows, rows)]
    v = np.zeros(len(rows))
    v[: len(members)] = senses(connection)
    share = [_share(R + 2j * np.pi * f * L, v, len(members)) for f in frequency_hz]
    p = slice(len(members))
    return CurrentSharing(
        label=connection.label,
        windings=connection.windings,
        frequency_hz=frequency_hz,
        share=np.array(share, dtype=complex).reshape(len(frequency_hz), len(members)),
        direct_share=_share(R[p, p], v[p], len(members)).real,
        inductive_share=_share(L, v, len(members)).real,
    )


def _share(matrix: ComplexArray | FloatArray, v: FloatArray, members: int) -> ComplexArray:
    """Currents of the members over their sum, NaN where the matrix leaves them open."""
    size = np.sqrt(np.abs(matrix.diagonal()))
    if not np.all(size > 0):
        return np.full(members, np.nan, dtype=complex)
    scaled = matrix / np.outer(size, size)
    if 1.0 / np.linalg.cond(scaled) < SINGULAR_RECIPROCAL_CONDITION:
        return np.full(members, np.nan, dtype=complex)
    current = (np.linalg.solve(scaled, v / size) / size)[:members] * v[:members]
    return np.asarray(current / current.sum(), dtype=complex)
