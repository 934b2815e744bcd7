"""The supply the five windings stand in: its periodic state, found directly, and what a wrong matrix does to it."""

from __future__ import annotations

from pathlib import Path

import cell_lift
from figures import Figures, cautions, title

import interwind as iw
from interwind import plot

DATA = cell_lift.DATA
PERIOD_S = 1.0 / DATA["frequency_hz"]
NEAREST_FLOOR = 1e-6  # smallest eigenvalue the nearest matrix may have; 0 would leave no leakage at all
CLAMP, DRAIN = iw.ElementVoltage("clamp"), iw.NodeVoltage("drain")
RAILS = {rail: iw.NodeVoltage(rail) for rail in DATA["rails"]}


def supply(coils: iw.WindingSet) -> iw.Network:
    """A bus, a switch with its clamp on the primary, and a rectifier with its load on every other winding."""
    switch, clamp = DATA["switch"], DATA["clamp"]
    terminals = {"primary": ("bus", "drain"), **{rail: ("0v", f"anode {rail}") for rail in RAILS}}
    elements = [
        iw.VoltageSource("bus", "bus", "0v", waveform=iw.Constant(DATA["bus_v"])),
        iw.Windings("transformer", coils, terminals),
        iw.Switch(
            "switch", "drain", "0v", iw.Gate(PERIOD_S, DATA["duty"] * PERIOD_S),
            conducting_resistance_ohm=switch["conducting_resistance_ohm"],
            blocking_resistance_ohm=switch["blocking_resistance_ohm"],
        ),
        iw.Capacitor("switch capacitance", "drain", "0v", switch["capacitance_f"]),
        iw.Diode("clamp diode", "drain", "clamp", *clamp["diode"]),
        iw.Capacitor("clamp", "clamp", "bus", clamp["capacitance_f"]),
        iw.Resistor("clamp resistor", "clamp", "bus", clamp["resistance_ohm"]),
    ]  # fmt: skip
    for rail, parts in DATA["rails"].items():
        elements += [
            iw.Diode(f"diode {rail}", f"anode {rail}", rail, *parts["diode"]),
            iw.Capacitor(f"capacitor {rail}", rail, "0v", parts["capacitance_f"]),
            iw.Resistor(f"load {rail}", rail, "0v", parts["load_ohm"]),
        ]
    return iw.Network("0v", elements)


def show(solver: iw.Client, figures: Figures, output: Path) -> None:
    """Solve the supply with the true matrix and with two repairs of the impossible one, and compare the rails."""
    title("The supply these windings stand in, at its periodic state")
    typed = cell_lift.windings()
    sets = {
        "true": iw.WindingSet(DATA["labels"], DATA["inductance_without_error_h"], DATA["resistance_ohm"]),
        "mended pair": solver.repair(typed).windings,
        "nearest matrix": solver.repair(typed, method=iw.RepairMethod.NEAREST, floor=NEAREST_FLOOR).windings,
    }
    found = {
        name: solver.periodic_response(
            supply(iw.WindingSet(coils.labels, coils.inductance_h, DATA["resistance_ohm"])),
            PERIOD_S,
            PERIOD_S / 500,
            observe=[*RAILS.values(), DRAIN, CLAMP],
        )
        for name, coils in sets.items()
    }
    golden, steady = DATA["golden"], found["true"]
    for rail, volts in golden["rail_v"].items():
        figures.compare(f"cell_lift_rail_{rail}_v", steady.mean(RAILS[rail]), volts)
    figures.compare("cell_lift_clamp_v", steady.mean(CLAMP), golden["clamp_v"])
    figures.compare("cell_lift_drain_peak_v", steady.peak(DRAIN), golden["drain_peak_v"])
    power_w = steady.mean_power_w
    figures.compare("cell_lift_source_w", -power_w["bus"], golden["source_w"])
    figures.compare("cell_lift_load_w", sum(power_w[f"load {rail}"] for rail in RAILS), golden["load_w"])
    for name, response in found.items():
        rails = ", ".join(f"{rail} {response.mean(RAILS[rail]):.2f} V" for rail in RAILS)
        print(f"with the {name}: {rails}, drain peak {response.peak(DRAIN):.0f} V")
    print(
        f"periods propagated: {steady.evidence.periods_propagated}; slowest multiplier {abs(steady.multipliers[0]):.4f}"
    )
    plot.save(steady, output / "cell_lift_drain.png", observe=[DRAIN])
    cautions(steady)
