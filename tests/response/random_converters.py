"""Random converters of five kinds, each possible by construction; the same seed gives the same network."""

from __future__ import annotations

import numpy as np

import interwind as iw

KINDS = ("flyback", "interleaved", "forward", "active bridge", "half-bridge link")
SHARES = (0.4, 0.2, 0.2, 0.1, 0.1)


def random_converter(seed: int) -> tuple[str, iw.Network, float]:
    """Return the kind, the network and its period, s."""
    rng = np.random.default_rng(seed)
    kind = KINDS[int(np.searchsorted(np.cumsum(SHARES), rng.random(), side="right"))]
    period_s = 1.0 / rng.uniform(40e3, 150e3)
    elements = {
        "flyback": _flyback,
        "interleaved": _interleaved,
        "forward": _forward,
        "active bridge": _active_bridge,
        "half-bridge link": _half_bridge,
    }[kind](rng, period_s)
    return kind, iw.Network("g", elements), period_s


def _between(rng: np.random.Generator, low: float, high: float) -> float:
    """Log-uniform."""
    return float(np.exp(rng.uniform(np.log(low), np.log(high))))


def _stacked(rng: np.random.Generator, turns: np.ndarray, core_h: float, leakage: float) -> np.ndarray:
    """L = N (1 + leakage of a stack) N': positive definite whatever the numbers."""
    z = np.cumsum(rng.uniform(0.3, 1.0, len(turns)))
    P = core_h * (1.0 + leakage * np.minimum.outer(z, z) + 0.1 * leakage * np.eye(len(turns)))
    return np.outer(turns, turns) * P


def _flyback(rng, T):
    outputs = int(rng.integers(1, 4))
    turns = np.array([_between(rng, 20, 90), *(_between(rng, 4, 14) for _ in range(outputs))]).round()
    L1 = _between(rng, 300e-6, 2e-3)
    L = _stacked(rng, turns, L1 / turns[0] ** 2, _between(rng, 2e-3, 2e-2))
    labels = ("p", *(f"s{k}" for k in range(outputs)))
    terminals = {"p": ("in", "d"), **{f"s{k}": ("g", f"a{k}") for k in range(outputs)}}
    resistance = [_between(rng, 0.1, 1.0), *(_between(rng, 5e-3, 5e-2) for _ in range(outputs))]
    elements = [
        iw.VoltageSource("bus", "in", "g", iw.Constant(rng.uniform(100.0, 600.0))),
        iw.Windings("T", iw.WindingSet(labels, L, resistance), terminals),
        iw.Switch("Q", "d", "g", iw.Gate(T, rng.uniform(0.08, 0.4) * T), _between(rng, 0.05, 1.0), 1e6),
        iw.Diode("Dc", "d", "c", 0.9, _between(rng, 0.2, 3.0), 1e6),
        iw.Capacitor("Cc", "c", "in", _between(rng, 1e-9, 2e-8)),
        iw.Resistor("Rc", "c", "in", _between(rng, 2e4, 2e5)),
    ]
    if rng.random() < 0.3:
        elements.append(iw.Capacitor("Cd", "d", "g", _between(rng, 30e-12, 200e-12)))
    for k in range(outputs):
        elements += [
            iw.Diode(f"D{k}", f"a{k}", f"o{k}", rng.uniform(0.3, 0.9), _between(rng, 5e-3, 0.3), 1e6),
            iw.Capacitor(f"C{k}", f"o{k}", "g", _between(rng, 2e-6, 2e-4)),
            iw.Resistor(f"R{k}", f"o{k}", "g", _between(rng, 5.0, 500.0)),
        ]
    return elements


def _interleaved(rng, T):
    L, k = _between(rng, 2e-6, 5e-5), -rng.uniform(0.3, 0.95)
    coils = iw.WindingSet(("one", "two"), [[L, k * L], [k * L, L]], _between(rng, 2e-3, 2e-2))
    duty = rng.uniform(0.1, 0.8)
    elements = [
        iw.VoltageSource("bus", "in", "g", iw.Constant(rng.uniform(8.0, 60.0))),
        iw.Windings("T", coils, {"one": ("x0", "o"), "two": ("x1", "o")}),
        iw.Capacitor("C", "o", "g", _between(rng, 1e-5, 5e-4)),
        iw.Resistor("R", "o", "g", _between(rng, 0.2, 20.0)),
    ]
    for k in range(2):
        elements += [
            iw.Switch(f"Q{k}", "in", f"x{k}", iw.Gate(T, duty * T, k * T / 2), _between(rng, 2e-3, 5e-2), 1e6),
            iw.Diode(f"D{k}", "g", f"x{k}", rng.uniform(0.3, 0.8), _between(rng, 2e-3, 5e-2), 1e6),
        ]
    return elements


