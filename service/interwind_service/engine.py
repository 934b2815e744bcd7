"""Value in, value out: one function a call. No grpc, no protobuf.

Every answer leaves with the fingerprint of its request and the version that computed it.
"""

from __future__ import annotations

import functools
from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING, Any, ParamSpec, TypeVar

from numpy.typing import NDArray

from interwind.model.characterization import Characterization
from interwind.model.digest import request_digest
from interwind.model.identification import Identification
from interwind.model.network import Network
from interwind.model.periodic import PeriodicResponse
from interwind.model.poles import PoleReport
from interwind.model.port_figures import PortFigures
from interwind.model.recording import Recording
from interwind.model.report import RepairMethod, RepairReport, ValidityReport
from interwind.model.response import AdaptiveSweep, FrequencyResponse, MnaSystem, PortResponse, TimeResponse
from interwind.model.vary import SampleWindings
from interwind.model.windings import WindingSet
from interwind_service.network.hazards import STANDING
from interwind_service.tolerances import DEFAULT_TOLERANCE
from interwind_service.version import SERVICE_VERSION

if TYPE_CHECKING:
    from interwind_service.response.stack import Stack

P = ParamSpec("P")
R = TypeVar("R")


def _with_provenance(function: Callable[P, R]) -> Callable[P, R]:
    """Put the request's fingerprint and the service's version into the evidence; no answer goes without cautions."""

    @functools.wraps(function)
    def call(*args: P.args, **kwargs: P.kwargs) -> R:
        answer: Any = function(*args, **kwargs)
        names = function.__code__.co_varnames[: function.__code__.co_argcount]
        arguments = dict(zip(names, args, strict=False)) | kwargs
        return replace(
            answer,
            cautions=answer.cautions or (STANDING,),
            evidence=replace(
                answer.evidence,
                input_sha256=request_digest(function.__name__, arguments),
                service_version=SERVICE_VERSION,
            ),
        )

    return call


@_with_provenance
def check(windings: WindingSet) -> ValidityReport:
    """Say whether the windings can exist."""
    from interwind_service.windings import verdict

    return verdict.check(windings)


@_with_provenance
def repair(
    windings: WindingSet,
    trusted: Any = (),
    weights: Any = None,
    floor: float | None = None,
    method: RepairMethod = RepairMethod.COMPLETION,
) -> RepairReport:
    """Mend a set."""
    from interwind_service.windings import repair as desk

    return desk.repair(windings, trusted, weights, floor, method)


@_with_provenance
def identify(labels: Any, readings: Any, aim: Any = None) -> Identification:
    """Find the set that fits the readings."""
    from interwind_service.windings import identify as desk

    return desk.identify(labels, readings, aim)


@_with_provenance
def characterize(windings: WindingSet, connections: Any = (), frequency_hz: Any = ()) -> Characterization:
    """Read off what designers use."""
    from interwind_service.windings import characterize as desk

    return desk.characterize(windings, connections, frequency_hz)


@_with_provenance
def stamp(network: Network) -> MnaSystem:
    """Return the matrices of the network."""
    from interwind_service.network import system

    return system.stamp(network)


@_with_provenance
def frequency_response(network: Network, frequency_hz: Any, observe: Any = None) -> FrequencyResponse:
    """Solve the network over frequency."""
    from interwind_service.response import adaptive, frequency

    if isinstance(frequency_hz, AdaptiveSweep):
        return adaptive.adaptive_response(network, frequency_hz, observe)
    return frequency.frequency_response(network, frequency_hz, observe)


@_with_provenance
def poles(network: Network, observe: Any = None, around_hz: float | None = None) -> PoleReport:
    """Find the natural modes of the network."""
    from interwind_service.response import poles as modes

    return modes.poles(network, observe, around_hz)


@_with_provenance
def port_response(network: Network, frequency_hz: Any) -> PortResponse:
    """Look into the ports of the network over frequency."""
    from interwind_service.response import ports

    return ports.port_response(network, frequency_hz)


@_with_provenance
def port_figures(network: Network, frequency_hz: Any, figures: Any) -> PortFigures:
    """Read off the ports what people ask for."""
    from interwind_service.response import port_figures as desk

    return desk.port_figures(network, frequency_hz, figures)


@_with_provenance
def time_response(
    network: Network,
    stop_s: float,
    step_s: float,
    observe: Any = None,
    initial: Any = None,
    tolerance: float = DEFAULT_TOLERANCE,
    recording: Recording | None = None,
) -> TimeResponse:
    """Solve the network over time."""
    from interwind_service.response import time

    return time.time_response(network, stop_s, step_s, observe, initial, tolerance, recording=recording)


@_with_provenance
def periodic_response(
    network: Network, period_s: float, step_s: float, observe: Any = None, tolerance: float = DEFAULT_TOLERANCE
) -> PeriodicResponse:
    """Find one period of the steady state, directly."""
    from interwind_service.response import periodic

    return periodic.periodic_response(network, period_s, step_s, observe, tolerance)


def sample_windings(windings: WindingSet, sample: SampleWindings) -> NDArray[Any]:
    """Draw random sets of windings, each of which can exist; shape (count, n, n), H."""
    from interwind_service.windings import sampling

    return sampling.sample_windings(windings, sample)


def prepare_stack(network: Network, frequency_hz: Any, observe: Any = None) -> Stack | None:
    """Prepare the frequency responses of many variants of a network; None when it is no case for that."""
    from interwind_service.response import stack

    return stack.prepare(network, frequency_hz, observe)


def stacked_responses(stack: Stack, columns: Any, into: NDArray[Any]) -> NDArray[Any]:
    """Fill ``into`` (observables, V, F) with the responses of the variants; return which were answered, shape (V,)."""
    from interwind_service.response import stack as desk

    return desk.stacked_responses(stack, columns, into)


def clear_eigenvalues(windings: WindingSet, columns: Any, count: int) -> tuple[NDArray[Any], NDArray[Any]]:
    """Return the eigenvalues of many variants of a set (V, n), and for which they settle that it can exist (V,)."""
    from interwind_service.windings import variants

    return variants.clear_eigenvalues(windings, columns, count)
