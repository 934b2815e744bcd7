"""How fast long linear runs are, in units of scipy.signal.lsim on the same state space in the same run.

Run: OPENBLAS_NUM_THREADS=1 python tests/benchmarks/time_speed.py [steps] [repeats]
"""

from __future__ import annotations

import platform
import statistics
import sys
import time
from collections.abc import Callable

import numpy as np
import scipy
from scipy import signal

from interwind.model import elements as el
from interwind.model import observables as ob
from interwind.model import waveform as wf
from interwind.model.network import Network
from interwind_service.response.time import time_response

SECTIONS = 10
STEP_S = 1e-6
OBSERVE = [ob.NodeVoltage("n1"), ob.NodeVoltage("n5"), ob.NodeVoltage("n10")]


def values(k: int) -> tuple[float, float, float, float]:
    """L, R in series, C and leak across of section k."""
    return 1e-3 * (1 + k / 10), 2.0, 1e-6 * (1 + k / 7), 1e3


def ladder(waveform: wf.Waveform) -> Network:
    """Twenty states: ten sections of L and R in series, C and a leak across."""
    elements: list[el.Element] = [el.VoltageSource("V", "n0", "0", waveform)]
    for k in range(SECTIONS):
        L, R, C, leak = values(k)
        elements += [
            el.Inductor(f"L{k}", f"n{k}", f"m{k}", L),
            el.Resistor(f"R{k}", f"m{k}", f"n{k + 1}", R),
            el.Capacitor(f"C{k}", f"n{k + 1}", "0", C),
            el.Resistor(f"G{k}", f"n{k + 1}", "0", leak),
        ]
    return Network("0", elements)


def state_space() -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """A, B, C, D of the same ladder, by hand."""
    n = SECTIONS
    A, B, C = np.zeros((2 * n, 2 * n)), np.zeros((2 * n, 1)), np.zeros((3, 2 * n))
    for k in range(n):
        inductance, R, capacitance, leak = values(k)
        A[k, k], A[k, n + k], A[n + k, k] = -R / inductance, -1 / inductance, 1 / capacitance
        A[n + k, n + k] = -1 / (leak * capacitance)
        if k:
            A[k, n + k - 1] = 1 / inductance
        if k < n - 1:
            A[n + k, k + 1] = -1 / capacitance
    B[0, 0] = 1 / values(0)[0]
    C[0, n], C[1, n + 4], C[2, n + 9] = 1.0, 1.0, 1.0
    return A, B, C, np.zeros((3, 1))


def drives(steps: int) -> dict[str, tuple[wf.Waveform, np.ndarray]]:
    """Waveforms, and their samples for lsim; the record has a corner at every sample."""
    t = STEP_S * np.arange(steps + 1)
    record = np.random.default_rng(0).standard_normal(steps + 1)
    return {
        "step": (wf.Step(1.0), np.ones(steps + 1)),
        "sine": (wf.Sine(1.0, 3e3), np.sin(2 * np.pi * 3e3 * t)),
        "record": (wf.SampledRecord(STEP_S, record), record),
    }


def median_s(function: Callable[[], object], repeats: int) -> float:
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        function()
        times.append(time.perf_counter() - start)
    return statistics.median(times)


def ratio(name: str, steps: int, repeats: int, reference_repeats: int = 1) -> tuple[float, float, float]:
    """Seconds of the whole call, seconds of lsim, largest difference of the samples."""
    waveform, u = drives(steps)[name]
    network, t = ladder(waveform), STEP_S * np.arange(steps + 1)
    answer = time_response(network, steps * STEP_S, STEP_S, OBSERVE)
    own = median_s(lambda: time_response(network, steps * STEP_S, STEP_S, OBSERVE), repeats)
    reference = median_s(lambda: signal.lsim(state_space(), u, t), reference_repeats)
    _, samples, _ = signal.lsim(state_space(), u[:2001], t[:2001])
    return own, reference, float(np.abs(samples - answer.samples[:2001]).max())


def main() -> None:
    steps = int(sys.argv[1]) if len(sys.argv) > 1 else 200_000
    repeats = int(sys.argv[2]) if len(sys.argv) > 2 else 5
    print(f"{platform.processor() or platform.machine()}, Python {platform.python_version()}, ", end="")
    print(f"NumPy {np.__version__}, SciPy {scipy.__version__}")
    print("command: " + " ".join(["python", *sys.argv]))
    print(f"{steps} steps, 20 states, 3 observables; medians of {repeats}")
    for name in drives(2):
        own, reference, gap = ratio(name, steps, repeats)
        print(
            f"{name}: {own:.4f} s ({own / steps * 1e9:.0f} ns a step), lsim {reference:.3f} s, "
            f"ratio {reference / own:.1f}, largest difference {gap:.1e}"
        )


if __name__ == "__main__":
    main()
