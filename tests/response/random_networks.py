"""Random networks of every linear element, seeded: twelve decades, loops, cut-sets, perfect coupling, islands."""

from __future__ import annotations

import numpy as np

from interwind.model import elements as el
from interwind.model.network import Network, Port
from interwind.model.windings import WindingSet

RANGES = {
    "narrow": {"R": (1e-1, 1e4), "C": (1e-11, 1e-7), "L": (1e-7, 1e-2)},
    "wide": {"R": (1e-3, 1e6), "C": (1e-12, 1e-3), "L": (1e-9, 1.0)},
}


def random_network(seed: int, spread: str = "wide", *, active: bool = False, lossless: bool = False) -> Network:
    """Make one network: 4 to 14 nodes, one to three winding groups of 1 to 12 windings, sources, islands.

    Some are singular: zero resistors may close a loop with a source, perfect coupling may leave a current open.
    ``active`` adds controlled sources. Sources carry unit-size phasors.
    """
    rng = np.random.default_rng([seed, 77 if spread == "wide" else 33])
    ranges = RANGES[spread]

    def draw(kind: str) -> float:
        low, high = np.log10(ranges[kind])
        return float(10 ** rng.uniform(low, high))

    elements: list[el.Element] = []
    islands = [[f"n{k}" for k in range(rng.integers(3, 9))]]
    for i in range(rng.integers(0, 3)):
        islands.append([f"i{i}_{k}" for k in range(rng.integers(2, 5))])

    def two_terminal(name: str, a: str, b: str) -> el.Element:
        pick = rng.uniform()
        if pick < 0.35:
            zero = rng.uniform() < 0.08
            return el.Resistor("R" + name, a, b, 0.0 if zero else draw("R"))
        if pick < 0.75:
            return el.Capacitor("C" + name, a, b, draw("C"))
        return el.Inductor("L" + name, a, b, draw("L"))

    count = 0
    spanned: list[tuple[str, str]] = []  # pairs on which the island's spanning tree stands; some become windings
    for nodes in islands:
        for k in range(1, len(nodes)):
            spanned.append((nodes[k], nodes[int(rng.integers(0, k))]))
    chords = []
    for nodes in islands:
        for _ in range(int(rng.integers(1, len(nodes) + 2))):
            a, b = rng.choice(nodes, 2, replace=False)
            chords.append((str(a), str(b)))
    total = int(rng.integers(2, 13))
    spots = spanned + chords
    chosen = set(rng.permutation(len(spots))[: min(total, len(spots))].tolist())
    for i, nodes in enumerate(islands[1:], 1):  # every island is driven through a winding
        own = [k for k, (a, _) in enumerate(spots) if a in nodes]
        chosen.add(int(rng.choice(own)))
        del i
    coils = [spots[k] for k in sorted(chosen)]
    for k, (a, b) in enumerate(spots):
        if k not in chosen:
            elements.append(two_terminal(str(count), a, b))
            count += 1
    rng.shuffle(coils)
    start = 0
    while start < len(coils):
        size = min(len(coils) - start, int(rng.integers(1, 8)))
        elements.append(_group(rng, f"T{start}", coils[start : start + size], draw, lossless))
        start += size
    main = islands[0]
    a, b = (str(x) for x in rng.choice(main, 2, replace=False))
    elements.append(el.VoltageSource("V", a, b, phasor=complex(rng.normal(), rng.normal())))
    nodes = islands[int(rng.integers(0, len(islands)))]
    a, b = (str(x) for x in rng.choice(nodes, 2, replace=False))
    elements.append(el.CurrentSource("J", a, b, phasor=complex(rng.normal(), rng.normal())))
    if rng.uniform() < 0.4:
        one = islands[int(rng.integers(0, len(islands)))]
        other = islands[int(rng.integers(0, len(islands)))]
        a, b = (str(x) for x in rng.choice(one, 2, replace=False))
        c, d = (str(x) for x in rng.choice(other, 2, replace=False))
        elements.append(el.IdealTransformer("X", a, b, c, d, float(rng.choice([-1, 1]) * 10 ** rng.uniform(-2, 2))))
    if active:
        a, b = (str(x) for x in rng.choice(main, 2, replace=False))
        c, d = (str(x) for x in rng.choice(main, 2, replace=False))
        elements.append(el.CurrentByVoltage("G", a, b, (c, d), float(10 ** rng.uniform(-4, -1))))
        elements.append(el.VoltageByVoltage("E", "e", main[0], (c, d), float(10 ** rng.uniform(-1, 2))))
        elements.append(el.Resistor("RE", "e", main[-1], draw("R")))
        passive = [
            x.name for x in elements if isinstance(x, el.Resistor | el.Capacitor | el.Inductor | el.VoltageSource)
        ]
        a, b = (str(x) for x in rng.choice(main, 2, replace=False))
        elements.append(el.CurrentByCurrent("F", a, b, str(rng.choice(passive)), float(10 ** rng.uniform(-1, 1))))
        elements.append(
            el.VoltageByCurrent("H", "h", main[0], str(rng.choice(passive)), float(10 ** rng.uniform(0, 3)))
        )
        elements.append(el.Resistor("RH", "h", main[-1], draw("R")))
    order = rng.permutation(len(elements))
    shuffled = [elements[k] for k in order]
    return Network(main[0], shuffled, [Port("P", main[0], main[1])])


def _group(rng, name: str, terminals, draw, lossless: bool) -> el.Windings:
    n = len(terminals)
    labels = [f"w{k}" for k in range(n)]
    resistance = np.array([0.0 if lossless or rng.uniform() < 0.2 else draw("R") for _ in range(n)])
    style = rng.uniform()
    if style < 0.3 and n > 1:  # perfect coupling of rank 1, exact in floating point
        turns = rng.integers(1, 30, n) * rng.choice([-1, 1], n)
        coils = WindingSet(labels, 2.0 ** rng.integers(-28, -8) * np.outer(turns, turns), resistance)
    elif style < 0.5 and n > 2:  # perfect coupling of rank n - 1 by couplings of exact 1
        inner = _valid_coupling(rng, n - 1, 2.0)
        coupling = np.eye(n)
        coupling[: n - 1, : n - 1] = inner
        coupling[n - 1, : n - 1] = coupling[: n - 1, n - 1] = inner[0]
        coils = WindingSet.from_coupling(labels, [draw("L") for _ in range(n)], coupling, resistance)
    else:
        tight = 10 ** rng.uniform(-4, 0.5)
        coupling = _valid_coupling(rng, n, tight)
        coils = WindingSet.from_coupling(labels, [draw("L") for _ in range(n)], coupling, resistance)
        if rng.uniform() < 0.5:
            coils = WindingSet(labels, coils.inductance_h, resistance)
    pairs = {}
    for label, (a, b) in zip(labels, terminals, strict=True):
        pairs[label] = (a, b) if rng.uniform() < 0.5 else (b, a)
    return el.Windings(name, coils, pairs)


def _valid_coupling(rng, n: int, spread: float) -> np.ndarray:
    factor = np.ones((n, 1)) * rng.choice([-1, 1], (n, 1)) + spread * rng.normal(size=(n, n))
    matrix = factor @ factor.T + 1e-9 * np.eye(n)
    root = np.sqrt(matrix.diagonal())
    coupling = matrix / np.outer(root, root)
    coupling = 0.5 * (coupling + coupling.T)
    np.fill_diagonal(coupling, 1.0)
    return coupling
