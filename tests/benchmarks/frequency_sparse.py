"""A network of ten thousand unknowns: a whole frequency response against one plain `splu` a frequency.

    OPENBLAS_NUM_THREADS=1 python tests/benchmarks/frequency_sparse.py

The plain loop factors and solves the same nodal equations with SciPy's defaults; assembling them is not counted there.
"""

from __future__ import annotations

import statistics
import sys
import time
from pathlib import Path

import numpy as np
from scipy import sparse
from scipy.sparse import linalg as sla

import interwind as iw
from interwind_service.network.stamps import Stamps, Triplets
from interwind_service.network.system import assemble, plan_of
from interwind_service.network.topology import number

sys.path.insert(0, str(Path(__file__).parents[1] / "response"))
from meshes import mesh

SIDE = 71  # 9 927 unknowns
ASKED = [iw.NodeVoltage(f"{SIDE - 1} {SIDE - 1}"), iw.WindingCurrent("T 0 0", "p")]


def equations(network: iw.Network, node: str) -> tuple[sparse.csc_matrix, sparse.csc_matrix, np.ndarray, int]:
    """G, C, the right side of the sources at their phasors, and the row of a node."""
    topology = number(network)
    plan = plan_of(topology)
    stamps = assemble(topology, plan, Stamps(len(plan.unknowns), len(topology.inputs), Triplets))
    phasors = [network.element(name).phasor for name in topology.inputs]
    return stamps.G.sparse(), stamps.C.sparse(), stamps.B @ np.array(phasors), int(plan.rows[topology.node(node)])


def measure(frequencies: int = 100, repeats: int = 3) -> tuple[float, float, float, int]:
    """Medians of the whole call and of the plain loop, s; their largest difference over the voltage; the unknowns."""
    network = mesh(SIDE)
    frequency_hz = np.geomspace(1e4, 1e9, frequencies)
    G, C, b, row = equations(network, ASKED[0].node)
    own, plain = [], []
    with iw.connect() as solver:
        for _ in range(repeats):
            begin = time.perf_counter()
            answer = solver.frequency_response(network, frequency_hz, ASKED, timeout_s=300)
            own.append(time.perf_counter() - begin)
            begin = time.perf_counter()
            volts = np.array([sla.splu((G + 2j * np.pi * f * C).tocsc()).solve(b)[row] for f in frequency_hz])
            plain.append(time.perf_counter() - begin)
    gap = np.abs(answer[ASKED[0]] - volts).max() / np.abs(volts).max()
    return statistics.median(own), statistics.median(plain), float(gap), G.shape[0]


def main() -> None:
    """Print one line a number of frequencies."""
    for frequencies in (60, 200):
        own, plain, gap, unknowns = measure(frequencies)
        print(
            f"{unknowns} unknowns, {frequencies} frequencies: whole call {own:.2f} s = {own / plain:.2f} times plain "
            f"splu of {plain:.2f} s (medians), difference {gap:.1e}",
            flush=True,
        )


if __name__ == "__main__":
    main()
