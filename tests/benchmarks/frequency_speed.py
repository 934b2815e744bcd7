"""Whole frequency responses against one `numpy.linalg.solve` a frequency on the matrices that `stamp` returns.

Run it as a script; it prints the ratios, for two observables and for every unknown (then up to 10 MB of answer are
part of the call). One BLAS thread on both sides (set OPENBLAS_NUM_THREADS=1).
"""

from __future__ import annotations

import statistics
import time

import numpy as np

import interwind as iw

FREQUENCIES = np.geomspace(1e2, 1e7, 1000)


def transformer(count: int) -> iw.Network:
    """``count`` coupled windings: one driven, each other loaded by a resistor and a capacitor."""
    rng = np.random.default_rng(count)
    shape = rng.uniform(0.3, 1.0, (count, 1))
    coupling = 0.9 * (shape @ shape.T) + np.diag(1.0 - 0.9 * shape[:, 0] ** 2)
    own = 10.0 ** rng.uniform(-5, -3, count)
    labels = [f"w{k}" for k in range(count)]
    coils = iw.WindingSet.from_coupling(labels, own, coupling, 10.0 ** rng.uniform(-2, 0, count))
    elements: list = [
        iw.VoltageSource("V", "s", "0", phasor=1.0),
        iw.Resistor("RS", "s", "n0", 1.0),
        iw.Windings("T", coils, {label: (f"n{k}", "0") for k, label in enumerate(labels)}),
    ]
    for k in range(1, count):
        elements.append(iw.Resistor(f"R{k}", f"n{k}", "0", float(10.0 ** rng.uniform(1, 4))))
        elements.append(iw.Capacitor(f"C{k}", f"n{k}", "0", float(10.0 ** rng.uniform(-11, -9))))
    return iw.Network("0", elements)


def ladder(count: int) -> iw.Network:
    """A winding of ``count`` coupled sections with capacitance to ground and across, an ideal source at its head."""
    row = 100e-6 * 0.85 ** np.arange(count)
    L = row[np.abs(np.subtract.outer(np.arange(count), np.arange(count)))]
    labels = [f"w{k}" for k in range(count)]
    ends = [*(f"n{k}" for k in range(count)), "g"]
    elements: list = [
        iw.VoltageSource("V", "n0", "g", phasor=1.0),
        iw.Windings("T", iw.WindingSet(labels, L, 0.6), {x: (ends[k], ends[k + 1]) for k, x in enumerate(labels)}),
    ]
    for k in range(count):
        elements.append(iw.Capacitor(f"across {k}", ends[k], ends[k + 1], 1e-9))
        elements.append(iw.Resistor(f"loss {k}", ends[k], ends[k + 1], 2e5))
        if k:
            elements.append(iw.Capacitor(f"ground {k}", ends[k], "g", 2e-11))
    return iw.Network("g", elements)


def plain_seconds(system: iw.MnaSystem, frequency_hz: np.ndarray) -> tuple[float, np.ndarray]:
    """Time and solutions of one solve a frequency."""
    right = system.B.sum(axis=1).astype(complex)
    begin = time.perf_counter()
    x = np.array([np.linalg.solve(system.G + 2j * np.pi * f * system.C, right) for f in frequency_hz])
    return time.perf_counter() - begin, x


def ratio(
    solver: iw.Client, network: iw.Network, repeats: int, observe: list[iw.Observable] | None = None
) -> tuple[float, float, float]:
    """Seconds of a whole call and of the plain loop, medians of calls in turn, and their largest difference in volts.

    ``observe`` None = a node voltage and a winding current.
    """
    system = solver.stamp(network)
    asked = observe or [system.unknowns[len(network.nodes) // 2], iw.WindingCurrent("T", "w1")]
    share = max(1, len(system.unknowns) ** 2 // 2000)  # of a large network the plain loop is sampled
    own, plain = [], []
    for _ in range(repeats):
        begin = time.perf_counter()
        answer = solver.frequency_response(network, FREQUENCIES, asked, timeout_s=300)
        own.append(time.perf_counter() - begin)
        seconds, x = plain_seconds(system, FREQUENCIES[::share])
        plain.append(seconds * len(FREQUENCIES) / len(x))
    volts = [item for item in asked if isinstance(item, iw.NodeVoltage)]
    mine = np.stack([answer[item] for item in volts], axis=1)[::share]
    theirs = x[:, [system.unknowns.index(item) for item in volts]]
    return statistics.median(own), statistics.median(plain), float(np.abs(mine - theirs).max() / np.abs(theirs).max())


def main() -> None:
    """Print one line a network."""
    with iw.connect() as solver:
        for name, build in (("transformer", transformer), ("ladder", ladder)):
            for count, repeats in ((30, 40), (100, 9), (300, 3)):
                network = build(count)
                every = list(solver.stamp(network).unknowns)
                for what, observe in (("two observables", None), ("every unknown", every)):
                    own, plain, gap = ratio(solver, network, repeats, observe)
                    print(
                        f"{name} of {count}, {what}: plain {plain:.3f} s, whole call {own:.3f} s (medians), "
                        f"ratio {plain / own:.1f}, difference {gap:.1e}",
                        flush=True,
                    )


if __name__ == "__main__":
    main()