def _forward(rng, T):
    turns = np.array([40.0, 40.0, _between(rng, 5, 30).__round__()])
    perfect = rng.random() < 0.3
    leakage = 0.0 if perfect else _between(rng, 1e-5, 5e-3)
    L = np.outer(turns, turns) * 1e-6 if perfect else _stacked(rng, turns, 1e-6, leakage)
    coils = iw.WindingSet(("p", "reset", "s"), L, [_between(rng, 0.05, 0.5), 0.1, _between(rng, 5e-3, 5e-2)])
    return [
        iw.VoltageSource("bus", "in", "g", iw.Constant(rng.uniform(30.0, 300.0))),
        iw.Windings("T", coils, {"p": ("in", "d"), "reset": ("g", "r"), "s": ("a", "g")}),
        iw.Switch("Q", "d", "g", iw.Gate(T, rng.uniform(0.1, 0.45) * T), _between(rng, 0.02, 0.5), 1e6),
        iw.Diode("Dr", "r", "in", 0.8, 0.05, 1e6),
        iw.Capacitor("Cd", "d", "g", _between(rng, 5e-11, 1e-9)),
        iw.Diode("D1", "a", "x", rng.uniform(0.3, 0.8), 0.01, 1e6),
        iw.Diode("D2", "g", "x", rng.uniform(0.3, 0.8), 0.01, 1e6),
        iw.Inductor("L", "x", "o", _between(rng, 1e-5, 3e-4)),
        iw.Capacitor("C", "o", "g", _between(rng, 1e-5, 5e-4)),
        iw.Resistor("R", "o", "g", _between(rng, 1.0, 50.0)),
    ]


def _leg(name, top, bottom, middle, T, start, dead, ohm):
    """Two switches with dead time, each with a diode across."""
    on = T / 2 - dead
    return [
        iw.Switch(f"{name}t", top, middle, iw.Gate(T, on, start), ohm, 1e6),
        iw.Switch(f"{name}b", middle, bottom, iw.Gate(T, on, start + T / 2), ohm, 1e6),
        iw.Diode(f"{name}dt", middle, top, 0.7, 0.02, 1e6),
        iw.Diode(f"{name}db", bottom, middle, 0.7, 0.02, 1e6),
    ]


def _active_bridge(rng, T):
    ratio, k = rng.uniform(1.0, 6.0), rng.uniform(0.97, 0.998)
    L1 = _between(rng, 2e-4, 2e-3)
    L2 = L1 / ratio**2
    M = k * np.sqrt(L1 * L2)
    coils = iw.WindingSet(("p", "s"), [[L1, M], [M, L2]], [_between(rng, 5e-3, 0.1), _between(rng, 2e-3, 2e-2)])
    V1 = rng.uniform(100.0, 500.0)
    dead, shift = rng.uniform(0.005, 0.03) * T, rng.uniform(0.02, 0.2) * T
    elements = [
        iw.VoltageSource("V1", "p+", "g", iw.Constant(V1)),
        iw.Windings("T", coils, {"p": ("a", "b"), "s": ("c", "d")}),
        iw.Capacitor("C", "q+", "q-", _between(rng, 1e-5, 2e-4)),
        iw.Resistor("R", "q+", "q-", _between(rng, 2.0, 50.0)),
        iw.Resistor("zero", "q-", "g", 1e6),
    ]
    ohm = _between(rng, 2e-3, 0.1)
    elements += _leg("A", "p+", "g", "a", T, 0.0, dead, ohm)
    elements += _leg("B", "p+", "g", "b", T, T / 2, dead, ohm)
    elements += _leg("C", "q+", "q-", "c", T, shift, dead, ohm)
    elements += _leg("D", "q+", "q-", "d", T, shift + T / 2, dead, ohm)
    return elements


def _half_bridge(rng, T):
    k, L1, L2 = rng.uniform(0.1, 0.5), _between(rng, 1e-5, 1e-4), _between(rng, 1e-5, 1e-4)
    M = k * np.sqrt(L1 * L2)
    coils = iw.WindingSet(("send", "take"), [[L1, M], [M, L2]], [_between(rng, 0.02, 0.3), _between(rng, 0.02, 0.3)])
    omega = 2 * np.pi / T * rng.uniform(0.7, 1.1)
    dead, ohm = rng.uniform(0.005, 0.03) * T, _between(rng, 5e-3, 0.1)
    elements = [
        iw.VoltageSource("bus", "p+", "g", iw.Constant(rng.uniform(50.0, 400.0))),
        iw.Windings("T", coils, {"send": ("b", "g"), "take": ("c", "d")}),
        iw.Capacitor("C1", "a", "b", 1.0 / (omega**2 * L1)),
        iw.Capacitor("C2", "c", "e", 1.0 / (omega**2 * L2)),
        iw.Capacitor("C", "q+", "q-", _between(rng, 5e-6, 1e-4)),
        iw.Resistor("R", "q+", "q-", _between(rng, 2.0, 50.0)),
        iw.Resistor("zero", "q-", "g", 1e6),
    ]
    elements += _leg("A", "p+", "g", "a", T, 0.0, dead, ohm)
    for name, anode, cathode in (("D1", "e", "q+"), ("D2", "d", "q+"), ("D3", "q-", "e"), ("D4", "q-", "d")):
        elements.append(iw.Diode(name, anode, cathode, 0.7, 0.01, 1e6))
    return elements
