"""Voltages and currents of the branches in the sinusoidal state, however they were solved for."""

from __future__ import annotations

from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from interwind_service.network.topology import Topology
from interwind_service.response.equations.undetermined import Undetermined
from interwind_service.response.sinusoidal.spectrum import Band

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


class Readable(Protocol):
    """The sinusoidal state at some frequencies, whatever the method that found it; each array has shape (f, ...)."""

    topology: Topology
    omega: FloatArray

    def between(self, one: int, other: int) -> ComplexArray:
        """Return the voltage of node ``one`` against node ``other``."""

    def voltage(self, branch: int) -> ComplexArray:
        """Return the voltage of a branch from its start to its finish."""

    def current(self, branch: int) -> ComplexArray:
        """Return the current of a branch from its start to its finish."""

    def field(self, group: int) -> FloatArray:
        """Return iᴴ L i of a winding group."""

    def flux_linkages(self, group: int) -> ComplexArray:
        """Return L i of a winding group, shape (f, n)."""


class State(Readable, Protocol):
    """A state that knows every node voltage."""

    def node_voltages(self) -> ComplexArray:
        """Return every node voltage against its zero, shape (f, nodes)."""


class TreeState:
    """A state solved in the voltages of a frequency tree."""

    def __init__(self, band: Band, u: ComplexArray) -> None:
        self._tree = band.tree
        self.topology: Topology = band.tree.topology
        self.omega: FloatArray = band.s.imag
        self._s, self._u, self._z = band.s, u, band.Z @ u

    def between(self, one: int, other: int) -> ComplexArray:
        """Return the voltage of node ``one`` against node ``other``, along the tree."""
        tree = self._tree
        return self._z[:, : len(tree.tree)] @ (tree.paths[one] - tree.paths[other])

    def voltage(self, branch: int) -> ComplexArray:
        """Return the voltage of a branch from its start to its finish."""
        return self.between(int(self.topology.start[branch]), int(self.topology.finish[branch]))

    def current(self, branch: int) -> ComplexArray:
        """Return the current of a branch from its start to its finish."""
        return self._tree.branch_current(branch, self._z, self._s, self._u)

    def field(self, group: int) -> FloatArray:
        """Return iᴴ L i of a winding group, in the coordinates that keep its leakage."""
        y = self._z[:, self._tree.groups[group]]
        return np.einsum("fi,fi->f", y.conj(), y @ self._tree.coordinates[group].S).real

    def flux_linkages(self, group: int) -> ComplexArray:
        """Return L i of a winding group, shape (f, n): the solution of Nᵀ λ = S y."""
        own = self._tree.coordinates[group]
        return np.linalg.solve(own.N.T, own.S @ self._z[:, self._tree.groups[group]].T).T

    def node_voltages(self) -> ComplexArray:
        """Return every node voltage against its zero, shape (f, nodes)."""
        zero = self.topology.parts.reference[self.topology.parts.of_node]
        paths = self._tree.paths - self._tree.paths[zero]
        return self._z[:, : len(self._tree.tree)] @ paths.T


class Phasors:
    """A state with NaN where nothing determines a voltage or a current."""

    def __init__(self, state: State, left_open: Undetermined) -> None:
        self._state = state
        self.topology, self.omega = state.topology, state.omega
        self._floating = left_open.nodes
        self._open = set(left_open.currents.tolist())
        self._component = left_open.component

    def between(self, one: int, other: int) -> ComplexArray:
        """Return the voltage of node ``one`` against node ``other``."""
        if self._component[one] != self._component[other] or (one == other and one in self._floating):
            return np.full(len(self.omega), np.nan, dtype=np.complex128)
        return self._state.between(one, other)

    def voltage(self, branch: int) -> ComplexArray:
        """Return the voltage of a branch from its start to its finish."""
        one, other = int(self.topology.start[branch]), int(self.topology.finish[branch])
        if self._component[one] != self._component[other]:
            return np.full(len(self.omega), np.nan, dtype=np.complex128)
        return self._state.voltage(branch)

    def current(self, branch: int) -> ComplexArray:
        """Return the current of a branch from its start to its finish."""
        if branch in self._open:
            return np.full(len(self.omega), np.nan, dtype=np.complex128)
        return self._state.current(branch)

    def field(self, group: int) -> FloatArray:
        """Return iᴴ L i of a winding group."""
        return self._state.field(group)

    def flux_linkages(self, group: int) -> ComplexArray:
        """Return L i of a winding group, shape (f, n)."""
        return self._state.flux_linkages(group)

    def node_voltages(self) -> ComplexArray:
        """Return every node voltage against its zero, shape (f, nodes); NaN without one."""
        volts = self._state.node_voltages()
        volts[:, self._floating] = np.nan
        return volts
