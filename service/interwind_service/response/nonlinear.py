"""Time response of networks with smooth laws: exponential diodes and arresters, beside switches and straight pieces."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind.model.finding import Evidence
from interwind.model.observables import Observable, StoredEnergy
from interwind.model.response import EnergyLedger, Event, Initial, SteadyStart
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.response.device import SaturableBranch, TimedSwitch
from interwind_service.response.drives import Drives
from interwind_service.response.energy import DISSIPATED, JUMP, SUPPLIED, power_terms, stored_j
from interwind_service.response.nonlinear_field import Field, field_of
from interwind_service.response.nonlinear_laws import Laws, laws_of
from interwind_service.response.nonlinear_ledger import energies
from interwind_service.response.readings import Readings, readings_of
from interwind_service.response.rosenbrock import Effort, Steps, integrate
from interwind_service.response.start import start_state
from interwind_service.response.switched_network import SwitchedNetwork, switched_network
from interwind_service.response.tableau import Mode
from interwind_service.response.tableaux import H

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


class NonlinearRun:
    """One run over [0, stop] at a local tolerance: samples, events, ledger and effort, gathered step by step."""

    def __init__(
        self,
        topology: Topology,
        time_s: FloatArray,
        observables: Sequence[Observable],
        initial: Initial,
        tolerance: float,
        progress: Callable[[int, int], None] | None = None,
    ) -> None:
        if isinstance(initial, SteadyStart):
            raise InvalidNetwork.at(
                "initial", "SteadyStart is not offered with smooth laws; state the values", reason="NOT_OFFERED"
            )
        stop_s, step_s = float(time_s[-1]), float(time_s[1] - time_s[0])
        self.network: SwitchedNetwork = switched_network(topology, stop_s, step_s)
        self.tableau, self.observables, self.time_s = self.network.tableau, tuple(observables), time_s
        self.laws: Laws = laws_of(topology, self.tableau.devices, 1.0 / self.tableau.limit.open_ohm)
        self.samples = np.full((len(time_s), len(self.observables)), np.nan)
        self.changes: list[tuple[float, int, int]] = []
        self.effort = Effort()
        self.heat = np.zeros(len(topology.network.elements))
        self.supplied = self.jump = self.peak_j = self.residual = 0.0
        self.undefined: dict[int, Readings] = {}
        self.start = start_state(self.network, initial)
        self.end = self._run(tolerance, progress)

    def _run(self, tolerance: float, progress: Callable[[int, int], None] | None) -> FloatArray:
        drives, at = self.tableau.drives, self.network.breakpoint_s
        x, mode = self.start, self.network.start_mode(self.start)
        self.effort.size = float(np.linalg.norm(x))
        for k in range(len(at) - 1):
            start, stop = float(at[k]), float(at[k + 1])
            inside = 0.5 * (start + stop)
            w = drives.moved(drives.state(inside), start - inside)
            mode = self._switched(mode, start, stop)
            field = field_of(self.tableau, mode, self.laws)
            y = field.consistent(np.concatenate([x, np.zeros(field.size - field.states)]), field.drives(w))
            block = _Block(self, field, mode, start, stop, w)
            self.effort.size = max(self.effort.size, tol.SIZE_FLOOR * _expected_size(field, drives, w, stop - start))
            self.effort.step_s = tol.FIRST_STEP * (stop - start)
            y = integrate(field, drives, y, w, start, stop, tolerance, self.effort, block.take)
            x = y[: field.states]
            if progress is not None:
                progress(k + 1, len(at) - 1)
        block.last(y)
        return x

    def _switched(self, before: Mode, start: float, stop: float) -> Mode:
        mode = self.network.mode_at(before, start, stop)
        for position, device in enumerate(self.tableau.devices):
            if isinstance(device, TimedSwitch) and mode[position] != before[position]:
                self.changes.append((start, position, mode[position]))
        return mode

    @property
    def ledger(self) -> EnergyLedger:
        """Where the energy went."""
        change = stored_j(self.tableau, self.end) - stored_j(self.tableau, self.start)
        heat = float(self.heat.sum())
        names = [element.name for element in self.tableau.topology.network.elements]
        return EnergyLedger(
            self.supplied, heat, change, self.jump, self.supplied - heat - change - self.jump,
            {name: float(own) for name, own in zip(names, self.heat, strict=True) if own != 0.0},
        )  # fmt: skip

    @property
    def evidence(self) -> Evidence:
        """What vouches for the run."""
        scale = max(abs(self.supplied), self.peak_j)
        return Evidence(
            method=f"RODAS4, {self.effort.accepted} steps, {self.effort.rejected} rejected",
            residual=self.residual,
            energy_error=abs(self.ledger.numerical_j) / scale if scale > 0.0 else 0.0,
        )

    @property
    def events(self) -> tuple[Event, ...]:
        """The changes of the timed switches."""
        devices = self.tableau.devices
        return tuple(Event(t, devices[d].name, TimedSwitch.words[mode]) for t, d, mode in self.changes)


def _expected_size(field: Field, drives: Drives, w: ComplexArray, span_s: float) -> float:
    """Return about how large |x| grows under the drives of an interval: at rest, or by plain growth if that is less.

    From a state of exactly 0 a relative error means nothing; this gives it a scale.
    """
    u = np.zeros(field.size)
    rows = field.drives(drives.moved_to(w, span_s * np.linspace(0.0, 1.0, tol.SIZE_LOOKS)))
    f = rows[:, : field.size]  # the laws as they are at 0: beyond, their currents would be no guide
    J, _ = field.jacobian(u, np.zeros_like(rows[0]), np.zeros_like(rows[0]))
    rest = np.linalg.lstsq(J, f.T, rcond=None)[0][: field.states]
    growth = span_s * float(np.linalg.norm(f[:, : field.states], axis=1).max())
    return min(float(np.linalg.norm(rest, axis=0).max()), growth)


class _Block:
    """What is read off the steps of one interval between drive changes."""

    def __init__(self, run: NonlinearRun, field: Field, mode: Mode, start: float, stop: float, w: ComplexArray) -> None:
        self.run, self.field, self.start, self.stop, self.w = run, field, start, stop, w
        self.terms = power_terms(run.tableau, mode)
        self.readings = readings_of(run.tableau, mode, run.observables)
        run.undefined[len(run.undefined)] = self.readings
        over = self.readings.rows.over
        self.rows = (over @ field.signal_u, over @ field.signal_j, over @ field.signal_w)

    def take(self, steps: Steps) -> None:
        """Sample and book some steps."""
        run, states = self.run, self.field.states
        total = energies(self.field, run.tableau.drives, self.terms, steps)
        account, element = self.terms.account, self.terms.element
        np.add.at(run.heat, element[account == DISSIPATED], total[account == DISSIPATED])
        run.supplied += float(total[account == SUPPLIED].sum())
        run.jump += float(total[account == JUMP].sum())
        self._check(steps)
        run.peak_j = max(run.peak_j, 0.5 * float((steps.y1[:, :states] ** 2).sum(axis=1).max()))
        end = steps.start_s[-1] + steps.length_s[-1]
        first, last = np.searchsorted(run.time_s, [steps.start_s[0], end])
        own = np.arange(first, last)
        if not own.size:
            return
        t = run.time_s[own]
        which = np.searchsorted(steps.start_s, t, side="right") - 1
        theta = ((t - steps.start_s[which]) / steps.length_s[which])[:, None]
        k1, k2 = (np.einsum("j,sjd->sd", H[row], steps.stages)[which] for row in (0, 1))
        y = (1.0 - theta) * steps.y0[which] + theta * (steps.y1[which] + (1.0 - theta) * (k1 + theta * k2))
        self._put(own, t, y)

    def _check(self, steps: Steps) -> None:
        """Take the residual of the algebraic equations at the ends of the steps, |f| over |∂f/∂q| |q|."""
        run, field, drives = self.run, self.field, self.run.tableau.drives
        if field.states == field.size:
            return
        driven = field.drives(drives.moved_to(self.w, steps.start_s + steps.length_s - self.start))
        gap = np.abs(field.value(steps.y1, driven)[:, field.states :])
        size = (1.0 + field.wave_slopes(steps.y1, driven)) * np.abs(steps.y1[:, field.states :]).max()
        run.residual = max(run.residual, float((gap / np.where(size > 0.0, size, 1.0)).max()))

    def last(self, y: FloatArray) -> None:
        """Put the last sample, at the very end of the run."""
        self._put(np.array([len(self.run.time_s) - 1]), np.array([self.stop]), y[None])

    def _put(self, own: NDArray[np.int64], t: FloatArray, y: FloatArray) -> None:
        run, field, drives = self.run, self.field, self.run.tableau.drives
        w = drives.moved_to(self.w, t - self.start)
        driven = field.drives(w)
        y = field.consistent(y, driven)
        j, _ = field.direct_currents(y, driven)
        sampled = y @ self.rows[0].T + j @ self.rows[1].T + (w @ self.rows[2].T).real + self.readings.rows.offset
        value = self.readings.values(sampled)
        value[:, self.readings.undefined] = np.nan
        for position, device in self._saturable():
            value[:, position] = device.energy_j(device.root * y[:, device.state])
        run.samples[own] = value

    def _saturable(self) -> list[tuple[int, SaturableBranch]]:
        """Return the observables that are stored energies of saturable branches, whose pieces change within a block."""
        branches = {d.name: d for d in self.run.tableau.devices if isinstance(d, SaturableBranch)}
        return [
            (position, branches[item.name])
            for position, item in enumerate(self.run.observables)
            if isinstance(item, StoredEnergy) and item.name in branches
        ]
