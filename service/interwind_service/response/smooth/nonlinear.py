"""What is read off a run of a network with smooth laws: samples, energies by account, and its evidence."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.model.finding import Evidence
from interwind.model.observables import Observable, StoredEnergy
from interwind.model.recording import RecordFigures
from interwind.model.response import EnergyLedger, Event, Initial
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.response.smooth.nonlinear_figures import NonlinearFigures
from interwind_service.response.smooth.rosenbrock import Effort, Steps
from interwind_service.response.smooth.smooth_network import SmoothNetwork, Stretch, smooth_network
from interwind_service.response.switched.device import SaturableBranch, TimedSwitch
from interwind_service.response.switched.energy import ABSORBED, DISSIPATED, JUMP, SUPPLIED, Energy, stored_j
from interwind_service.response.switched.handover import Handover
from interwind_service.response.switched.readings import Readings, readings_of
from interwind_service.response.switched.start import start_state
from interwind_service.response.switched.tableau import Mode, Tableau

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


class Reader:
    """The observables of one stretch, at any instants and unknowns."""

    def __init__(self, tableau: Tableau, observables: Sequence[Observable], stretch: Stretch) -> None:
        self.drives, self.stretch, self.field = tableau.drives, stretch, stretch.field
        self.readings: Readings = readings_of(tableau, stretch.mode, observables)
        over = self.readings.rows.over
        self.rows = (over @ self.field.signal_u, over @ self.field.signal_j, over @ self.field.signal_w)
        branches = {d.name: d for d in tableau.devices if isinstance(d, SaturableBranch)}
        self.saturable = [  # stored energies of saturable branches, whose pieces change within a stretch
            (position, branches[item.name])
            for position, item in enumerate(observables)
            if isinstance(item, StoredEnergy) and item.name in branches
        ]

    def along(self, steps: Steps, t: FloatArray) -> FloatArray:
        """Return the observables at instants t (T,) within some steps, shape (T, observables)."""
        which = np.clip(np.searchsorted(steps.start_s, t, side="right") - 1, 0, len(steps.start_s) - 1)
        return self.values(t, steps.at(which, (t - steps.start_s[which]) / steps.length_s[which]), steps.give)

    def values(self, t: FloatArray, y: FloatArray, give: FloatArray | None = None) -> FloatArray:
        """Return the observables for unknowns y (T, d) at instants t (T,), shape (T, observables)."""
        w = self.drives.moved_to(self.stretch.w, t - self.stretch.start_s)
        driven = self.field.drives(w)
        y = self.field.consistent(y, driven, give)
        j, _ = self.field.direct_currents(y, driven)
        sampled = y @ self.rows[0].T + j @ self.rows[1].T + (w @ self.rows[2].T).real + self.readings.rows.offset
        value = self.readings.values(sampled)
        for position, device in self.saturable:
            value[:, position] = device.energy_j(device.root * y[:, device.state])
        return value


class NonlinearRecord:
    """Samples, energies, switch changes and residual of a run, gathered block by block."""

    def __init__(self, network: SmoothNetwork, step_s: float, steps: int, out: Handover) -> None:
        self.tableau, self.observables, self.out = network.tableau, out.observables, out
        self.step_s, self.steps, self.next = step_s, steps, 0
        self.changes: list[tuple[float, int, int]] = []
        self.mode: Mode | None = None
        self.effort = Effort()
        elements = len(self.tableau.topology.network.elements)
        self.heat, self.absorbed = np.zeros(elements), np.zeros(elements)
        self.supplied = self.jump = self.residual = 0.0
        self.undefined: dict[int, Readings] = {}

    def begin(self, stretch: Stretch) -> None:
        """Note what the switches do, and what the observables are from here on."""
        for position, device in enumerate(self.tableau.devices):
            before = self.mode[position] if self.mode is not None else 0
            if isinstance(device, TimedSwitch) and stretch.mode[position] != before:
                self.changes.append((stretch.start_s, position, stretch.mode[position]))
        self.stretch, self.mode = stretch, stretch.mode
        self.reader = Reader(self.tableau, self.observables, stretch)
        self.undefined[len(self.undefined)] = self.reader.readings

    def take(self, steps: Steps) -> None:
        """Sample and book some steps."""
        total = self.stretch.ledger.energies(steps.y0, steps.stages, steps.w, steps.length_s)[0].sum(axis=0)
        account, element = self.stretch.ledger.terms.account, self.stretch.ledger.terms.element
        for where, own in ((self.heat, account == DISSIPATED), (self.absorbed, account == ABSORBED)):
            np.add.at(where, element[own], total[own])
        self.supplied += float(total[account == SUPPLIED].sum())
        self.jump += float(total[account == JUMP].sum())
        self._check(steps)
        end = steps.start_s[-1] + steps.length_s[-1]
        last = min(self.steps, int(np.ceil(end / self.step_s)))
        time_s = self.step_s * np.arange(self.next, last)
        time_s = time_s[: np.searchsorted(time_s, end)]
        for low in range(0, len(time_s), tol.SAMPLES_TOGETHER):
            self._put(self.reader.along(steps, time_s[low : low + tol.SAMPLES_TOGETHER]))

    def finish(self, y: FloatArray, effort: Effort) -> None:
        """Put the last sample, at the very end of the run."""
        self.effort = effort
        self._put(self.reader.values(np.array([self.stretch.stop_s]), y[None]))

    def _check(self, steps: Steps) -> None:
        """Take the residual of the algebraic equations at the ends of the steps, |f| over the sum of its terms."""
        field, drives = self.stretch.field, self.tableau.drives
        past = steps.start_s + steps.length_s - self.stretch.start_s
        driven = field.drives(drives.moved_to(self.stretch.w, past))
        self.residual = max(self.residual, field.residual(steps.y1, driven))

    def _put(self, value: FloatArray) -> None:
        """Hand on the samples that come next."""
        value[:, self.reader.readings.undefined] = np.nan
        self.out.take(self.next, value)
        self.next += len(value)

    def energy(self, start: FloatArray, end: FloatArray, peak_j: float) -> Energy:
        """Return the energy ledger of the run from state ``start`` to ``end``."""
        change = stored_j(self.tableau, end) - stored_j(self.tableau, start)
        heat = float(self.heat.sum())
        names = [element.name for element in self.tableau.topology.network.elements]
        ledger = EnergyLedger(
            self.supplied, heat, change, self.jump, self.supplied - heat - change - self.jump,
            {name: float(own) for name, own in zip(names, self.heat, strict=True) if own != 0.0},
        )  # fmt: skip
        scale = max(abs(self.supplied), peak_j)
        return Energy(ledger, abs(ledger.numerical_j) / scale if scale > 0.0 else 0.0, self.absorbed)

    @property
    def method(self) -> str:
        """How the run was made."""
        return f"RODAS4, {self.effort.accepted} steps, {self.effort.rejected} rejected"

    @property
    def events(self) -> tuple[Event, ...]:
        """The changes of the timed switches."""
        devices = self.tableau.devices
        return tuple(Event(t, devices[d].name, TimedSwitch.words[mode]) for t, d, mode in self.changes)


class FigureRecord(NonlinearRecord):
    """A record with figures over the time between two instants."""

    def __init__(
        self, network: SmoothNetwork, step_s: float, steps: int, out: Handover, sums: NonlinearFigures
    ) -> None:
        super().__init__(network, step_s, steps, out)
        self.sums = sums

    def take(self, steps: Steps) -> None:
        """Sample, book and sum up some steps."""
        super().take(steps)
        self.sums.take(lambda t: self.reader.along(steps, t), steps)


class NonlinearRun:
    """One run over [0, stop] from its initial state at a local tolerance."""

    def __init__(
        self,
        topology: Topology,
        step_s: float,
        steps: int,
        out: Handover,
        initial: Initial,
        tolerance: float,
        *,
        figures: bool = False,
        progress: Callable[[int, int], None] | None = None,
    ) -> None:
        network = smooth_network(topology, steps * step_s, step_s, tolerance)
        start = start_state(network.switched, initial)
        self.record = NonlinearRecord(network, step_s, steps, out)
        if figures:
            sums = NonlinearFigures(len(out.observables), step_s * out.window.first, step_s * out.window.last, 0)
            self.record = FigureRecord(network, step_s, steps, out, sums)
        passage = network.run(start, network.start_mode(start), record=self.record, progress=progress)
        self.energy = self.record.energy(start, passage.x, passage.peak_j)

    @property
    def figures(self) -> RecordFigures | None:
        """Mean, RMS and peaks over the window, if they were asked for."""
        if not isinstance(self.record, FigureRecord):
            return None
        undefined = np.any([own.undefined for own in self.record.undefined.values()], axis=0)
        found = self.record.sums.figures(undefined)
        return RecordFigures(found.mean, found.rms, found.peak, found.peak_time_s)

    @property
    def effort(self) -> Effort:
        """How hard it was."""
        return self.record.effort

    @property
    def evidence(self) -> Evidence:
        """What vouches for the run."""
        return Evidence(method=self.record.method, residual=self.record.residual, energy_error=self.energy.error)
