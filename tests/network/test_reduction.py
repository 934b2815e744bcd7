"""Structural reduction: how many states a network has, decided on incidence and turns ratios and never on values."""

from __future__ import annotations

import numpy as np
import pytest

from interwind.errors import InvalidNetwork
from interwind.model import elements as el
from interwind.model.network import Network
from interwind.model.windings import WindingSet
from interwind_service.network.elimination import eliminate
from interwind_service.network.topology import number
from interwind_service.network.winding_coordinates import all_coordinates
from interwind_service.response.equations.reduction import StateBasis, reduce
from interwind_service.response.equations.roles import roles_of
from interwind_service.response.equations.storage import storage_of


def basis_of(elements: list[el.Element]) -> StateBasis:
    topology = number(Network("0", elements))
    return reduce(storage_of(topology, all_coordinates(topology)), roles_of(topology, at_zero=False))


def C(name: str, a: str, b: str, farad: float = 1e-6) -> el.Capacitor:
    return el.Capacitor(name, a, b, farad)


def L(name: str, a: str, b: str, henry: float = 1e-3) -> el.Inductor:
    return el.Inductor(name, a, b, henry)


def R(name: str, a: str, b: str, ohm: float = 1.0) -> el.Resistor:
    return el.Resistor(name, a, b, ohm)


PAIR = WindingSet(("p", "s"), [[1.0, 2.0], [2.0, 4.0]])
LOOSE = WindingSet(("p", "s"), [[1.0, 1.0], [1.0, 4.0]])

# Bryant 1959: order = storage elements − independent loops of C and V − independent cutsets of L and I.
ORDERS = [
    ("series R L C", [el.VoltageSource("V", "a", "0"), R("R", "a", "b"), L("L", "b", "c"), C("C", "c", "0")], 2),
    ("capacitor loop", [C("C1", "a", "0"), C("C2", "a", "b"), C("C3", "b", "0"), R("R", "a", "0")], 2),
    ("capacitor across a source", [el.VoltageSource("V", "a", "0"), C("C", "a", "0"), R("R", "a", "0")], 0),
    ("inductor cutset", [L("L1", "a", "0"), L("L2", "a", "b"), R("R", "b", "0"), C("C", "b", "0")], 2),
    ("inductor fed by a current source", [el.CurrentSource("J", "0", "a"), L("L", "a", "0")], 0),
    ("zero resistor joins two capacitors", [C("C1", "a", "0"), R("short", "a", "b", 0.0), C("C2", "b", "0")], 1),
    (
        "perfectly coupled pair, loaded",
        [R("R1", "a", "0"), el.Windings("T", PAIR, {"p": ("a", "0"), "s": ("b", "0")}), R("R2", "b", "0")],
        1,
    ),
    (
        "loosely coupled pair, loaded",
        [R("R1", "a", "0"), el.Windings("T", LOOSE, {"p": ("a", "0"), "s": ("b", "0")}), R("R2", "b", "0")],
        2,
    ),
    (
        "capacitors joined by perfect coupling are one",
        [C("C1", "a", "0"), el.Windings("T", PAIR, {"p": ("a", "0"), "s": ("b", "0")}), C("C2", "b", "0")],
        2,
    ),
    (
        "capacitors joined by an ideal transformer are one",
        [C("C1", "a", "0"), el.IdealTransformer("X", "a", "0", "b", "0", 3.0), C("C2", "b", "0"), R("R", "a", "0")],
        1,
    ),
    (
        "isolated sides",
        [el.Windings("T", LOOSE, {"p": ("a", "0"), "s": ("b", "c")}), C("C", "a", "0"), R("R", "b", "c")],
        3,
    ),
]


@pytest.mark.parametrize(("name", "elements", "order"), ORDERS, ids=[row[0] for row in ORDERS])
def test_order_of_complexity(name, elements, order):
    """Number of states as topology says (Bryant 1959), with the basis orthonormal in energy."""
    basis = basis_of(elements)
    assert basis.X.shape[1] == order
    gram = basis.X.T @ basis.storage.weigh(basis.X)
    assert np.abs(gram - np.eye(order)).max(initial=0.0) < 1e-14
    cross = basis.X.T @ basis.storage.weigh(basis.P)
    assert np.abs(cross).max(initial=0.0) < 1e-12


@pytest.mark.parametrize("name", [row[0] for row in ORDERS])
def test_values_never_decide(name):
    """The same structure with values over twelve decades has the same number of states."""
    _, elements, order = next(row for row in ORDERS if row[0] == name)
    rng = np.random.default_rng(5)
    spread: list[el.Element] = []
    for e in elements:
        factor = 10.0 ** rng.uniform(-6, 6)
        if isinstance(e, el.Capacitor):
            e = C(e.name, e.a, e.b, e.capacitance_f * factor)
        elif isinstance(e, el.Inductor):
            e = L(e.name, e.a, e.b, e.inductance_h * factor)
        elif isinstance(e, el.Resistor):
            e = R(e.name, e.a, e.b, e.resistance_ohm * factor)
        spread.append(e)
    assert basis_of(spread).X.shape[1] == order


SINGULAR = [
    ("two sources in parallel", [el.VoltageSource("V1", "a", "0"), el.VoltageSource("V2", "a", "0")], {"V1", "V2"}),
    ("two shorts in parallel", [R("S1", "a", "0", 0.0), R("S2", "a", "0", 0.0), C("C", "a", "0")], {"S1", "S2"}),
    (
        "perfect coupling shorted on itself",
        [el.VoltageSource("V", "a", "0"), el.Windings("T", PAIR, {"p": ("a", "0"), "s": ("a", "0")})],
        {"V", "T"},
    ),
]


@pytest.mark.parametrize(("name", "elements", "members"), SINGULAR, ids=[row[0] for row in SINGULAR])
def test_singular_networks_name_their_members(name, elements, members):
    with pytest.raises(InvalidNetwork) as caught:
        basis_of(elements)
    assert caught.value.reason == "SINGULAR_NETWORK"
    for member in members:
        assert member in str(caught.value)


def test_elimination_is_exact_on_graphs():
    """On incidence matrices every entry of the kernel is 0, 1 or −1, and the kernel is one."""
    rng = np.random.default_rng(0)
    for _ in range(50):
        nodes, branches = rng.integers(3, 12), rng.integers(3, 25)
        A = np.zeros((nodes, branches))
        for k in range(branches):
            a, b = rng.choice(nodes, 2, replace=False)
            A[a, k], A[b, k] = 1.0, -1.0
        found = eliminate(A)
        assert found.rank == np.linalg.matrix_rank(A)
        assert set(np.unique(found.kernel)) <= {-1.0, 0.0, 1.0}
        assert not np.any(A @ found.kernel)
        assert np.abs(A.T @ found.left_kernel).max(initial=0.0) == 0.0


def test_impulses_of_a_step():
    """A source across a capacitor passes the charge C Δu, a current source through an inductor the flux L Δi."""
    across = basis_of([el.VoltageSource("V", "a", "0"), C("C", "a", "0", 2e-6), R("R", "a", "0")])
    assert across.current_impulse[:, 0] == pytest.approx([-2e-6, 2e-6, 0.0])
    through = basis_of([el.CurrentSource("J", "0", "a"), L("L", "a", "0", 3e-3), R("R", "a", "b"), C("C", "b", "0")])
    assert through.X.shape[1] == 2
    assert not np.any(through.voltage_impulse)
    alone = basis_of([el.CurrentSource("J", "0", "a"), L("L", "a", "0", 3e-3)])
    assert alone.voltage_impulse[:, 0] == pytest.approx([-3e-3, 3e-3])
