"""Sixty discs under a lightning impulse: modes, frequency response, stresses; and the same with far mutuals dropped."""

from __future__ import annotations

import json
from itertools import pairwise
from pathlib import Path

import numpy as np
from figures import Figures, cautions, title

import interwind as iw
from interwind import plot

DATA = json.loads(Path(__file__).with_name("disc_winding.json").read_text(encoding="utf-8"))
COUNT = len(DATA["disc_inductance_h"])
NODES = ["line", *(f"n{number}" for number in range(1, COUNT)), "ground"]
INNER = [iw.NodeVoltage(node) for node in NODES[1:-1]]
FULL_WAVE_V = 750e3  # what 1 p.u. stands for in the picture
PATIENCE_S = 120.0  # a busy machine takes a multiple of the usual seconds
RUN_S = 150e-6  # within it the deepest swing below zero and the largest disc current of the golden run
KEPT_NEIGHBOURS = 5


def discs(*, neighbours: int = COUNT) -> iw.WindingSet:
    """The sixty discs; mutual inductance beyond so many neighbours is dropped."""
    distance = np.abs(np.subtract.outer(np.arange(COUNT), np.arange(COUNT)))
    inductance_h = np.where(distance <= neighbours, np.array(DATA["disc_inductance_h"])[distance], 0.0)
    labels = [f"disc {number}" for number in range(1, COUNT + 1)]
    return iw.WindingSet(labels, inductance_h, resistance_ohm=DATA["disc_resistance_ohm"])


def network(coils: iw.WindingSet, waveform: object) -> iw.Network:
    """The winding from line to ground: capacitance and loss across each disc, capacitance to ground at each node."""
    elements = [
        iw.VoltageSource("impulse", "line", "ground", waveform=waveform, phasor=1.0),
        iw.Windings("winding", coils, dict(zip(coils.labels, pairwise(NODES), strict=True))),
    ]
    for number, (start, finish) in enumerate(pairwise(NODES), 1):
        elements.append(iw.Capacitor(f"series {number}", start, finish, capacitance_f=DATA["disc_capacitance_f"]))
        elements.append(iw.Resistor(f"loss {number}", start, finish, resistance_ohm=DATA["disc_parallel_ohm"]))
    for node in NODES[1:-1]:
        elements.append(iw.Capacitor(f"ground {node}", node, "ground", capacitance_f=DATA["ground_capacitance_f"]))
    return iw.Network("ground", elements)


def show(solver: iw.Client, figures: Figures, output: Path) -> None:
    """Judge the winding, solve it over frequency and time, and refuse its banded version."""
    title("Sixty discs under a lightning impulse")
    print(DATA["story"])
    golden = DATA["golden"]
    coils = discs()
    report = solver.check(coils)
    figures.compare("disc_winding_verdict", report.verdict.name, golden["verdict"])

    impulse = DATA["impulse"]
    wave = iw.DoubleExponential(
        amplitude=impulse["amplitude"], tail_s=1 / impulse["tail_per_s"], front_s=1 / impulse["front_per_s"]
    )
    net = network(coils, wave)
    sweep = show_modes(solver, net, figures, output)
    surge = show_impulse(solver, net, figures, output)
    start = solver.time_response(network(coils, iw.Step(1.0)), stop_s=1e-6, step_s=1e-6, observe=INNER[:1])
    figures.compare("disc_winding_first_disc_share", 1.0 - start[INNER[0]][0], golden["first_disc_share"])
    cautions(report, sweep, surge, start)
    show_banded(solver, wave, figures)


def show_modes(solver: iw.Client, net: iw.Network, figures: Figures, output: Path) -> iw.FrequencyResponse:
    """Find the first modes: around each peak of a sweep, one pole is fitted to the responses of all nodes."""
    sweep = solver.frequency_response(net, np.arange(20e3, 320e3, 250.0), observe=INNER, timeout_s=PATIENCE_S)
    height = np.linalg.norm(sweep.samples, axis=1)
    peaks = np.flatnonzero((height[1:-1] > height[:-2]) & (height[1:-1] > height[2:])) + 1
    around_hz = np.linspace(-500.0, 500.0, 9)
    fine = solver.frequency_response(net, np.add.outer(sweep.frequency_hz[peaks], around_hz).ravel(), observe=INNER)
    grids = fine.samples.reshape(len(peaks), len(around_hz), -1)
    for number, golden in enumerate(DATA["golden"]["mode_khz"]):
        pole_per_s = fit_pole(sweep.frequency_hz[peaks[number]] + around_hz, grids[number])
        figures.compare(f"disc_winding_mode_{number + 1}_khz", pole_per_s.imag / (2e3 * np.pi), golden)
    shown = [INNER[int(node) - 1] for node in DATA["golden"]["nodes"]]
    plot.save(sweep, output / "disc_winding_frequency.png", observe=shown)
    return sweep


