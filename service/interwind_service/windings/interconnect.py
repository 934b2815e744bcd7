"""Windings joined to each other: series, parallel, tapped, shorted, open, by congruence.

With i = A i' + N y (A the terminal currents, N the circulating ones, which nothing drives) the joined set stores
½ i'ᵀ L' i' with

    L' = Aᵀ L A − Aᵀ L N (Nᵀ L N)⁺ Nᵀ L A

the Schur complement that circulating currents leave; the resistance follows in the same way. So a parallel connection
carries its limit at high frequency in L' and its limit at zero frequency in R'; between them see `sharing`.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from interwind.errors import InvalidRequest, field_path
from interwind.model.connection import Connection, InParallel, InSeries, Open, Shorted
from interwind.model.frozen import FloatArray
from interwind.model.windings import WindingSet
from interwind_service.windings.pattern import solve_semidefinite


@dataclass(frozen=True, slots=True, eq=False)
class Coils:
    """Labels (n), inductance (n, n), H, and resistance (n, n), ohm, on their way through the connections."""

    labels: tuple[str, ...]
    inductance_h: FloatArray
    resistance_ohm: FloatArray

    def place(self, label: str) -> int:
        """Return the row of a label; an unknown one is refused with the labels there are."""
        if label not in self.labels:
            raise InvalidRequest.at("windings", f"{label!r} is no winding here; there are {', '.join(self.labels)}")
        return self.labels.index(label)

    def seen_through(self, labels: tuple[str, ...], A: FloatArray, N: FloatArray | None = None) -> Coils:
        """Return the set with terminal currents A (n, m) and circulating currents N (n, c)."""
        return Coils(labels, _condensed(self.inductance_h, A, N), _condensed(self.resistance_ohm, A, N))


def in_series(coils: WindingSet, connections: Sequence[Connection]) -> Coils:
    """Make all series connections at once, so that two of them may share a section (a tapped winding).

    Raises
    ------
    InvalidRequest : a label is unknown, used twice, or left in an impossible place; the connection is named.
    """
    set_ = Coils(coils.labels, coils.inductance_h, coils.resistance_matrix_ohm)
    series = [(k, c) for k, c in enumerate(connections) if isinstance(c, InSeries)]
    if not series:
        return set_
    columns, names, used = [], [], set()
    for position, connection in series:
        with field_path(f"connections[{position}]"):
            column = np.zeros(len(set_.labels))
            for label, sense in zip(connection.windings, senses(connection), strict=True):
                column[set_.place(label)] = sense
                used.add(label)
            columns.append(column)
            names.append(connection.label)
    for place, label in enumerate(set_.labels):
        if label not in used:
            columns.append(np.eye(len(set_.labels))[place])
            names.append(label)
    _distinct(names)
    return set_.seen_through(tuple(names), np.column_stack(columns))


def in_parallel(set_: Coils, connections: Sequence[Connection]) -> Coils:
    """Make the parallel connections, one after the other."""
    for position, connection in enumerate(connections):
        if isinstance(connection, InParallel):
            with field_path(f"connections[{position}]"):
                places = [set_.place(label) for label in connection.windings]
                kept = [k for k in range(len(set_.labels)) if k not in places]
                names = (connection.label, *(set_.labels[k] for k in kept))
                _distinct(names)
                identity, s = np.eye(len(set_.labels)), senses(connection)
                first = s[0] * identity[:, places[0]]
                A = np.column_stack([first, identity[:, kept]])
                N = [sense * identity[:, place] - first for sense, place in zip(s[1:], places[1:], strict=True)]
                set_ = set_.seen_through(names, A, np.column_stack(N) if N else None)
    return set_


def shorted_and_open(set_: Coils, connections: Sequence[Connection]) -> Coils:
    """Take out the shorted windings, whose flux stands still, then the open ones, which carry no current."""
    shorted, opened = [], []
    for position, connection in enumerate(connections):
        if isinstance(connection, Shorted | Open):
            with field_path(f"connections[{position}]"):
                (shorted if isinstance(connection, Shorted) else opened).append(set_.place(connection.winding))
    kept = [k for k in range(len(set_.labels)) if k not in shorted and k not in opened]
    if not kept:
        raise InvalidRequest.at("connections", "no winding is left; leave one that is neither shorted nor open")
    identity = np.eye(len(set_.labels))
    names = tuple(set_.labels[k] for k in kept)
    inductance = _condensed(set_.inductance_h, identity[:, kept], identity[:, shorted] if shorted else None)
    return Coils(names, inductance, set_.resistance_ohm[np.ix_(kept, kept)])


def senses(connection: InSeries | InParallel) -> tuple[float, ...]:
    """The sign of each winding of a connection, +1, or −1 where it is turned round."""
    if connection.aiding is None:
        return (1.0,) * len(connection.windings)
    return tuple(1.0 if aiding else -1.0 for aiding in connection.aiding)


def _condensed(matrix: FloatArray, A: FloatArray, N: FloatArray | None) -> FloatArray:
    own = A.T @ matrix @ A
    if N is not None:
        cross = N.T @ matrix @ A
        own = own - cross.T @ solve_semidefinite(N.T @ matrix @ N, cross)
    return 0.5 * (own + own.T)


def _distinct(names: Sequence[str]) -> None:
    for place, name in enumerate(names):
        if name in names[:place]:
            raise InvalidRequest.at("label", f"{name!r} would name two windings; choose another label")
