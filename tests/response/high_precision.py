"""The reference: the same network in arithmetic of 60 digits, assembled from element values by plain nodal analysis.

It shares nothing with the service: no tree, no reduction, no scaling. Every branch that is no admittance has its
current as an unknown (Ho, Ruehli & Brennan 1975).
"""

from __future__ import annotations

import mpmath as mp

from interwind.model import elements as el
from interwind.model.network import Network, element_nodes

DIGITS = 60


class Reference:
    """Node voltages and currents of one network at one frequency, in mp numbers; ``singular`` when there is none."""

    def __init__(self, network: Network, frequency_hz: float, zeros: tuple[str, ...]) -> None:
        with mp.workdps(DIGITS):
            self._solve(network, frequency_hz, zeros)

    def _solve(self, network: Network, frequency_hz: float, zeros: tuple[str, ...]) -> None:
        # the angular frequency is the double that 2 pi f rounds to: the question is the algebra, not the constant
        s = mp.mpc(0, mp.mpf(2.0 * 3.141592653589793 * frequency_hz))
        nodes = {}
        for element in network.elements:
            for node in element_nodes(element):
                if node not in zeros:
                    nodes.setdefault(node, len(nodes))
        currents: dict[object, int] = {}
        for element in network.elements:
            if isinstance(element, el.Windings):
                for label in element.windings.labels:
                    currents[element.name, label] = len(nodes) + len(currents)
            else:
                currents[element.name] = len(nodes) + len(currents)
        n = len(nodes) + len(currents)
        A, b = mp.zeros(n, n), mp.zeros(n, 1)

        def add(row: int, node: str, value) -> None:
            if node in nodes:
                A[row, nodes[node]] += value

        def leave(row_node: str, column: int, value) -> None:
            if row_node in nodes:
                A[nodes[row_node], column] += value

        for element in network.elements:
            if isinstance(element, el.Windings):
                self._windings(A, add, leave, element, currents, s)
                continue
            own = currents[element.name]
            a, c = element.a, element.b
            leave(a, own, 1)
            leave(c, own, -1)
            if isinstance(element, el.Resistor):
                add(own, a, 1), add(own, c, -1)
                A[own, own] -= mp.mpf(element.resistance_ohm)
            elif isinstance(element, el.Inductor):
                add(own, a, 1), add(own, c, -1)
                A[own, own] -= s * mp.mpf(element.inductance_h)
            elif isinstance(element, el.Capacitor):
                add(own, a, s * mp.mpf(element.capacitance_f)), add(own, c, -s * mp.mpf(element.capacitance_f))
                A[own, own] -= 1
            elif isinstance(element, el.VoltageSource):
                add(own, a, 1), add(own, c, -1)
                b[own] = mp.mpmathify(element.phasor or 0)
            elif isinstance(element, el.CurrentSource):
                A[own, own] = 1
                b[own] = mp.mpmathify(element.phasor or 0)
            elif isinstance(element, el.IdealTransformer):
                ratio = mp.mpf(element.turns_ratio)
                add(own, a, 1), add(own, c, -1), add(own, element.c, -ratio), add(own, element.d, ratio)
                leave(element.c, own, -ratio), leave(element.d, own, ratio)
            elif isinstance(element, el.VoltageByVoltage):
                add(own, a, 1), add(own, c, -1)
                add(own, element.control[0], -mp.mpf(element.gain)), add(own, element.control[1], mp.mpf(element.gain))
            elif isinstance(element, el.CurrentByVoltage):
                gain = mp.mpf(element.transconductance_s)
                A[own, own] = 1
                add(own, element.control[0], -gain), add(own, element.control[1], gain)
            elif isinstance(element, el.VoltageByCurrent):
                add(own, a, 1), add(own, c, -1)
                A[own, currents[element.control]] -= mp.mpf(element.transresistance_ohm)
            elif isinstance(element, el.CurrentByCurrent):
                A[own, own] += 1
                A[own, currents[element.control]] -= mp.mpf(element.gain)
            else:
                raise TypeError(type(element).__name__)
        x, self.singular = _eliminate(A, b)
        self.nodes, self.currents, self.x = nodes, currents, x

    @staticmethod
    def _windings(A, add, leave, element, currents, s) -> None:
        coils = element.windings
        for i, one in enumerate(coils.labels):
            own = currents[element.name, one]
            a, c = element.terminals[one]
            leave(a, own, 1), leave(c, own, -1)
            add(own, a, 1), add(own, c, -1)
            for j, other in enumerate(coils.labels):
                if coils.stated_as_coupling:
                    mutual = mp.mpf(coils.coupling[i, j]) * mp.sqrt(
                        mp.mpf(coils.inductance_h[i, i]) * mp.mpf(coils.inductance_h[j, j])
                    )
                else:
                    mutual = mp.mpf(coils.inductance_h[i, j])
                A[own, currents[element.name, other]] -= s * mutual + mp.mpf(coils.resistance_matrix_ohm[i, j])

    def voltage(self, node: str) -> complex:
        """Voltage of a node against its zero."""
        return complex(self.x[self.nodes[node]]) if node in self.nodes else 0j

    def current(self, name: object) -> complex:
        """Current of an element, or of the winding (element, label)."""
        return complex(self.x[self.currents[name]])


def _eliminate(A, b):
    """Gaussian elimination with row scaling and pivoting on sparse rows; a column without pivot means singular."""
    n = A.rows
    rows = []
    for i in range(n):
        row = {j: A[i, j] for j in range(n) if A[i, j] != 0}
        if not row:
            return None, True
        size = max(abs(value) for value in row.values())
        rows.append(({j: value / size for j, value in row.items()}, b[i] / size))
    tiny = mp.mpf(10) ** (-DIGITS + 15)
    done = []
    for column in range(n):
        candidates = [k for k, (row, _) in enumerate(rows) if column in row]
        if not candidates:
            return None, True
        pick = max(candidates, key=lambda k: abs(rows[k][0][column]) / max(abs(v) for v in rows[k][0].values()))
        pivot_row, pivot_b = rows.pop(pick)
        pivot = pivot_row[column]
        done.append((column, pivot_row, pivot_b))
        for k, (row, right) in enumerate(rows):
            if column not in row:
                continue
            factor = row.pop(column) / pivot
            for j, value in pivot_row.items():
                if j == column:
                    continue
                new = row.get(j, mp.mpf(0)) - factor * value
                if abs(new) <= tiny * (abs(factor * value) + abs(row.get(j, mp.mpf(0)))):
                    row.pop(j, None)
                else:
                    row[j] = new
            rows[k] = (row, right - factor * pivot_b)
    x = mp.zeros(n, 1)
    for column, row, right in reversed(done):
        total = right
        for j, value in row.items():
            if j != column:
                total -= value * x[j]
        x[column] = total / row[column]
    return x, False
