"""Area F: how an impulse divides over a winding in the first instant, a ladder of capacitances only."""

from __future__ import annotations

import numpy as np
import pytest

import interwind as iw


def distribution(solver, alpha: float, sections: int) -> np.ndarray:
    """Voltages at nodes 0 (earthed neutral) to N (line) just after a unit step; series C N, shunt C/N, α² = Cg/Cs."""
    series, shunt = 1e-9 * sections, 1e-9 * alpha**2 / sections
    name = [f"n{k}" for k in range(sections + 1)]
    elements: list[iw.VoltageSource | iw.Capacitor] = [iw.VoltageSource("V", name[-1], name[0], iw.Step(1.0))]
    elements += [iw.Capacitor(f"Cs{k}", name[k + 1], name[k], series) for k in range(sections)]
    elements += [iw.Capacitor(f"Cg{k}", name[k], name[0], shunt) for k in range(1, sections)]
    answer = solver.time_response(iw.Network(name[0], elements), 1e-6, 1e-6, [iw.NodeVoltage(n) for n in name])
    return np.array([answer[iw.NodeVoltage(n)][0] for n in name])


# F-03, derived: V_n = sinh(nθ)/sinh(Nθ), cosh θ = 1 + α²/(2N²).
DISCRETE = [
    (10, 0.9624236501, 0.00813008, 0.38196600, 0.618033999),
    (100, 0.0999583801, 0.00675168, 0.36803258, 0.095124922),
]


@pytest.mark.parametrize(("sections", "theta", "half", "near", "first"), DISCRETE)
def test_f03_discrete_ladder(solver, sections, theta, half, near, first):
    v = distribution(solver, 10.0, sections)
    assert v[sections // 2] == pytest.approx(half, abs=1e-8)
    assert v[9 * sections // 10] == pytest.approx(near, abs=1e-8)
    assert v[-1] - v[-2] == pytest.approx(first, abs=1e-9)
    n = np.arange(sections + 1)
    assert np.abs(v - np.sinh(n * theta) / np.sinh(sections * theta)).max() < 1e-9


# F-01. From memory: Weed 1922; Greenwood, Electrical Transients in Power Systems; the law is derived.
CONTINUUM = [
    (1.0, (0.0852337, 0.17132045, 0.44340944, 0.69972421, 0.87348169), 1.31303529),
    (2.0, (0.05551248, 0.11325286, 0.32402714, 0.58708613, 0.81121796), 2.07462944),
    (5.0, (0.00702254, 0.01583761, 0.08153562, 0.28635934, 0.60648334), 5.00045402),
    (10.0, (0.00010671, 0.00032932, 0.00673764, 0.08208497, 0.36787944), 10.00000004),
]


@pytest.mark.parametrize(("alpha", "values", "gradient"), CONTINUUM)
def test_f01_continuous_winding(solver, alpha, values, gradient):
    """The ladder tends to sinh(αx)/sinh(α) as its sections grow: extrapolated over 40, 80, 160 (error in N⁻², N⁻⁴)."""
    places = (0.1, 0.2, 0.5, 0.75, 0.9)
    table = []
    for sections in (40, 80, 160):
        v = distribution(solver, alpha, sections)
        slope = (v[-1] - v[-2]) * sections + alpha**2 * 0.5 / sections  # the half shunt at the line end belongs to it
        table.append([*(v[round(x * sections)] for x in places), slope])
    a, b, c = map(np.array, table)
    once = (4 * b - a) / 3, (4 * c - b) / 3
    limit = (16 * once[1] - once[0]) / 15
    assert limit[:-1] == pytest.approx(values, abs=1e-7)
    assert limit[-1] == pytest.approx(gradient, abs=2e-6 * alpha)