def fit_pole(frequency_hz: np.ndarray, samples: np.ndarray) -> complex:
    """Fit H_k(s) = r_k / (s − p) + a_k + b_k s near one resonance; the pole p, 1/s, is shared by all nodes k.

    Multiplied by s − p that is linear: s H_k = p H_k + (a quadratic in s). The quadratic is projected away; p remains.
    """
    s = 2j * np.pi * frequency_hz
    centred = np.linspace(-1.0, 1.0, len(s))
    smooth, _ = np.linalg.qr(np.vander(centred, 3))
    shaped, turned = samples - smooth @ (smooth.T @ samples), s[:, None] * samples
    return complex(np.vdot(shaped, turned - smooth @ (smooth.T @ turned)) / np.vdot(shaped, shaped))


def show_impulse(solver: iw.Client, net: iw.Network, figures: Figures, output: Path) -> iw.TimeResponse:
    """Solve the impulse and read off the stresses: to ground, across each disc, and the current of the first."""
    golden = DATA["golden"]
    first_disc = iw.WindingCurrent("winding", "disc 1")
    observe = [iw.NodeVoltage("line"), *INNER, first_disc]
    surge = solver.time_response(net, stop_s=RUN_S, step_s=20e-9, observe=observe)
    to_ground = np.column_stack([surge[observable] for observable in INNER])
    time_us = surge.time_s * 1e6

    when, where = np.unravel_index(np.argmax(to_ground), to_ground.shape)
    figures.compare("disc_winding_highest_per_unit", to_ground[when, where], golden["highest_v"])
    figures.compare("disc_winding_highest_node", int(where) + 1, golden["highest_node"])
    figures.compare("disc_winding_highest_us", time_us[when], golden["highest_us"])
    when, where = np.unravel_index(np.argmin(to_ground), to_ground.shape)
    figures.compare("disc_winding_lowest_per_unit", to_ground[when, where], golden["lowest_v"])
    figures.compare("disc_winding_lowest_node", int(where) + 1, golden["lowest_node"])

    ends = np.column_stack([surge[observe[0]], to_ground, np.zeros(len(time_us))])
    across = np.abs(-np.diff(ends, axis=1))
    when, where = np.unravel_index(np.argmax(across), across.shape)
    figures.compare("disc_winding_worst_disc_per_unit", across[when, where], golden["worst_disc_v"])
    figures.compare("disc_winding_worst_disc", int(where) + 1, golden["worst_disc"])
    figures.compare("disc_winding_worst_disc_us", time_us[when], golden["worst_disc_us"])
    figures.compare("disc_winding_disc_30_per_unit", across[:, 29].max(), golden["disc_30_v"])
    figures.compare("disc_winding_disc_1_ma", 1e3 * np.abs(surge[first_disc]).max(), golden["disc_1_peak_ma"])
    for instant_us, values in golden["node_v"].items():
        sample = int(np.argmin(np.abs(time_us - float(instant_us))))
        for node, value in zip(golden["nodes"], values, strict=True):
            name = f"disc_winding_node_{node}_at_{instant_us}_us"
            figures.compare(name, to_ground[sample, int(node) - 1], value)
    print(f"energy balance closes to {surge.evidence.energy_error:.1e} of the energy supplied")
    draw_stress(surge, ends, across, output / "disc_winding_impulse.png")
    return surge


def draw_stress(surge: iw.TimeResponse, ends: np.ndarray, across: np.ndarray, path: Path) -> None:
    """Draw the envelopes of the voltage to ground and across each disc, over the position in the winding."""
    figure = plot.blank(surge, f"stress along the winding, 1 p.u. = {FULL_WAVE_V / 1e3:.0f} kV", rows=2)
    ground, disc = figure.axes
    ground.fill_between(range(COUNT + 1), ends.min(axis=0), ends.max(axis=0), alpha=0.4)
    ground.plot(range(COUNT + 1), ends[np.searchsorted(surge.time_s, 2e-6)], label="at 2 µs")
    ground.set_ylabel("to ground, p.u.")
    ground.legend()
    disc.bar(range(1, COUNT + 1), across.max(axis=0) * FULL_WAVE_V / 1e3)
    disc.set_ylabel("across a disc, kV")
    disc.set_xlabel("disc, from the line end")
    figure.savefig(path, dpi=150)


def show_banded(solver: iw.Client, wave: iw.DoubleExponential, figures: Figures) -> None:
    """Drop the mutuals beyond a few neighbours: the set can no longer exist, and a solve with it is refused."""
    title(f"The same discs, mutual inductance beyond {KEPT_NEIGHBOURS} neighbours dropped")
    golden = DATA["golden"]
    banded = discs(neighbours=KEPT_NEIGHBOURS)
    report = solver.check(banded)
    figures.compare("banded_verdict", report.verdict.name, golden["banded_verdict"])
    figures.compare("banded_eigenvalue", report.eigenvalues[0], golden["banded_eigenvalue"])
    try:
        solver.time_response(network(banded, wave), stop_s=1e-6, step_s=1e-6, observe=INNER[:1])
    except iw.InvalidWindings as refusal:
        figures.compare("banded_refusal", refusal.reason, golden["banded_refusal"])
        print(f"refused: {refusal}")
    else:
        figures.compare("banded_refusal", "SOLVED", golden["banded_refusal"])
