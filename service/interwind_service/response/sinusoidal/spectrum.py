"""The solutions of a network over a list of frequencies, one tree for each band."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind_service import tolerances as tol
from interwind_service.network.topology import Topology
from interwind_service.network.winding_coordinates import WindingCoordinates, all_coordinates
from interwind_service.response.equations.factor import solve
from interwind_service.response.equations.frequency_tree import Drive, FrequencyTree, frequency_tree
from interwind_service.response.equations.roles import roles_of

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class Band:
    """Frequencies solved in one tree.

    ``index`` (f,) positions in the list asked for; ``s`` (f,) = jω; ``Z`` (f, columns, drives), one column of solutions
    per unit of each drive, NaN where singular; ``residual``, ``condition`` (f,). An entry of Z below
    ε ``scale`` (f, columns) times ``largest`` (f, drives) is rounding noise.
    """

    tree: FrequencyTree
    index: NDArray[np.int64]
    s: ComplexArray
    Z: ComplexArray
    residual: FloatArray
    condition: FloatArray
    scale: FloatArray
    largest: FloatArray


def checked_frequencies(frequency_hz: object) -> FloatArray:
    """Return the frequencies as a vector; each must be finite and not negative."""
    f = np.array(frequency_hz, dtype=np.float64)
    if f.ndim != 1 or f.size == 0:
        raise InvalidNetwork.at(
            "frequency_hz", f"shape {f.shape} found; a vector of at least one frequency is expected"
        )
    good = (f == 0.0) | ((f >= tol.LEAST_FREQUENCY_HZ) & (f <= tol.LARGEST_FREQUENCY_HZ))
    for k in np.flatnonzero(~good):
        raise InvalidNetwork.at(
            f"frequency_hz[{k}]",
            f"{float(f[k])!r} Hz found; 0 or {tol.LEAST_FREQUENCY_HZ:g} to {tol.LARGEST_FREQUENCY_HZ:g} Hz is expected",
        )
    return f


def spectrum(topology: Topology, frequency_hz: FloatArray, drives: tuple[Drive, ...]) -> Iterator[Band]:
    """Solve for every drive at every frequency, in bands that share a tree, in rising order of frequency."""
    for tree, index in bands(topology, all_coordinates(topology), frequency_hz, drives):
        share = max(1, tol.STACK_ENTRIES // max(1, tree.M[0].size))
        for begin in range(0, len(index), share):
            part = index[begin : begin + share]
            yield solve_band(tree, part, 2j * np.pi * frequency_hz[part])


def bands(
    topology: Topology,
    coordinates: tuple[WindingCoordinates, ...],
    frequency_hz: FloatArray,
    drives: tuple[Drive, ...],
) -> Iterator[tuple[FrequencyTree, NDArray[np.int64]]]:
    """Yield the tree of each band and the positions of its frequencies, in rising order of frequency."""
    order = np.argsort(frequency_hz, kind="stable")
    omega = 2.0 * np.pi * frequency_hz[order]
    done = 0
    while done < len(order):
        first = omega[done]
        stop = (
            int(np.searchsorted(omega, first * tol.TREE_BAND, side="right")) if first > 0.0 else int((omega == 0).sum())
        )
        roles = roles_of(topology, at_zero=first == 0.0)
        yield (
            frequency_tree(topology, coordinates, roles, float(np.sqrt(first * omega[stop - 1])), drives),
            order[done:stop],
        )
        done = stop


def solve_band(tree: FrequencyTree, index: NDArray[np.int64], s: ComplexArray) -> Band:
    """Solve for every drive at the frequencies ``s`` in one tree."""
    unknown = tree.unknown
    M = tree.matrix(s)
    right = -(M[:, :, tree.known] @ tree.imposed) - tree.J
    answer = solve(np.take(M, unknown, axis=2) if tree.known.size else M, right)
    Z = np.empty((len(s), M.shape[2], len(tree.drives)), dtype=np.complex128)
    Z[:, unknown] = answer.x
    Z[:, tree.known] = tree.imposed
    scale = np.zeros((len(s), M.shape[2]))
    scale[:, unknown] = answer.scale
    return Band(tree, index, s, Z, answer.residual, answer.condition, scale, answer.largest)


def terminal_rows(band: Band) -> FloatArray:
    """Return what each drive meets, as rows over the columns: −current of a source, voltage of a current drive."""
    tree = band.tree
    rows = np.zeros((len(tree.drives), band.Z.shape[1]))
    for k, drive in enumerate(tree.drives):
        if drive.out_of < 0:
            rows[k, tree.current[drive.branch]] = -1.0
        else:
            rows[k, : len(tree.tree)] = tree.paths[drive.into] - tree.paths[drive.out_of]
    return rows
