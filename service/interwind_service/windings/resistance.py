"""Whether the winding resistance can only lose power: R symmetric and positive semidefinite."""

from __future__ import annotations

import numpy as np

from interwind.model.finding import Finding, Severity
from interwind.model.windings import WindingSet
from interwind_service.tolerances import COMPUTABLE_WIDTH, SYMMETRY_ROUNDING, WITNESS_SHARE
from interwind_service.windings.spectrum import rounding_bound
from interwind_service.windings.wording import spelled


def check_resistance(coils: WindingSet) -> list[Finding]:
    """Return what is wrong with the resistance; the matrix is judged with its diagonal scaled to 1.

    p = iᵀ R i must not be negative for any current. A diagonal of zero forces its row to be zero.
    """
    R = coils.resistance_ohm
    if R.ndim == 0:
        return [_negative(coils.labels, "resistance_ohm", float(R))] if R < 0 else []
    own = R if R.ndim == 1 else R.diagonal()
    findings = [
        _negative((coils.labels[i],), f"resistance_ohm[{i}]" + f"[{i}]" * (R.ndim - 1), float(own[i]))
        for i in np.flatnonzero(own < 0)
    ]
    return findings if R.ndim == 1 or findings else _matrix(coils)


def _negative(labels: tuple[str, ...], field: str, value: float) -> Finding:
    text = f"The resistance of {', '.join(labels)} is {value:.6g} ohm; a winding cannot deliver power."
    return Finding("NEGATIVE_RESISTANCE", Severity.ERROR, labels, field, text, value, 0.0)


def _matrix(coils: WindingSet) -> list[Finding]:
    R = coils.resistance_ohm
    own = R.diagonal()
    scale = np.sqrt(np.where(own > 0, own, own.max() if own.max() > 0 else 1.0))
    with np.errstate(over="ignore"):
        scaled = np.clip(R / scale / scale[:, None], -COMPUTABLE_WIDTH, COMPUTABLE_WIDTH)
    difference = np.triu(np.abs(scaled - scaled.T))
    i, j = (int(k) for k in np.unravel_index(np.argmax(difference), difference.shape))
    if difference[i, j] > SYMMETRY_ROUNDING:
        text = (
            f"R({coils.labels[i]}, {coils.labels[j]}) = {R[i, j]:.6g} ohm and R({coils.labels[j]}, {coils.labels[i]}) "
            f"= {R[j, i]:.6g} ohm differ; reciprocity wants them equal."
        )
        pair = (coils.labels[i], coils.labels[j])
        return [
            Finding(
                "RESISTANCE_ASYMMETRIC",
                Severity.ERROR,
                pair,
                f"resistance_ohm[{i}][{j}]",
                text,
                float(difference[i, j]),
                SYMMETRY_ROUNDING,
            )
        ]
    values, V = np.linalg.eigh(0.5 * (scaled + scaled.T))
    limit = -rounding_bound(values)
    if values[0] >= limit:
        return []
    names = tuple(coils.labels[k] for k in np.flatnonzero(V[:, 0] ** 2 >= WITNESS_SHARE))
    text = (
        f"The resistance matrix, scaled to a unit diagonal, has the eigenvalue {values[0]:.4g}: currents in "
        f"{spelled(names)} would deliver power. Check their mutual resistances."
    )
    return [
        Finding(
            "RESISTANCE_NOT_POSITIVE_SEMIDEFINITE",
            Severity.ERROR,
            names,
            "resistance_ohm",
            text,
            float(values[0]),
            limit,
        )
    ]
