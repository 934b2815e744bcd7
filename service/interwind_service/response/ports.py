"""Port response: impedance, admittance and scattering of the ports of a network, its sources set to zero."""

from __future__ import annotations

import dataclasses

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind.model import elements as el
from interwind.model.network import Network
from interwind.model.response import PortResponse
from interwind_service import tolerances as tol
from interwind_service.network.hazards import hazards
from interwind_service.network.topology import Topology
from interwind_service.response.admit import admit
from interwind_service.response.evidence import asymmetry, gather, judge, require, terminal_matrix
from interwind_service.response.findings import singular_finding
from interwind_service.response.frequency import port_nodes
from interwind_service.response.frequency_tree import Drive
from interwind_service.response.spectrum import Band, checked_frequencies, spectrum
from interwind_service.response.undetermined import undetermined

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


def port_response(network: Network, frequency_hz: object) -> PortResponse:
    """Compute Z, Y and S between the ports at each frequency, every source set to zero.

    V = Z I, I = Y V, and with r the reference resistances of the ports S = 2 r^(−½) Z' r^(−½) − 1, Z' the impedance of
    the network with r across each port. Each comes from a solve of its own: the ports driven by currents, by voltages,
    and terminated; none is the inverse of another.

    Parameters
    ----------
    network : Network
        With at least one port; voltage from ``a`` to ``b``, current into ``a``.
    frequency_hz : array_like, shape (F,)
        Hz, from 0 on.

    Returns
    -------
    PortResponse
        ``impedance_ohm``, ``admittance_s``, ``scattering``, each (F, P, P); NaN where Z or Y does not exist.

    Raises
    ------
    InvalidNetwork
        No port, or the terminated network is singular at every frequency.
    AccuracyNotReached
        Residual, reciprocity or passivity beyond its limit.

    References
    ----------
    Kurokawa 1965 (scattering at real reference resistances).
    """
    if not network.ports:
        raise InvalidNetwork.at("ports", "none found; a port response needs at least one")
    f = checked_frequencies(frequency_hz)
    plain = admit(network)
    nodes = [port_nodes(plain, position) for position in range(len(network.ports))]
    reference = np.array([port.reference_ohm for port in network.ports])
    terminated = admit(
        _with_ports(
            network,
            [
                el.Resistor(name, p.a, p.b, p.reference_ohm)
                for name, p in zip(_names(network), network.ports, strict=True)
            ],
        )
    )
    imposed = admit(
        _with_ports(
            network, [el.VoltageSource(name, p.a, p.b) for name, p in zip(_names(network), network.ports, strict=True)]
        )
    )
    into = tuple(Drive(-1, out_of=b, into=a) for a, b in nodes)
    Z, _ = _impedance(plain, f, into)
    loaded, bands = _impedance(terminated, f, into)
    Y = _admittance(imposed, f, len(nodes))
    root = 1.0 / np.sqrt(reference)
    S = 2.0 * root[:, None] * loaded * root - np.eye(len(root))
    findings = list(plain.findings)
    for band in bands:
        for k in np.flatnonzero(np.isnan(S[band.index]).any(axis=(1, 2))):
            place = int(band.index[k])
            found = undetermined(band.tree, np.zeros(len(nodes), dtype=np.complex128))
            findings.append(singular_finding(band.tree, float(f[place]), complex(band.s[k]), found))
    if np.isnan(S).any(axis=(1, 2)).all():
        raise InvalidNetwork.at(
            "elements", f"no solution at any frequency asked for; {findings[-1].message}", reason="SINGULAR"
        )
    evidence = gather("frequency tree, LU, one refinement", [judge(band, drives_alone=True) for band in bands])
    require(evidence)
    return PortResponse(
        tuple(port.name for port in network.ports), f, Z, Y, S, tuple(findings), hazards(plain), evidence
    )


def _names(network: Network) -> list[str]:
    """Names for elements across the ports that no element of the network has."""
    taken = {element.name for element in network.elements}
    names = []
    for port in network.ports:
        name = f"port {port.name}"
        while name in taken:
            name += " "
        taken.add(name)
        names.append(name)
    return names


def _with_ports(network: Network, added: list[el.Element]) -> Network:
    return dataclasses.replace(network, elements=(*network.elements, *added))


def _impedance(topology: Topology, f: FloatArray, into: tuple[Drive, ...]) -> tuple[ComplexArray, list[Band]]:
    """Drive each port by a unit current; NaN where there is no solution."""
    matrix = np.full((len(f), len(into), len(into)), np.nan, dtype=np.complex128)
    bands = []
    for band in spectrum(topology, f, into):
        bands.append(band)
        if not _possible(band):
            continue
        tree = band.tree
        rows = np.array([tree.paths[drive.into] - tree.paths[drive.out_of] for drive in into])
        sound = _sound(band)
        matrix[band.index[sound]] = rows @ band.Z[sound][:, : len(tree.tree)]
    return matrix, bands


def _admittance(topology: Topology, f: FloatArray, count: int) -> ComplexArray:
    """Impose a unit voltage on each port; NaN where there is no solution."""
    branches = range(len(topology.kind) - count, len(topology.kind))
    drives = tuple(Drive(branch) for branch in branches)
    matrix = np.full((len(f), count, count), np.nan, dtype=np.complex128)
    for band in spectrum(topology, f, drives):
        if _possible(band):
            matrix[band.index[_sound(band)]] = -band.Z[_sound(band)][:, band.tree.current[list(branches)]]
    return matrix


def _possible(band: Band) -> bool:
    """Whether each drive can be met by itself: none closes a loop of imposed voltages or lacks a return."""
    units = np.eye(len(band.tree.drives), dtype=np.complex128)
    return not any(undetermined(band.tree, unit).contradiction for unit in units)


def _sound(band: Band) -> NDArray[np.bool_]:
    """Where the solution exists and, for a reciprocal network, shows it."""
    sound = np.isfinite(band.condition)
    if not band.tree.topology.controls:
        with np.errstate(invalid="ignore"):
            sound &= asymmetry(*terminal_matrix(band)) <= tol.RECIPROCITY_LIMIT
    return sound
