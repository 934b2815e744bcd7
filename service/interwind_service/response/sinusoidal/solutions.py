"""Solutions over a list of frequencies by the method that suits their number and the network's size.

Few frequencies, or controlled sources: the frequency tree at each. Many: one reduction a band, held against the tree,
which takes over where they differ. Thousands of nodes with little coupling: sparse factors.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from functools import partial

import numpy as np
from numpy.typing import NDArray

from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.network.winding_coordinates import WindingCoordinates, all_coordinates
from interwind_service.response.equations.frequency_tree import Drive
from interwind_service.response.equations.undetermined import suspects
from interwind_service.response.sinusoidal.phasors import State, TreeState
from interwind_service.response.sinusoidal.sparse_nodal import (
    NodalPhasors,
    is_sparse,
    nodal_spectrum,
    nodal_suspects,
    nodal_terminal,
)
from interwind_service.response.sinusoidal.spectrum import Band, bands, solve_band, terminal_rows
from interwind_service.response.sinusoidal.sweep import SweptBand, sweep
from interwind_service.response.sinusoidal.swept_state import Comparison, SweptState, compare

ONE_BY_ONE = "frequency tree, LU, one refinement"
SWEPT = "reduction, Schur form of the resolvent, held against the frequency tree"

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class Solution:
    """The network at some frequencies.

    Attributes
    ----------
    index : (f,) positions in the list asked for. ``omega`` (f,), rad/s. ``singular`` (f,): where there is no solution.
    state : for the drives u; ``loudest`` the same, or its loudest few points.
    drives, terminal : terminal() is the hybrid matrix (f, d, d) of the drives: current into the network per volt,
        voltage per ampere. Its entries below ``noise`` (f or 1, d) are rounding.
    residual, condition : the worst. ``suspects`` : names what the singular point k is made of.
    """

    index: IntArray
    omega: FloatArray
    singular: NDArray[np.bool_]
    state: State
    loudest: State
    drives: tuple[Drive, ...]
    terminal: Callable[[], ComplexArray]
    noise: FloatArray
    residual: float
    condition: float
    suspects: Callable[[int], str]
    method: str


def solutions(
    topology: Topology,
    frequency_hz: FloatArray,
    drives: tuple[Drive, ...],
    u: ComplexArray,
    *,
    sweepable: bool,
    rows: Sequence[int] = (),
) -> Iterator[Solution]:
    """Solve at every frequency; ``rows`` are the signals that will be asked for (`swept_state.Recorder`).

    ``sweepable``: nothing is left open that a reduction would refuse.
    """
    if is_sparse(topology):
        yield from _sparse(topology, frequency_hz, drives, u)
        return
    coordinates = all_coordinates(topology)
    moving = np.flatnonzero(frequency_hz > 0.0)
    alone = np.flatnonzero(frequency_hz == 0.0)
    suits = sweepable and len(moving) >= tol.SWEEP_POINTS and not topology.controls
    if not suits:
        alone = np.arange(len(frequency_hz))
    else:
        order = moving[np.argsort(frequency_hz[moving], kind="stable")]
        comparisons: dict[int, list[Comparison]] = {}

        def agrees(band: SweptBand) -> bool:
            found = compare(band, coordinates, drives)
            comparisons[id(band)] = found
            return all(x.gap <= tol.SWEEP_AGREEMENT for x in found)

        left = [alone]
        for part in sweep(topology, 2.0 * np.pi * frequency_hz[order], order, agrees):
            if isinstance(part, SweptBand):
                yield _swept(part, comparisons[id(part)], drives, u, coordinates, rows)
            else:
                left.append(part)
        alone = np.concatenate(left)
    yield from _one_by_one(topology, coordinates, frequency_hz, alone, drives, u)


def _one_by_one(
    topology: Topology,
    coordinates: tuple[WindingCoordinates, ...],
    frequency_hz: FloatArray,
    index: IntArray,
    drives: tuple[Drive, ...],
    u: ComplexArray,
) -> Iterator[Solution]:
    if not index.size:
        return
    for tree, places in bands(topology, coordinates, frequency_hz[index], drives):
        share = max(1, tol.STACK_ENTRIES // max(1, tree.M[0].size))
        for begin in range(0, len(places), share):
            part = index[places[begin : begin + share]]
            yield _in_tree(solve_band(tree, part, 2j * np.pi * frequency_hz[part]), u)


def _in_tree(band: Band, u: ComplexArray) -> Solution:
    singular = ~np.isfinite(band.condition)
    rows = terminal_rows(band)
    state = TreeState(band, u)
    return Solution(
        index=band.index,
        omega=band.s.imag,
        singular=singular,
        state=state,
        loudest=state,
        drives=band.tree.drives,
        terminal=lambda: rows @ band.Z,
        noise=tol.NOISE_SHARE * (band.scale @ np.abs(rows).T) * band.largest,
        residual=float(band.residual[~singular].max(initial=0.0)),
        condition=float(band.condition[~singular].max(initial=1.0)),
        suspects=lambda k: suspects(band.tree, complex(band.s[k])),
        method=ONE_BY_ONE,
    )


def _sparse(
    topology: Topology, frequency_hz: FloatArray, drives: tuple[Drive, ...], u: ComplexArray
) -> Iterator[Solution]:
    sources = {drive.branch: value for drive, value in zip(drives, u.tolist(), strict=True)}
    for band in nodal_spectrum(topology, frequency_hz, drives):
        state = NodalPhasors(band, u, sources)
        singular = ~np.isfinite(band.condition)
        yield Solution(
            index=band.index,
            omega=band.s.imag,
            singular=singular,
            state=state,
            loudest=state,
            drives=drives,
            terminal=partial(nodal_terminal, band, drives),
            noise=np.zeros((1, len(drives))),
            residual=float(band.residual[~singular].max(initial=0.0)),
            condition=float("nan"),
            suspects=partial(nodal_suspects, band, drives),
            method="sparse LU of the nodal equations, one ordering",
        )


def _swept(
    band: SweptBand,
    found: list[Comparison],
    drives: tuple[Drive, ...],
    u: ComplexArray,
    coordinates: tuple[WindingCoordinates, ...],
    rows: Sequence[int],
) -> Solution:
    state = SweptState(band, u, coordinates, rows)
    return Solution(
        index=band.index,
        omega=band.s.imag,
        singular=np.zeros(len(band.s), dtype=bool),
        state=state,
        loudest=state.loudest(),
        drives=drives,
        terminal=lambda: _swept_terminal(band, drives),
        noise=np.max([x.noise for x in found], axis=0),
        residual=max(x.residual for x in found),
        condition=max(x.condition for x in found),
        suspects=lambda k: "",
        method=SWEPT,
    )


def _swept_terminal(band: SweptBand, drives: tuple[Drive, ...]) -> ComplexArray:
    base = len(band.topology.kind)
    into = np.array([base + d.branch if d.out_of < 0 else 2 * base + d.into for d in drives])
    out_of = np.array([0 if d.out_of < 0 else 2 * base + d.out_of for d in drives])
    sign = np.array([-1.0 if d.out_of < 0 else 1.0 for d in drives])
    H = sign[:, None] * band.signals(into)
    current = sign > 0
    if current.any():
        H[:, current] -= band.signals(out_of[current])
    return H
