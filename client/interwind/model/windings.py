"""A set of N coupled windings, as its owner states it.

Sign convention, once for the whole project. Every winding has a start (the dotted end) and a finish. Current counts
into the start; voltage counts from start to finish. A positive mutual inductance aids when both currents enter at the
starts. Turning a winding round is exchanging its two terminals, so one matrix serves every orientation::

    v = R i + L di/dt        k_ij = L_ij / sqrt(L_ii L_jj)

Nothing here judges whether the set can exist: shapes only. The verdict is `interwind.Client.check`.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from interwind.errors import InvalidRequest
from interwind.model.frozen import FloatArray, frozen_floats, frozen_square, frozen_vector, labels_of
from interwind.model.json_form import JsonForm

DIAGONAL_ROUNDING = 1e-12  # a unit diagonal formed as (1 − k) + k, or M / sqrt(L L), is off by a few roundings


@dataclass(frozen=True, slots=True, eq=False)
class WindingSet(JsonForm):
    """N coupled windings: labels, inductance matrix, winding resistance and the uncertainty that was stated.

    Parameters
    ----------
    labels : N distinct texts.
    inductance_h : shape (N, N), H. NaN off the diagonal = pair not known.
    resistance_ohm : scalar, shape (N,) or symmetric shape (N, N), ohm.
    coupling_decimals : every coupling is known to half a unit of this printed decimal.
    coupling_uncertainty : scalar or shape (N, N), one standard deviation of each coupling.
    inductance_uncertainty_h : scalar or shape (N, N), H, one standard deviation of each entry.

    Attributes
    ----------
    coupling : shape (N, N), unit diagonal, signed, NaN = pair not known.
    stated_as_coupling : whether the couplings were given (`from_coupling`) rather than the matrix.

    Raises
    ------
    InvalidRequest : a shape, a label or a type does not fit; the field is named.
    """

    labels: tuple[str, ...]
    inductance_h: FloatArray
    resistance_ohm: FloatArray = 0.0  # type: ignore[assignment]
    coupling_decimals: int | None = None
    coupling_uncertainty: FloatArray | None = None
    inductance_uncertainty_h: FloatArray | None = None
    coupling: FloatArray = field(default=None, repr=False)  # type: ignore[arg-type]
    stated_as_coupling: bool = field(default=False, init=False)

    def __post_init__(self) -> None:
        def put(name: str, value: Any) -> None:
            object.__setattr__(self, name, value)

        put("labels", labels_of(self.labels, "labels"))
        size = len(self.labels)
        if size == 0:
            raise InvalidRequest.at("labels", "no winding found; at least one is expected")
        put("inductance_h", frozen_square(self.inductance_h, "inductance_h", size))
        put("resistance_ohm", _resistance(self.resistance_ohm, size))
        if self.coupling_decimals is not None:
            if not isinstance(self.coupling_decimals, int) or not 0 <= self.coupling_decimals <= 17:
                raise InvalidRequest.at(
                    "coupling_decimals", f"{self.coupling_decimals!r} found; a whole number from 0 to 17 is expected"
                )
        for name in ("coupling_uncertainty", "inductance_uncertainty_h"):
            if getattr(self, name) is not None:
                put(name, _per_entry(getattr(self, name), name, size))
        if self.coupling is None:
            put("coupling", _coupling_of(self.inductance_h))
        else:
            put("coupling", frozen_square(self.coupling, "coupling", size))
            put("stated_as_coupling", True)

    @classmethod
    def from_coupling(
        cls,
        labels: Sequence[str],
        self_inductance_h: Any,
        coupling: Any,
        resistance_ohm: Any = 0.0,
        *,
        coupling_decimals: int | None = None,
        coupling_uncertainty: Any = None,
        inductance_uncertainty_h: Any = None,
    ) -> WindingSet:
        """Make a set from self-inductances, shape (N,), H, and signed couplings, shape (N, N), NaN = pair not known."""
        names = labels_of(labels, "labels")
        self_h = frozen_vector(self_inductance_h, "self_inductance_h")
        if self_h.shape != (len(names),):
            raise InvalidRequest.at("self_inductance_h", f"{self_h.size} values found for {len(names)} labels")
        k = frozen_square(coupling, "coupling", len(names))
        off = np.abs(k.diagonal() - 1.0)
        if not np.all(off <= DIAGONAL_ROUNDING):
            position = int(np.argmax(~(off <= DIAGONAL_ROUNDING)))
            raise InvalidRequest.at(
                f"coupling[{position}][{position}]",
                f"{float(k[position, position])!r} found; the diagonal of couplings is 1",
            )
        k = k.copy()
        np.fill_diagonal(k, 1.0)
        root = np.sqrt(np.where(self_h > 0, self_h, np.nan))
        with np.errstate(over="ignore", invalid="ignore"):
            inductance = k * np.outer(root, root)
        np.fill_diagonal(inductance, self_h)
        return cls(
            names,
            inductance,
            resistance_ohm,
            coupling_decimals=coupling_decimals,
            coupling_uncertainty=coupling_uncertainty,
            inductance_uncertainty_h=inductance_uncertainty_h,
            coupling=k,
        )

    @property
    def size(self) -> int:
        """Number of windings N."""
        return len(self.labels)

    @property
    def self_inductance_h(self) -> FloatArray:
        """The diagonal of the matrix, shape (N,), H."""
        return self.inductance_h.diagonal()

    @property
    def resistance_matrix_ohm(self) -> FloatArray:
        """The winding resistance as a matrix, shape (N, N), ohm, whichever way it was stated."""
        if self.resistance_ohm.ndim == 2:
            return self.resistance_ohm
        return np.diag(np.broadcast_to(self.resistance_ohm, (self.size,))).astype(np.float64)

    def index(self, label: str) -> int:
        """Return the row of a label; an unknown one is refused with the labels there are."""
        try:
            return self.labels.index(label)
        except ValueError as error:
            raise InvalidRequest.at("label", f"{label!r} is no winding; there are {', '.join(self.labels)}") from error


def _resistance(value: Any, size: int) -> FloatArray:
    array = frozen_floats(value, "resistance_ohm")
    if array.shape not in ((), (size,), (size, size)):
        raise InvalidRequest.at(
            "resistance_ohm", f"shape {array.shape} found; a number, ({size},) or ({size}, {size}) is expected"
        )
    return array


def _per_entry(value: Any, name: str, size: int) -> FloatArray:
    array = frozen_floats(value, name)
    if array.shape not in ((), (size, size)):
        raise InvalidRequest.at(name, f"shape {array.shape} found; one number or ({size}, {size}) is expected")
    return array


def _coupling_of(inductance_h: FloatArray) -> FloatArray:
    with np.errstate(invalid="ignore", divide="ignore", over="ignore", under="ignore"):
        root = np.sqrt(inductance_h.diagonal())
        coupling: FloatArray = inductance_h / np.outer(root, root)
    np.fill_diagonal(coupling, 1.0)
    coupling.setflags(write=False)
    return coupling
