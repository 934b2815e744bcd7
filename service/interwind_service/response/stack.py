"""Frequency responses of many variants of one network as one stack.

The variants share numbering, trees and the order of elimination of the base network (`frequency_tree`); what varies is
a few numbers in M(s) = M0 + s M1 + M2 / s. Variants whose numbers leave the case the structure was chosen for — a tight
or impossible set of windings, a value outside its domain, a solution that fails its check — are left out and told, for
`frequency_response` to answer one by one.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from interwind.model import observables as ob
from interwind.model.network import Network
from interwind.model.observables import Observable
from interwind.model.vary import Column
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.network.winding_coordinates import all_coordinates
from interwind_service.response.equations.factor import equilibrate
from interwind_service.response.equations.frequency_tree import FrequencyTree
from interwind_service.response.equations.undetermined import undetermined
from interwind_service.response.frequency import drives_of
from interwind_service.response.request.admit import admit
from interwind_service.response.sinusoidal.observe import resolve
from interwind_service.response.sinusoidal.spectrum import bands, checked_frequencies
from interwind_service.response.stacked.stack_writer import StackWriter
from interwind_service.response.stacked.straight_line import elimination_order
from interwind_service.response.stacked.tape import Program
from interwind_service.response.stacked.variants import Name, Variants, variants_of

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class Stack:
    """A base network prepared: for each band of frequencies its tree and the order of elimination.

    ``programs``: what was written down for the columns that vary, kept from one call to the next.
    """

    topology: Topology
    drives: ComplexArray
    observables: tuple[Observable, ...]
    frequency_hz: FloatArray
    plans: tuple[tuple[FrequencyTree, NDArray[np.int64], list[tuple[int, int]]], ...]
    programs: dict[tuple[int, frozenset[Name]], tuple[Program, list[Name]]] = field(default_factory=dict)


def prepare(network: Network, frequency_hz: object, observe: Sequence[Observable] | None) -> Stack | None:
    """Prepare a base network; None when it is no case for a stack.

    No case are: a large network, 0 Hz, loops or parts that leave something open, powers and energies.
    """
    f = checked_frequencies(frequency_hz)
    topology = admit(network)
    asked = resolve(topology, observe)
    drives, u = drives_of(topology)
    if not np.all(f > 0.0) or any(isinstance(item, ob.ElementPower | ob.StoredEnergy) for item in asked):
        return None
    plans = []
    for tree, index in bands(topology, all_coordinates(topology), f, drives):
        if len(tree.unknown) > tol.STACK_UNKNOWNS or not undetermined(tree, u).nothing:
            return None
        middle = np.array([2j * np.pi * np.sqrt(f[index].min() * f[index].max())])
        A, _, _ = equilibrate(tree.matrix(middle)[:, :, tree.unknown])
        try:
            plans.append((tree, index, elimination_order(A[0])))
        except np.linalg.LinAlgError:
            return None
    return Stack(topology, u, asked, f, tuple(plans))


def stacked_responses(stack: Stack, columns: Sequence[Column], into: ComplexArray) -> NDArray[np.bool_]:
    """Compute the responses of the variants that ``columns`` make.

    Parameters
    ----------
    stack : the base network prepared.
    columns : what varies, V variants.
    into : shape (observables, V, F), complex peak values, filled.

    Returns
    -------
    shape (V,): which variants were answered; the others are for `frequency_response`.
    """
    found = variants_of(stack.topology, stack.plans[0][0].coordinates, columns, len(stack.drives))
    if found is None:
        into[...] = np.nan
        return np.zeros(into.shape[1], dtype=bool)
    trusted = found.fit.copy()
    named = found.columns()
    with np.errstate(all="ignore"):  # what overflows or is no number fails its check
        for band, (_, index, _) in enumerate(stack.plans):
            key = (band, frozenset(named))
            if key not in stack.programs:
                stack.programs[key] = _program(stack, band, found)
            program, names = stack.programs[key]
            for start in range(0, found.count, program.rows):
                part = slice(start, min(start + program.rows, found.count))
                excess, *parts = program.run([named[name][part] for name in names])
                good = (np.broadcast_to(excess, (program.rows, len(index))) <= 0.0).all(axis=1)
                trusted[part] &= good[: part.stop - start]
                _place(parts, into[:, part], index)
    into[:, ~trusted] = np.nan
    return trusted


def _program(stack: Stack, band: int, variants: Variants) -> tuple[Program, list[Name]]:
    tree, index, order = stack.plans[band]
    writer = StackWriter(tree, variants, stack.drives)
    excess = writer.solve(order)
    cells = [writer.observe(item) for item in stack.observables]
    outputs = [excess] + [0.0 if part is None else part for cell in cells for part in (cell.real, cell.imaginary)]
    omega = 2.0 * np.pi * stack.frequency_hz[index][None, :]
    program = Program(outputs, list(writer.given.values()), writer.omega, omega, max(1, tol.STACK_BLOCK // len(index)))
    return program, list(writer.given)


def _place(parts: Sequence[FloatArray | float], into: ComplexArray, index: NDArray[np.int64]) -> None:
    """Put real and imaginary parts of each observable into their columns."""
    where: slice | NDArray[np.int64] = index
    if np.all(np.diff(index) == 1):
        where = slice(int(index[0]), int(index[-1]) + 1)
    for column, target in enumerate(into):
        for part, number in ((target.real, parts[2 * column]), (target.imag, parts[2 * column + 1])):
            part[:, where] = number[: len(target)] if isinstance(number, np.ndarray) else number
