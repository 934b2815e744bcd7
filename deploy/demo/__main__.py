"""The demonstration: two winding sets judged and solved by the service through its client.

Every figure is printed beside its golden value, which a second method found; the demonstration fails when one differs
by more than the last golden digit. Pictures go to ``demo-output/`` beside the ``deploy`` folder.
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

import cell_lift
import cell_lift_supply
import disc_winding
from figures import Figures

import interwind as iw


def main() -> int:
    """Run both examples and return the exit status."""
    began = time.perf_counter()
    output = Path(__file__).parents[2] / "demo-output"
    output.mkdir(exist_ok=True)
    figures = Figures()
    with iw.connect() as solver:
        info = solver.server_info()
        print(f"service {info.service_version}, contract {info.api_version}, {info.worker_count} workers")
        cell_lift.show(solver, figures, output)
        cell_lift_supply.show(solver, figures, output)
        disc_winding.show(solver, figures, output)
    print(f"\npictures in {output.name}/: {', '.join(sorted(path.name for path in output.glob('*.png')))}")
    print(f"{figures.count} figures in {time.perf_counter() - began:.1f} s")
    if figures.wrong:
        print(f"{len(figures.wrong)} differ from their golden value: {', '.join(figures.wrong)}", file=sys.stderr)
    return 1 if figures.wrong else 0


if __name__ == "__main__":
    sys.exit(main())
