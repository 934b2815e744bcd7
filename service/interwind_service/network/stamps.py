"""One stamp for each element: what it adds to G, C and B of G x + C dx/dt = B u.

Node rows sum the currents leaving the node. The row of a branch current i from a to b reads voltage drop minus branch
voltage = 0, so that G + Gᵀ and C are positive semidefinite for passive elements (Ho, Ruehli & Brennan 1975):

    winding, inductor    R i + L di/dt − (v_a − v_b) = 0
    voltage source                     − (v_a − v_b) = −u

Mutual inductance stands only in C.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import sparse

from interwind_service.network.groups import WindingGroup

FloatArray = NDArray[np.float64]


class Triplets:
    """A matrix that only grows: what is added is kept as (row, column, value) until it is made sparse."""

    def __init__(self, shape: tuple[int, int]) -> None:
        self._shape = shape
        self._single: list[tuple[int, int, float]] = []
        self._blocks: list[tuple[FloatArray, FloatArray, FloatArray]] = []

    def __getitem__(self, place: Any) -> float:
        return 0.0  # so that m[row, column] += value hands over value alone

    def __setitem__(self, place: Any, value: Any) -> None:
        if isinstance(value, float):
            self._single.append((*place, value))
        else:
            rows, columns, values = np.broadcast_arrays(*place, value)
            self._blocks.append((rows.ravel(), columns.ravel(), values.ravel()))

    def sparse(self) -> sparse.csc_matrix:
        """Return the matrix, entries of the same place summed."""
        single = np.array(self._single, dtype=np.float64).reshape(-1, 3)
        rows, columns, values = (
            np.concatenate([part, *(block[k] for block in self._blocks)]) for k, part in enumerate(single.T)
        )
        return sparse.csc_matrix((values, (rows.astype(np.int64), columns.astype(np.int64))), shape=self._shape)


class Stamps:
    """G (m, m), C (m, m), B (m, inputs) while they are written; a row of −1 is a zero node and takes nothing.

    ``matrix`` makes G and C: dense zeros, or `Triplets` for networks that are sparse.
    """

    def __init__(self, size: int, inputs: int, matrix: Callable[[tuple[int, int]], Any] = np.zeros) -> None:
        self.G, self.C, self.B = matrix((size, size)), matrix((size, size)), np.zeros((size, inputs))

    def _add(self, matrix: Any, row: int, column: int, value: float) -> None:
        if row >= 0 and column >= 0:
            matrix[row, column] += value

    def _between(self, matrix: Any, a: int, b: int, value: float) -> None:
        for row, column, sign in ((a, a, 1.0), (b, b, 1.0), (a, b, -1.0), (b, a, -1.0)):
            self._add(matrix, row, column, sign * value)

    def _current(self, a: int, b: int, column: int, value: float = 1.0) -> None:
        """A current unknown leaves a and enters b."""
        self._add(self.G, a, column, value)
        self._add(self.G, b, column, -value)

    def _voltage(self, row: int, a: int, b: int, value: float) -> None:
        """A row takes value (v_a − v_b)."""
        self._add(self.G, row, a, value)
        self._add(self.G, row, b, -value)

    def resistor(self, a: int, b: int, resistance_ohm: float) -> None:
        """I = v / R."""
        self._between(self.G, a, b, 1.0 / resistance_ohm)

    def capacitor(self, a: int, b: int, capacitance_f: float) -> None:
        """I = C dv/dt."""
        self._between(self.C, a, b, capacitance_f)

    def inductor(self, a: int, b: int, current: int, inductance_h: float) -> None:
        """L di/dt − v = 0."""
        self._current(a, b, current)
        self._voltage(current, a, b, -1.0)
        self.C[current, current] += inductance_h

    def windings(self, starts: list[int], finishes: list[int], currents: list[int], group: WindingGroup) -> None:
        """R i + L di/dt − v = 0, R and L the full matrices of the group."""
        for a, b, current in zip(starts, finishes, currents, strict=True):
            self._current(a, b, current)
            self._voltage(current, a, b, -1.0)
        block = np.ix_(currents, currents)
        self.G[block] += group.resistance_ohm
        self.C[block] += group.inductance_h

    def branch_resistor(self, a: int, b: int, current: int, resistance_ohm: float) -> None:
        """R i − v = 0: of zero or of a sensed resistance, an open one (inf) carrying i = 0."""
        self._current(a, b, current)
        if np.isinf(resistance_ohm):
            self.G[current, current] += 1.0
            return
        self._voltage(current, a, b, -1.0)
        self.G[current, current] += resistance_ohm

    def branch_capacitor(self, a: int, b: int, current: int, capacitance_f: float) -> None:
        """I − C dv/dt = 0: a capacitor whose current is sensed."""
        self._current(a, b, current)
        self.G[current, current] += 1.0
        self._add(self.C, current, a, -capacitance_f)
        self._add(self.C, current, b, capacitance_f)

    def sensed_current(self, a: int, b: int, current: int) -> None:
        """I leaves a and enters b; its own row starts as i, to be completed by the source that it belongs to."""
        self._current(a, b, current)
        self.G[current, current] += 1.0

    def short_circuit(self, a: int, b: int, current: int) -> None:
        """−v = 0: a resistance of zero, or a switch that conducts ideally."""
        self._current(a, b, current)
        self._voltage(current, a, b, -1.0)

    def voltage_source(self, a: int, b: int, current: int, column: int) -> None:
        """−v = −u."""
        self.short_circuit(a, b, current)
        self.B[current, column] -= 1.0

    def current_source(self, a: int, b: int, column: int) -> None:
        """U leaves a through the source and enters b."""
        for row, value in ((a, -1.0), (b, 1.0)):
            if row >= 0:
                self.B[row, column] += value

    def ideal_transformer(self, a: int, b: int, c: int, d: int, current: int, ratio: float) -> None:
        """−(v_ab − ratio v_cd) = 0; the current into c is −ratio times the current into a."""
        self._current(a, b, current)
        self._current(c, d, current, -ratio)
        self._voltage(current, a, b, -1.0)
        self._voltage(current, c, d, ratio)

    def voltage_by_voltage(self, a: int, b: int, current: int, control: tuple[int, int], gain: float) -> None:
        """−(v_ab − gain v_control) = 0."""
        self.short_circuit(a, b, current)
        self._voltage(current, *control, gain)

    def current_by_voltage(self, a: int, b: int, control: tuple[int, int], transconductance_s: float) -> None:
        """I = g v_control leaves a and enters b."""
        for row, sign in ((a, 1.0), (b, -1.0)):
            if row >= 0:
                self._voltage(row, *control, sign * transconductance_s)

    def voltage_by_current(self, a: int, b: int, current: int, sensed: int, transresistance_ohm: float) -> None:
        """−(v_ab − r i_sensed) = 0."""
        self.short_circuit(a, b, current)
        self.G[current, sensed] += transresistance_ohm

    def current_by_current(self, a: int, b: int, sensed: int, gain: float) -> None:
        """Gain i_sensed leaves a and enters b."""
        self._current(a, b, sensed, gain)
