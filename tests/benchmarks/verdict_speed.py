"""How long a verdict with all feasible intervals takes, in units of one numpy.linalg.eigvalsh of the same size.

Run: OPENBLAS_NUM_THREADS=1 python tests/benchmarks/verdict_speed.py [repeats]
"""

from __future__ import annotations

import platform
import statistics
import sys
import time
from collections.abc import Callable

import numpy as np

from interwind.model.windings import WindingSet
from interwind_service.windings.verdict import check

SIZES = (500, 2000)


def median_s(function: Callable[[], object], repeats: int) -> float:
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        function()
        times.append(time.perf_counter() - start)
    return statistics.median(times)


def sets(size: int) -> dict[str, WindingSet]:
    """A set that can exist, and the same with the pair that its weakest direction leans on misread."""
    A = np.random.default_rng(size).normal(size=(size, size + 50))
    L = 1e-6 / size * A @ A.T
    labels = [f"w{i}" for i in range(size)]
    v = np.linalg.eigh(L)[1][:, 0]
    i, j = np.argsort(-np.abs(v))[:2]
    wrong = L.copy()
    wrong[i, j] = wrong[j, i] = L[i, j] - 0.3 * np.sign(v[i] * v[j]) * np.sqrt(L[i, i] * L[j, j])
    return {"possible": WindingSet(labels, L), "one pair misread": WindingSet(labels, wrong)}


def main() -> None:
    repeats = int(sys.argv[1]) if len(sys.argv) > 1 else 5
    print(f"{platform.processor() or platform.machine()}, Python {platform.python_version()}, NumPy {np.__version__}")
    print("command: " + " ".join(["python", *sys.argv]))
    for size in SIZES:
        for name, coils in sets(size).items():
            matrix = np.array(coils.coupling)
            base = median_s(lambda K=matrix: np.linalg.eigvalsh(K), repeats)
            whole = median_s(lambda c=coils: check(c), repeats)
            print(f"N {size:5d}  {name:17s}  eigvalsh {base:8.4f} s  check {whole:8.4f} s  ratio {whole / base:5.2f}")


if __name__ == "__main__":
    main()
