"""Sign cycles: pairs whose sign disagrees with the dots that all others agree on (structural balance, Harary 1953).

Turning a whole winding round changes the sign of its row and its column together and leaves every product round a
triangle alone; no data of couplings can show it. A single pair of the wrong sign breaks every triangle it stands in.
"""

from __future__ import annotations

import numpy as np

from interwind_service.tolerances import PLAUSIBILITY_WINDINGS, SIGN_MATTERS_ABOVE
from interwind_service.windings.spectrum import Spectrum, spectrum

Pair = tuple[int, int]


def flipped_pairs(judged: Spectrum) -> tuple[Pair, ...]:
    """Return the pairs that, all given the other sign, make an impossible set possible; empty when that is no cure,
    or the set is larger than rules of thumb are tried on.

    The dots are read from the common flux, the eigenvector of the largest eigenvalue: signs s_i s_j. The pairs that
    disagree are tried in the order of their size, down to the size at which either sign is common.
    """
    if not judged.negative or len(judged.values) > PLAUSIBILITY_WINDINGS:
        return ()
    K = judged.matrix
    s = np.where(judged.vectors[:, -1] < 0, -1.0, 1.0)
    i, j = np.nonzero(np.triu(K * np.outer(s, s) < -SIGN_MATTERS_ABOVE, 1))
    order = np.argsort(-np.abs(K[i, j]), kind="stable")[: len(K) // 2]
    flipped = K.copy()
    for count, place in enumerate(order, start=1):
        pair = (i[place], j[place])
        flipped[pair] = flipped[pair[::-1]] = -flipped[pair]
        if not spectrum(flipped).negative:
            return tuple((int(i[p]), int(j[p])) for p in order[:count])
    return ()
