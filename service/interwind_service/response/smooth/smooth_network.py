"""A network with smooth laws, run by RODAS4 from one change of its drives or switches to the next."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.response.drive.drives import Drives
from interwind_service.response.smooth.monodromy import transition
from interwind_service.response.smooth.nonlinear_field import Field, field_of
from interwind_service.response.smooth.nonlinear_ledger import Ledger
from interwind_service.response.smooth.rosenbrock import Effort, Steps, integrate
from interwind_service.response.switched.device import LinearDiode
from interwind_service.response.switched.energy import power_terms
from interwind_service.response.switched.nonlinear_laws import Laws, laws_of
from interwind_service.response.switched.switched_network import Passage, SwitchedNetwork, switched_network
from interwind_service.response.switched.tableau import Mode, Tableau

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class Stretch:
    """An interval without a change of drives or switches: its field and powers, and the drives w at its start."""

    field: Field
    ledger: Ledger
    mode: Mode
    start_s: float
    stop_s: float
    w: ComplexArray


class StepRecord(Protocol):
    """What is read off a run: it hears of each stretch, of its steps in blocks, and of the very end."""

    def begin(self, stretch: Stretch) -> None:
        """Hear of a new stretch."""

    def take(self, steps: Steps) -> None:
        """Take some steps of the stretch."""

    def finish(self, y: FloatArray, effort: Effort) -> None:
        """Take the unknowns at the end of the run, and how hard it was."""


@dataclass(slots=True, eq=False)
class SmoothNetwork:
    """A prepared network with its laws; each step keeps its local error to ``tolerance`` of ``size``.

    ``size`` the largest |x| met in any run so far and ``energy_j`` what went through branches in the last one are what
    errors count against.
    """

    switched: SwitchedNetwork
    laws: Laws
    tolerance: float
    size: float = 0.0
    energy_j: float = 0.0
    fields: dict[Mode, tuple[Field, Ledger]] = field(default_factory=dict)

    @property
    def tableau(self) -> Tableau:
        """The linear part."""
        return self.switched.tableau

    @property
    def breakpoint_s(self) -> FloatArray:
        """The instants at which a gate or waveform sets the network anew, both ends included."""
        return self.switched.breakpoint_s

    def start_mode(self, x: FloatArray) -> Mode:
        """Return open switches and conducting diodes: a law has no modes, and books as heat what its slope takes."""
        return tuple(int(isinstance(device, LinearDiode)) for device in self.tableau.devices)

    def run(
        self,
        x: FloatArray,
        mode: Mode,
        *,
        record: StepRecord | None = None,
        monodromy: bool = False,
        progress: Callable[[int, int], None] | None = None,
    ) -> Passage:
        """Run from x over all stretches; with ``monodromy`` also Φ = ∂x(end)/∂x(start)."""
        passage = Passage(x, mode, np.eye(len(x)) if monodromy else None, 0.5 * float(x @ x))
        effort = Effort(size=max(self.size, float(np.linalg.norm(x))), energy_j=self.energy_j)
        drives, at = self.tableau.drives, self.breakpoint_s
        for k in range(len(at) - 1):
            start, stop = float(at[k]), float(at[k + 1])
            inside = 0.5 * (start + stop)
            w = drives.moved(drives.state(inside), start - inside)
            passage.mode = self.switched.mode_at(passage.mode, start, stop)
            own, ledger = self.equations(passage.mode)
            if record is not None:
                record.begin(Stretch(own, ledger, passage.mode, start, stop, w))
            y = own.consistent(np.concatenate([passage.x, np.zeros(own.size - own.states)]), own.drives(w))
            size, energy_j = _expected(own, drives, w, stop - start)
            effort.size = max(effort.size, tol.SIZE_FLOOR * size)
            effort.through_j = max(effort.through_j, tol.SIZE_FLOOR * energy_j)
            effort.swing = max(effort.swing, float(np.abs(y[own.states :]).max(initial=0.0)))
            effort.step_s = tol.FIRST_STEP * (stop - start)

            def take(steps: Steps, own: Field = own) -> None:
                if passage.jacobian is not None:
                    passage.jacobian = transition(own, drives, steps) @ passage.jacobian
                if record is not None:
                    record.take(steps)
                energy_j = 0.5 * float((steps.y1[:, : own.states] ** 2).sum(axis=1).max())
                passage.peak_j = max(passage.peak_j, energy_j)

            watched = ledger if own.size > own.states or self.laws.broken else None
            y = integrate(own, drives, y, w, start, stop, self.tolerance, effort, take, watched)
            passage.x = y[: own.states]
            if progress is not None:
                progress(k + 1, len(at) - 1)
        self.size, self.energy_j = effort.size, effort.through_j
        if record is not None:
            record.finish(y, effort)
        return passage

    def equations(self, mode: Mode) -> tuple[Field, Ledger]:
        """Return the equations and the powers while the switches stand in these modes."""
        found = self.fields.get(mode)
        if found is None:
            if len(self.fields) >= tol.PIECES_KEPT:
                self.fields.pop(next(iter(self.fields)))
            own = field_of(self.tableau, mode, self.laws)
            found = own, Ledger(own, self.tableau.drives, power_terms(self.tableau, mode))
            self.fields[mode] = found
        return found


def smooth_network(
    topology: Topology, stop_s: float, step_s: float, tolerance: float, period_s: float | None = None
) -> SmoothNetwork:
    """Prepare a network for a run over [0, stop]."""
    switched = switched_network(topology, stop_s, step_s, period_s)
    tableau = switched.tableau
    return SmoothNetwork(switched, laws_of(topology, tableau.devices, 1.0 / tableau.limit.open_ohm), tolerance)


def _expected(field: Field, drives: Drives, w: ComplexArray, span_s: float) -> tuple[float, float]:
    """Return about how large |x| grows under the drives of an interval, and the energy that may go through a branch.

    From a state of exactly 0 a relative error means nothing; these give it a scale: |x| at rest, or by plain growth if
    that is less, the laws as they are at 0, for beyond their currents would be no guide; U² / ρ of what the drives put
    across the laws, and a small share of the |x| that it would charge. The looks at the drives are a golden section
    apart, so that no drive is met at its zeros alone.
    """
    moved = drives.moved_to(w, span_s * (np.arange(tol.SIZE_LOOKS) * tol.GOLDEN_SECTION % 1.0))
    rows, nothing = field.drives(moved), np.zeros_like(field.drives(w))
    f = rows[:, : field.size]
    J, _ = field.jacobian(np.zeros(field.size), nothing, nothing)
    rest = np.linalg.lstsq(J, f.T, rcond=None)[0][: field.states]
    growth = span_s * float(np.linalg.norm(f[:, : field.states], axis=1).max())
    across_v = float(np.abs(rows[:, field.size :]).max(initial=0.0))
    energy_j = span_s * across_v**2 / field.rho
    size = min(float(np.linalg.norm(rest, axis=0).max()), growth)
    return max(size, tol.SIZE_FLOOR * float(np.sqrt(2.0 * energy_j))), energy_j
