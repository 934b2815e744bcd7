"""Port response: impedance, admittance and scattering of the ports of a network, its sources set to zero."""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidNetwork
from interwind.model import elements as el
from interwind.model.finding import Finding
from interwind.model.network import Network, Port
from interwind.model.response import PortResponse
from interwind_service import tolerances as tol
from interwind_service.network.hazards import hazards
from interwind_service.network.topology import Topology, number
from interwind_service.response.equations.frequency_tree import Drive
from interwind_service.response.equations.roles import Roles, roles_of
from interwind_service.response.equations.undetermined import left_open
from interwind_service.response.frequency import drives_of, port_nodes, unused_name
from interwind_service.response.request.admit import admit
from interwind_service.response.sinusoidal.evidence import Judgement, gather, judge, require
from interwind_service.response.sinusoidal.findings import singular_finding
from interwind_service.response.sinusoidal.solutions import solutions
from interwind_service.response.sinusoidal.spectrum import checked_frequencies

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


def port_response(network: Network, frequency_hz: object) -> PortResponse:
    """Compute Z, Y and S between the ports at each frequency, every source set to zero.

    V = Z I, I = Y V, and with r the reference resistances of the ports S = 2 r^(−½) Z' r^(−½) − 1, Z' the impedance of
    the network with r across each port. Each comes from a solve of its own: the ports driven by currents, by voltages,
    and terminated; none is the inverse of another, but in a large network whose Z exists and is far from singular.

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
    topology = admit(network)
    for position in range(len(network.ports)):
        port_nodes(topology, position)
    silent = _silenced(network)
    driven = [el.CurrentSource(name, p.b, p.a) for name, p in _named(network, "current")]
    burdens = [el.Resistor(name, p.a, p.b, p.reference_ohm) for name, p in _named(network, "burden")]
    imposed = [el.VoltageSource(name, p.a, p.b) for name, p in _named(network, "voltage")]
    Z = _matrix(silent, driven, f)
    reference = np.array([port.reference_ohm for port in network.ports])
    if _large(topology) and not np.isnan(Z.values).any():
        loaded = dataclasses.replace(Z, values=_terminated(Z.values, reference))
        inverse = _inverse(Z.values)
        Y = _matrix(silent, imposed, f).values if inverse is None else inverse
    else:
        loaded = _matrix(silent, [*burdens, *driven], f)
        Y = _matrix(silent, imposed, f).values
    root = 1.0 / np.sqrt(reference)
    S = 2.0 * root[:, None] * loaded.values * root - np.eye(len(root))
    if np.isnan(S).any(axis=(1, 2)).all():
        raise InvalidNetwork.at("elements", f"no solution at any frequency asked for; {loaded.why}", reason="SINGULAR")
    evidence = gather("; ".join(loaded.methods), loaded.judged)
    require(evidence)
    return PortResponse(
        tuple(port.name for port in network.ports),
        f,
        Z.values,
        Y,
        S,
        (*topology.findings, *loaded.findings),
        hazards(topology),
        evidence,
    )


def _large(topology: Topology) -> bool:
    """Whether a solve costs so much that one has to do for Z, Y and S."""
    return len(topology.nodes) + len(topology.kind) > tol.PORT_SOLVES_BRANCHES


def _terminated(Z: ComplexArray, reference: FloatArray) -> ComplexArray:
    """Z' = Z (1 + Z/r)⁻¹: nothing cancels."""
    right = np.eye(len(reference)) + Z / reference[:, None]
    return np.linalg.solve(right.transpose(0, 2, 1), Z.transpose(0, 2, 1)).transpose(0, 2, 1)


def _inverse(Z: ComplexArray) -> ComplexArray | None:
    """Y = Z⁻¹, None where that would lose digits."""
    scale = 1.0 / np.sqrt(np.maximum(np.abs(np.einsum("fii->fi", Z)), np.finfo(float).tiny))
    if np.linalg.cond(Z * scale[:, :, None] * scale[:, None, :]).max() > tol.PORT_INVERSE_CONDITION:
        return None
    return np.linalg.inv(Z)


def _named(network: Network, kind: str) -> list[tuple[str, Port]]:
    """Name an element across each port as no element of the network is named."""
    return [(unused_name(network, f"{kind} of port {port.name}"), port) for port in network.ports]


def _silenced(network: Network) -> Network:
    """Set every source to zero: a voltage source conducts ideally, a current source is an open branch."""
    elements: list[el.Element] = []
    for element in network.elements:
        if isinstance(element, el.VoltageSource):
            elements.append(el.Resistor(element.name, element.a, element.b, 0.0))
        elif isinstance(element, el.CurrentSource):
            elements.append(el.Capacitor(element.name, element.a, element.b, 0.0))
        else:
            elements.append(element)
    return dataclasses.replace(network, elements=tuple(elements), ports=())


@dataclass(frozen=True, slots=True, eq=False)
class _Driven:
    """``values`` (F, P, P), NaN where there is no solution, and what vouches for them."""

    values: ComplexArray
    judged: list[Judgement]
    methods: tuple[str, ...]
    findings: list[Finding]
    why: str


def _matrix(silent: Network, added: list[el.Element], f: FloatArray) -> _Driven:
    """Drive each port alone by the sources among ``added``: voltages per ampere, or currents per volt."""
    topology = number(dataclasses.replace(silent, elements=(*silent.elements, *added)))
    drives, u = drives_of(topology)
    values = np.full((len(f), len(drives), len(drives)), np.nan, dtype=np.complex128)
    judged: list[Judgement] = []
    methods: dict[str, None] = {}
    findings: list[Finding] = []
    why = ""
    for at_zero in (False, True):
        part = np.flatnonzero((f == 0.0) == at_zero)
        roles = roles_of(topology, at_zero=at_zero)
        open_ends = left_open(topology, roles, drives, u)
        why = _contradiction(topology, roles, drives) or why
        if not part.size or _contradiction(topology, roles, drives):
            continue
        try:
            for found in solutions(topology, f[part], drives, u, sweepable=open_ends.nothing):
                judgement = judge(found, drives_alone=True)
                sound = ~found.singular
                if not topology.controls:
                    sound &= judgement.asymmetries <= tol.RECIPROCITY_LIMIT
                values[part[found.index[sound]]] = found.terminal()[sound]
                judged.append(judgement)
                methods[found.method] = None
                findings += [
                    singular_finding(topology, float(f[part[found.index[k]]]), open_ends, found.suspects(int(k)))
                    for k in np.flatnonzero(found.singular)
                ]
        except InvalidNetwork as refused:
            why = refused.message
    return _Driven(values, judged, tuple(methods), findings, findings[0].message if findings else why)


def _contradiction(topology: Topology, roles: Roles, drives: tuple[Drive, ...]) -> str:
    """Say why some drive cannot be met by itself, "" when each can: a loop of voltages, or a current without return."""
    for unit in np.eye(len(drives), dtype=np.complex128):
        found = left_open(topology, roles, drives, unit)
        if found.contradiction:
            return found.contradiction
    return ""
