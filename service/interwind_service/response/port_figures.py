"""What people read off a port response: insertion loss, mixed modes, transfers, input angle, the best link.

Everything between places comes from the scattering matrix, which always exists. The modes of a pair are an orthogonal
change of waves, S' = M S Mᵀ; then each place has a source behind a resistance, v + R i = e, matched where nothing is
said, and the waves follow from one solve a frequency.

References: Bockelman & Eisenstadt 1995 (mixed-mode scattering); Kurokawa 1965 (terminations); CISPR 17 (insertion loss:
the load's voltage from the source directly, over that with the network in between).
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from interwind.errors import InvalidRequest, field_path
from interwind.model import port_figures as model
from interwind.model.finding import Finding, Severity
from interwind.model.network import Network
from interwind.model.response import PortResponse
from interwind_service import tolerances as tol
from interwind_service.response.ports import port_response
from interwind_service.response.sinusoidal.best_link import BestLink, best_link

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

_OPEN, _SHORT = (0.0, 1.0), (1.0, 0.0)  # (α, β) of α v + β i = e


def port_figures(network: Network, frequency_hz: object, figures: Sequence[model.PortFigure]) -> model.PortFigures:
    """Compute each figure at each frequency.

    Parameters
    ----------
    network : Network
        With ports.
    frequency_hz : array_like, shape (F,)
        Hz, from 0 on.
    figures : sequence of PortFigure
        At least one.

    Returns
    -------
    PortFigures
        Complex (F, figures); NaN, and the finding FIGURE_UNDETERMINED, where a figure does not exist or has lost its
        digits.

    Raises
    ------
    InvalidRequest
        An unknown port, a port in two pairs, a pair of unequal references, a resistance that is none.
    InvalidNetwork, AccuracyNotReached
        As `port_response`.
    """
    if not len(figures):
        raise InvalidRequest.at("figures", "none found; ask for at least one")
    desk = _Desk(network)
    for position, figure in enumerate(figures):
        with field_path(f"figures[{position}]"):
            desk.check(figure)
    desk.response = port_response(network, frequency_hz)
    samples = np.stack([desk.value(figure) for figure in figures], axis=1)
    return model.PortFigures(
        tuple(figures),
        desk.response.frequency_hz,
        samples,
        findings=(*desk.response.findings, *_undetermined(samples, figures)),
        cautions=desk.response.cautions,
        evidence=desk.response.evidence,
    )


def _undetermined(samples: ComplexArray, figures: Sequence[model.PortFigure]) -> list[Finding]:
    lost = np.isnan(samples).sum(axis=0)
    return [
        Finding(
            "FIGURE_UNDETERMINED",
            Severity.WARNING,
            (),
            f"figures[{k}]",
            f"{type(figures[k]).__name__} is not determined at {count} of {len(samples)} frequencies",
            float(count),
            0.0,
        )
        for k, count in enumerate(lost.tolist())
        if count
    ]


class _Desk:
    """The ports of a network, and what has been read off them so far."""

    response: PortResponse

    def __init__(self, network: Network) -> None:
        self.names = [port.name for port in network.ports]
        self.reference = np.array([port.reference_ohm for port in network.ports])
        self._links: dict[model.LinkEfficiency, BestLink] = {}

    def check(self, figure: model.PortFigure) -> None:
        """Refuse a figure that names no port, or says what cannot be."""
        if isinstance(figure, model.LinkEfficiency | model.OptimumLoad | model.OptimumDrive):
            self._check_link(figure)
            return
        if isinstance(figure, model.InputImpedance | model.InputAngle):
            self._modes((figure.place,))
            return
        if isinstance(figure, model.InsertionLoss):
            for field in ("source_ohm", "load_ohm"):
                value = getattr(figure, field)
                if not (np.isfinite(value) and value > 0.0):
                    raise InvalidRequest.at(field, f"{value!r} ohm found; a finite resistance above 0 is expected")
            pair = figure.source, figure.load
        else:
            pair = figure.measured, figure.driven
        if pair[0] == pair[1] and not isinstance(figure, model.Scattering):
            raise InvalidRequest.at("", f"{pair[0]!r} found on both sides; name two different places")
        self._modes(pair)

    def _check_link(self, figure: model.LinkEfficiency | model.OptimumLoad | model.OptimumDrive) -> None:
        link = figure if isinstance(figure, model.LinkEfficiency) else figure.link
        for field, ports in (("transmitters", link.transmitters), ("receivers", link.receivers)):
            if not ports:
                raise InvalidRequest.at(field, "none found; name at least one port")
            for position, port in enumerate(ports):
                self._port(port, f"{field}[{position}]")
        ports = (*link.transmitters, *link.receivers)
        twice = [port for port in dict.fromkeys(ports) if ports.count(port) > 1]
        if twice:
            raise InvalidRequest.at("receivers", f"{twice[0]!r} is named twice; a port sends or takes, once")
        if isinstance(figure, model.OptimumLoad) and figure.receiver not in link.receivers:
            raise InvalidRequest.at("receiver", f"{figure.receiver!r} found; it is none of the receivers")
        if isinstance(figure, model.OptimumDrive) and figure.transmitter not in link.transmitters:
            raise InvalidRequest.at("transmitter", f"{figure.transmitter!r} found; it is none of the transmitters")

    def _port(self, name: str, field: str) -> int:
        if name not in self.names:
            known = ", ".join(self.names) or "none"
            raise InvalidRequest.at(field, f"{name!r} found; no port of that name; there are: {known}")
        return self.names.index(name)

    def _modes(self, places: Sequence[model.Place]) -> tuple[FloatArray, FloatArray, list[int]]:
        """Return M (P, P), the reference resistances of its rows, and the rows of the places."""
        M, reference = np.eye(len(self.names)), self.reference.copy()
        used: dict[int, tuple[int, ...]] = {}
        rows = []
        for place in places:
            names = (place,) if isinstance(place, str) else (place.a, place.b)
            pair = tuple(self._port(name, "port") for name in names)
            if any(used.get(port, pair) != pair for port in pair):
                raise InvalidRequest.at("port", f"{names} found; a port of it belongs to another place, too")
            used |= dict.fromkeys(pair, pair)
            if isinstance(place, str):
                rows.append(pair[0])
                continue
            a, b = pair
            if a == b or self.reference[a] != self.reference[b]:
                raise InvalidRequest.at(
                    "port", f"{names} found; a mode needs two different ports of equal reference_ohm"
                )
            M[a, [a, b]], M[b, [a, b]] = np.sqrt([0.5, 0.5]) * [1, -1], np.sqrt([0.5, 0.5])
            reference[a], reference[b] = 2.0 * self.reference[a], 0.5 * self.reference[a]
            rows.append(a if isinstance(place, model.Differential) else b)
        return M, reference, rows

    def value(self, figure: model.PortFigure) -> ComplexArray:
        """Return a figure over frequency, shape (F,)."""
        if isinstance(figure, model.LinkEfficiency | model.OptimumLoad | model.OptimumDrive):
            return self._link_value(figure)
        if isinstance(figure, model.Scattering):
            M, _, (measured, driven) = self._modes((figure.measured, figure.driven))
            return (M[measured] @ self.response.scattering @ M[driven]).astype(np.complex128)
        if isinstance(figure, model.InputImpedance | model.InputAngle):
            v, i = self._drive((figure.place,), {0: _OPEN})
            return v[:, 0] if isinstance(figure, model.InputImpedance) else np.angle(v[:, 0]) + 0j
        if isinstance(figure, model.InsertionLoss):
            source, load = figure.source_ohm, figure.load_ohm
            v, _ = self._drive((figure.source, figure.load), {0: (1.0, source), 1: (1.0, load)})
            direct = load / (source + load)
            with np.errstate(divide="ignore"):
                return 20.0 * np.log10(direct / np.abs(v[:, 1])) + 0j
        if isinstance(figure, model.VoltageTransfer):
            v, _ = self._drive((figure.driven, figure.measured), {0: _SHORT, 1: _OPEN}, rest=_OPEN)
            return v[:, 1]
        _, i = self._drive((figure.driven, figure.measured), {0: _OPEN, 1: _SHORT}, rest=_OPEN)
        return -i[:, 1]

    def _drive(
        self,
        places: Sequence[model.Place],
        ends: dict[int, tuple[float, float]],
        rest: tuple[float, float] | None = None,
    ) -> tuple[ComplexArray, ComplexArray]:
        """Drive the first place by e = 1 and return v and i of the places, (F, places).

        Each place obeys α v + β i = e; ``rest`` of the rows too, or they are matched. With v = √r (a + b),
        i = (a − b)/√r, b = S a.
        """
        M, reference, rows = self._modes(places)
        S = M @ self.response.scattering @ M.T
        root = np.sqrt(reference)
        alpha, beta = (np.ones_like(root), reference.copy()) if rest is None else np.outer(rest, np.ones_like(root))
        for k, end in ends.items():
            alpha[rows[k]], beta[rows[k]] = end
        size = np.maximum(alpha * root, beta / root)  # each row of the system near 1
        alpha, beta = alpha * root / size, beta / root / size
        one = np.eye(len(root))
        system = alpha[:, None] * (one + S) + beta[:, None] * (one - S)
        sound = np.isfinite(S).all(axis=(1, 2))
        sound[sound] = np.linalg.cond(system[sound]) < tol.FIGURE_CONDITION
        right = np.zeros((len(root), 1))
        right[rows[0]] = 1.0 / size[rows[0]]
        a = np.full((len(S), len(root)), np.nan, dtype=np.complex128)
        a[sound] = np.linalg.solve(system[sound], right)[:, :, 0]
        b = (S @ a[:, :, None])[:, :, 0]
        return (root * (a + b))[:, rows], ((a - b) / root)[:, rows]

    def _link_value(self, figure: model.LinkEfficiency | model.OptimumLoad | model.OptimumDrive) -> ComplexArray:
        link = figure if isinstance(figure, model.LinkEfficiency) else figure.link
        if link not in self._links:
            send = [self.names.index(port) for port in link.transmitters]
            take = [self.names.index(port) for port in link.receivers]
            self._links[link] = best_link(self.response.impedance_ohm, send, take)
        found = self._links[link]
        if isinstance(figure, model.OptimumLoad):
            return found.load_ohm[:, link.receivers.index(figure.receiver)]
        if isinstance(figure, model.OptimumDrive):
            return found.drive[:, link.transmitters.index(figure.transmitter)]
        return found.efficiency + 0j
