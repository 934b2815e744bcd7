"""Completion of largest determinant: the value of every unknown pair that the known ones speak for.

It exists and is unique when any positive definite completion exists, and its inverse is zero at every unknown pair
(Grone, Johnson, Sá & Wolkowicz 1984; Dempster 1972). When the graph of the known pairs is chordal it follows winding by
winding; else a Newton method maximises log det, which is concave and self-concordant (Nesterov & Nemirovskii 1994).
"""

from __future__ import annotations

import numpy as np

from interwind.errors import InvalidRequest
from interwind.model.frozen import FloatArray
from interwind_service.tolerances import COMPLETION_DECREMENT, COMPLETION_STEPS, COMPLETION_UNKNOWN_PAIRS
from interwind_service.windings.barrier import Pairs, log_det_curvature, newton_step, spread
from interwind_service.windings.completable import complete
from interwind_service.windings.pattern import fill_chordal, pattern_of
from interwind_service.windings.spectrum import rounding_bound


def largest_determinant(coupling: FloatArray) -> FloatArray | None:
    """Fill the unknown pairs so that det K is largest; None when no values of them make K semidefinite.

    Parameters
    ----------
    coupling : shape (n, n), symmetric, unit diagonal, NaN = pair not known.

    Returns
    -------
    completed : shape (n, n), the known pairs untouched. Where every completion is singular, the one of largest
        smallest eigenvalue.

    Raises
    ------
    InvalidRequest : more pairs are unknown, in a pattern that is not chordal, than one Newton step can hold.
    """
    known = ~np.isnan(coupling)
    pattern = None if np.all(known) else pattern_of(known)
    start = coupling if pattern is None else fill_chordal(coupling, pattern)
    if pattern is None or pattern.chordal:
        values = np.linalg.eigvalsh(start)
        return start if values[0] >= -rounding_bound(values) else None
    pairs = np.argwhere(np.triu(~known, 1))
    if not _is_definite(start):
        best = complete(coupling) if len(pairs) <= COMPLETION_UNKNOWN_PAIRS else None
        if best is not None and not _is_definite(best.completed):
            return best.completed if best.smallest >= -rounding_bound(np.array([len(start)])) else None
        start = start if best is None else best.completed
    if len(pairs) > COMPLETION_UNKNOWN_PAIRS or not _is_definite(start):
        raise InvalidRequest.at(
            "coupling",
            f"{len(pairs)} unknown pairs found in a loose pattern, more than can be completed at once "
            f"({COMPLETION_UNKNOWN_PAIRS}): measure more pairs, or complete parts of the set",
        )
    return _newton(start, pairs)


def _newton(K: FloatArray, pairs: Pairs) -> FloatArray:
    """Maximise log det K over the unknown pairs: gradient 2 Γ_ij, Γ = K⁻¹.

    Steps damped by 1 / (1 + decrement) stay inside the cone.
    """
    for _ in range(COMPLETION_STEPS):
        inverse = np.linalg.inv(K)
        gradient = 2.0 * inverse[pairs[:, 0], pairs[:, 1]]
        step, decrement = newton_step(log_det_curvature(inverse, pairs), gradient)
        K = K + spread(step if decrement < 0.25 else step / (1.0 + decrement), pairs, len(K))
        if decrement < COMPLETION_DECREMENT:
            break
    return K


def _is_definite(K: FloatArray) -> bool:
    try:
        np.linalg.cholesky(K)
    except np.linalg.LinAlgError:
        return False
    return True
