"""Large dense sets: a whole port response against complex LU factorizations of the same modified nodal matrix.

    OPENBLAS_NUM_THREADS=1 python tests/benchmarks/frequency_large.py 1000 2000

A chain of windings at random places in a unit cube, coupling 0.6 exp(−distance/0.4), every tenth winding from the chain
to ground, 150 capacitors, two ports, 1000 frequencies over five decades. It prints the machine, medians and ratios.
"""

from __future__ import annotations

import os
import platform
import statistics
import sys
import time
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import scipy.linalg as sl

import interwind as iw

FREQUENCIES = np.geomspace(1e4, 1e9, 1000)


def dense_set(count: int, capacitors: int = 150, seed: int = 1) -> iw.Network:
    """``count`` windings, nine tenths of them a chain."""
    rng = np.random.default_rng(seed)
    chain = count * 9 // 10
    place = rng.random((count, 3))
    coupling = 0.6 * np.exp(-np.linalg.norm(place[:, None] - place, axis=2) / 0.4)
    np.fill_diagonal(coupling, 1.0)
    root = np.sqrt(rng.uniform(5e-9, 20e-9, count))
    labels = [f"w{k}" for k in range(count)]
    coils = iw.WindingSet(labels, coupling * np.outer(root, root), rng.uniform(1e-3, 10e-3, count))
    terminals = {labels[k]: (f"n{k}", f"n{k + 1}") for k in range(chain)}
    terminals |= {labels[k]: (f"n{rng.integers(chain)}", "0") for k in range(chain, count)}
    elements: list[iw.Element] = [iw.Windings("set", coils, terminals), iw.Resistor("load", f"n{chain}", "0", 50.0)]
    for k in range(capacitors):
        elements.append(iw.Capacitor(f"C{k}", f"n{rng.integers(chain + 1)}", "0", 10.0 ** rng.uniform(-12, -10)))
    ends = ("n0", f"n{chain}")
    return iw.Network("0", elements, ports=[iw.Port(f"port {end}", end, "0", 50.0) for end in ends])


def factor_seconds(system: iw.MnaSystem) -> float:
    """Time of one complex LU factorization at the middle of the band."""
    A = system.G + 2j * np.pi * np.sqrt(FREQUENCIES[0] * FREQUENCIES[-1]) * system.C
    begin = time.perf_counter()
    sl.lu_factor(A, overwrite_a=True, check_finite=False)
    return time.perf_counter() - begin


def direct_error(system: iw.MnaSystem, network: iw.Network, answer: iw.PortResponse, points: int) -> float:
    """Largest difference of Z from direct solves, over the largest entry of Z at that frequency."""
    rows = [system.unknowns.index(iw.NodeVoltage(port.a)) for port in network.ports]
    right = np.zeros((len(system.G), len(rows)), dtype=complex)
    right[rows, range(len(rows))] = 1.0
    worst = 0.0
    for k in np.linspace(0, len(FREQUENCIES) - 1, points).astype(int).tolist():
        A = system.G + 2j * np.pi * FREQUENCIES[k] * system.C
        Z = sl.solve(A, right, overwrite_a=True, check_finite=False)[rows]
        worst = max(worst, float(np.abs(answer.impedance_ohm[k] - Z).max() / np.abs(Z).max()))
    return worst


def peak_mb() -> float:
    """Largest resident size that any process below this one has had (Linux)."""
    status = {}
    for file in Path("/proc").glob("[0-9]*/status"):
        try:
            fields = dict(line.split(":", 1) for line in file.read_text().splitlines() if ":" in line)
        except OSError:  # it ended in between
            continue
        if "VmHWM" in fields:
            status[int(fields["Pid"])] = int(fields["PPid"]), int(fields["VmHWM"].split()[0]) / 1024
    below = {os.getpid()}
    for _ in range(4):
        below |= {pid for pid, (parent, _) in status.items() if parent in below}
    return max(status[pid][1] for pid in below - {os.getpid()})


@dataclass(frozen=True)
class Measured:
    """Medians of the whole call and of one factorization, s; error of Z; peak memory of a worker, MB."""

    unknowns: int
    call_s: float
    factor_s: float
    error: float
    peak_mb: float
    answer: iw.PortResponse


def measure(count: int, repeats: int = 3, direct_points: int = 20) -> Measured:
    """Measure one size, factorizations and calls in turn."""
    network = dense_set(count)
    factors, calls = [], []
    with iw.connect() as solver:
        system = solver.stamp(network, timeout_s=120)
        for _ in range(repeats):
            factors.append(factor_seconds(system))
            begin = time.perf_counter()
            answer = solver.port_response(network, FREQUENCIES, timeout_s=600)
            calls.append(time.perf_counter() - begin)
            factors.append(factor_seconds(system))
        peak = peak_mb()
    error = direct_error(system, network, answer, direct_points)
    return Measured(len(system.unknowns), statistics.median(calls), statistics.median(factors), error, peak, answer)


def main() -> None:
    """Run the sizes named on the command line."""
    print(f"{platform.processor() or platform.machine()}, Python {platform.python_version()}, NumPy {np.__version__}")
    print(f"command: {' '.join(sys.argv)}", flush=True)
    for count in [int(word) for word in sys.argv[1:]] or [1000]:
        found = measure(count)
        print(
            f"N = {count}, {found.unknowns} unknowns: whole call {found.call_s:.2f} s = "
            f"{found.call_s / found.factor_s:.1f} complex LU of {found.factor_s:.2f} s (medians); error against direct "
            f"points {found.error:.1e}; peak memory of a worker {found.peak_mb:.0f} MB; {found.answer.evidence.method}",
            flush=True,
        )


if __name__ == "__main__":
    main()
