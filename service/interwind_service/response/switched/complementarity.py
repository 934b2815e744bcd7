"""States of the diodes at an instant: the static complementarity problem, solved by pivoting, never by toggling.

At fixed x and w the diodes obey 0 ≤ i ⊥ V_f − v(x, w) + M i ≥ 0; the piecewise-linear laws give M a positive
definite part, so it is a P-matrix and the solution is unique (Heemels, Çamlıbel & Schumacher 2002). Block principal
pivoting with a least-index safeguard that ends in finitely many steps (Murty 1974; Júdice & Pires 1994; from memory).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind_service import tolerances as tol
from interwind_service.response.switched.device import SaturableBranch
from interwind_service.response.switched.piece import Pieces
from interwind_service.response.switched.tableau import Mode

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def consistent_modes(pieces: Pieces, mode: Mode, x: FloatArray, w: ComplexArray) -> Mode:
    """Return the modes at which every guard holds, starting the search from ``mode``.

    Raises
    ------
    InvalidNetwork : no combination of diode states was consistent (with controlled sources there may be none).
    """
    fewest, patience = np.inf, tol.PIVOT_PATIENCE
    for _ in range(tol.PIVOTS):
        at = pieces.at_instant(mode)
        value, scale = at.values(x, w)
        wrong = [
            (int(device), int(then))
            for device, then, bad in zip(at.rows.device, at.rows.then, value < -tol.GUARD_ROUNDING * scale, strict=True)
            if bad and not isinstance(pieces.tableau.devices[device], SaturableBranch)
        ]
        if not wrong:
            return mode
        if len(wrong) < fewest:
            fewest, patience = len(wrong), tol.PIVOT_PATIENCE
        elif patience > 0:
            patience -= 1
        else:
            wrong = wrong[:1]  # Murty's least-index rule
        changed = list(mode)
        for device, then in wrong:
            changed[device] = then
        mode = tuple(changed)
    names = ", ".join(repr(pieces.tableau.devices[device].name) for device, _ in wrong[:4])
    raise InvalidNetwork.at(
        "elements", f"no combination of diode states is consistent; {names} can neither conduct nor block"
    )
