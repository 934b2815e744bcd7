"""A table of couplings that cannot exist, and the one entry to blame: the auxiliary supply of a lift's inverter."""

from __future__ import annotations

import json
from pathlib import Path

from figures import Figures, cautions, title

import interwind as iw
from interwind import plot

READING_ACCURACY = 1e-3  # one standard deviation of a bridge reading, relative
DATA = json.loads(Path(__file__).with_name("cell_lift.json").read_text(encoding="utf-8"))


def windings() -> iw.WindingSet:
    """The five windings as the bench typed them."""
    return iw.WindingSet.from_coupling(
        DATA["labels"],
        DATA["self_inductance_h"],
        DATA["coupling"],
        coupling_decimals=DATA["coupling_decimals"],
    )


def show(solver: iw.Client, figures: Figures, output: Path) -> None:
    """Judge the set, name the pair at fault and the interval it would have to lie in."""
    title("Five windings of an auxiliary supply")
    print(DATA["story"])
    golden = DATA["golden"]
    report = solver.check(windings())
    figures.compare("cell_lift_verdict", report.verdict.name, golden["verdict"])
    for position, value in enumerate(golden["eigenvalues"]):
        figures.compare(f"cell_lift_eigenvalue_{position + 1}", report.eigenvalues[position], value)
    figures.compare("cell_lift_culprits", len(report.culprits), golden["culprit_count"])
    culprit = report.culprits[0]
    numbers = sorted(DATA["labels"].index(label) + 1 for label in culprit.pair)
    print(f"to blame: the coupling of {culprit.pair[0]} and {culprit.pair[1]}; no other single change cures the set")
    figures.compare("cell_lift_pair", f"({numbers[0]},{numbers[1]})", golden["culprit"])
    figures.compare("cell_lift_pair_low", culprit.low, golden["culprit_low"])
    figures.compare("cell_lift_pair_high", culprit.high, golden["culprit_high"])
    figures.compare("cell_lift_pair_suggested", culprit.suggested, golden["culprit_suggested"])
    plot.save(report, output / "cell_lift_intervals.png")
    cautions(report, show_mended(solver, figures), show_identified(solver, figures))


def show_mended(solver: iw.Client, figures: Figures) -> iw.RepairReport:
    """Mend the one entry to blame and see what that does to the leakage of the primary, all others shorted."""
    golden = DATA["golden"]
    mended = solver.repair(windings())
    print("mended with the least said: " + "; ".join(finding.message for finding in mended.findings[:2]))
    figures.compare("cell_lift_mended_coupling", mended.windings.coupling[2, 4], golden["mended_coupling"])
    leakage_h = solver.characterize(mended.windings).all_shorted_leakage_h
    figures.compare("cell_lift_mended_leakage_uh", leakage_h[0] * 1e6, golden["mended_leakage_uh"])
    return mended


def show_identified(solver: iw.Client, figures: Figures) -> iw.Identification:
    """Rebuild the set from open and short-circuit tests: the coupling that could not be right comes out."""
    golden = DATA["golden"]
    readings = [
        iw.OpenInductance(label, row[place], row[place] * READING_ACCURACY)
        for place, (label, row) in enumerate(zip(DATA["labels"], DATA["inductance_without_error_h"], strict=True))
    ]
    for driven, shorted, inductance_h in DATA["shorted_inductance_h"]:
        readings.append(iw.ShortedInductance(driven, (shorted,), inductance_h, inductance_h * READING_ACCURACY))
    found = solver.identify(DATA["labels"], readings)
    report = solver.check(found.windings)
    leakage_h = solver.characterize(found.windings).all_shorted_leakage_h
    figures.compare("cell_lift_identified_coupling", found.windings.coupling[2, 4], golden["identified_coupling"])
    figures.compare("cell_lift_identified_eigenvalue", report.eigenvalues[0], golden["identified_eigenvalue"])
    figures.compare("cell_lift_identified_leakage_uh", leakage_h[0] * 1e6, golden["identified_leakage_uh"])
    return found
