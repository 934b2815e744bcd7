"""The client: every call of the service as a method."""

from __future__ import annotations

import os
import uuid
from collections.abc import Callable, Iterator, Sequence
from importlib.metadata import version
from types import TracebackType
from typing import Any

from numpy.typing import ArrayLike

from interwind.batch import Batch, list_batches, submit
from interwind.calling import HEALTH_CHECK, Caller, Deadline
from interwind.channel import DEFAULT_TIMEOUT_S, RetryPolicy, Target
from interwind.codec.array import stored_arrays
from interwind.codec.batch import Submission
from interwind.codec.calls import BY_ENGINE
from interwind.embedded import EmbeddedServer
from interwind.errors import InterwindError, InvalidRequest, Unavailable
from interwind.model.batch import Analysis, BatchProgress, CostForecast
from interwind.model.characterization import Characterization
from interwind.model.connection import Connection
from interwind.model.identification import Identification
from interwind.model.network import Network
from interwind.model.observables import Observable
from interwind.model.periodic import PeriodicResponse
from interwind.model.poles import PoleReport
from interwind.model.port_figures import PortFigure, PortFigures
from interwind.model.readings import Reading
from interwind.model.recording import Recording
from interwind.model.report import RepairMethod, RepairReport, ValidityReport
from interwind.model.response import (
    AdaptiveSweep,
    FrequencyResponse,
    Initial,
    MnaSystem,
    PortResponse,
    TimeResponse,
)
from interwind.model.server_info import ServerInfo
from interwind.model.vary import Column
from interwind.model.windings import WindingSet
from interwind.uploads import ServerArrays
from interwind.v1 import server_service_pb2

Progress = Callable[[int, int], None]


def connect(
    address: str | None = None,
    token: str | None = None,
    tls_ca: str | None = None,
    tls_cert: str | None = None,
    tls_key: str | None = None,
    retries: int = 3,
    state_dir: str | None = None,
) -> Client:
    """Connect to a server, or start one of one's own.

    ``address``: HOST:PORT, several after commas, or unix:PATH; None: INTERWIND_ADDRESS, else an embedded service.
    ``state_dir``: where an embedded service keeps its batches.
    """
    if not isinstance(retries, int) or retries < 0:
        raise InvalidRequest.at("retries", f"{retries!r} found; a whole number, at least 0, is expected")
    address = address or os.environ.get("INTERWIND_ADDRESS")
    if address is None:
        server = EmbeddedServer(state_dir)
        return Client(Target(server.address), retries=retries, embedded=server)
    if state_dir is not None:
        raise InvalidRequest.at("state_dir", "found beside an address; the server there has its own --state-dir")
    return Client(Target.of(address, token, tls_ca, tls_cert, tls_key), retries=retries)


class Client:
    """A connection to the service. Safe to share between threads; close it, or use it in a ``with``.

    Every method takes ``timeout_s``, to the last byte, and may raise any class of `interwind.errors`.
    """

    def __init__(self, target: Target, *, retries: int = 3, embedded: EmbeddedServer | None = None) -> None:
        self.address = target.address
        self._embedded = embedded
        self._caller = Caller(target, RetryPolicy(retries=retries), version("interwind"))

    def __enter__(self) -> Client:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def close(self) -> None:
        """Hang up, and end the embedded service if there is one. Calls still running end as `Cancelled`."""
        self._caller.close()
        if self._embedded is not None:
            self._embedded.stop()

    def check(self, coils: WindingSet, *, timeout_s: float = DEFAULT_TIMEOUT_S) -> ValidityReport:
        """Say whether the windings can exist, and which pair is to blame when they cannot."""
        report: ValidityReport = self._call("check", {"windings": coils}, timeout_s)
        return report

    def repair(
        self,
        coils: WindingSet,
        trusted: Sequence[tuple[str, str]] = (),
        weights: ArrayLike | None = None,
        floor: float | None = None,
        method: RepairMethod = RepairMethod.COMPLETION,
        *,
        timeout_s: float = DEFAULT_TIMEOUT_S,
    ) -> RepairReport:
        """Mend the set: fill in unknown and distrusted pairs, or find the nearest set that can exist."""
        arguments = {"windings": coils, "trusted": trusted, "weights": weights, "floor": floor, "method": method}
        report: RepairReport = self._call("repair", arguments, timeout_s)
        return report

    def identify(
        self,
        labels: Sequence[str],
        readings: Sequence[Reading],
        aim: tuple[str, str] | None = None,
        *,
        timeout_s: float = DEFAULT_TIMEOUT_S,
    ) -> Identification:
        """Find the set that explains the readings best, how well each entry is known, and what to read next.

        ``aim``: the pair whose leakage the next reading is to sharpen, its driven winding first; None = the one known
        worst.
        """
        arguments = {"labels": labels, "readings": readings, "aim": aim}
        answer: Identification = self._call("identify", arguments, timeout_s)
        return answer

    def characterize(
        self,
        coils: WindingSet,
        connections: Sequence[Connection] = (),
        frequency_hz: ArrayLike | None = None,
        *,
        timeout_s: float = DEFAULT_TIMEOUT_S,
    ) -> Characterization:
        """Return leakages, the inverse matrix, modes, equivalents, and how paralleled windings share their current.

        ``connections`` are made first, in order; ``frequency_hz``: where the sharing is wanted.
        """
        arguments = {"windings": coils, "connections": connections, "frequency_hz": frequency_hz}
        answer: Characterization = self._call("characterize", arguments, timeout_s)
        return answer

    def stamp(self, net: Network, *, timeout_s: float = DEFAULT_TIMEOUT_S) -> MnaSystem:
        """Return the matrices of G x + C dx/dt = B u."""
        system: MnaSystem = self._call("stamp", {"network": net}, timeout_s)
        return system

    def frequency_response(
        self,
        net: Network,
        frequency_hz: ArrayLike | AdaptiveSweep,
        observe: Sequence[Observable] | None = None,
        *,
        timeout_s: float = DEFAULT_TIMEOUT_S,
        progress: Progress | None = None,
    ) -> FrequencyResponse:
        """Return complex peak values over frequency, driven by the sources' phasors."""
        arguments = {"network": net, "frequency_hz": frequency_hz, "observe": observe}
        response: FrequencyResponse = self._call("frequency_response", arguments, timeout_s, progress)
        return response

    def poles(
        self,
        net: Network,
        observe: Sequence[Observable] | None = None,
        around_hz: float | None = None,
        *,
        timeout_s: float = DEFAULT_TIMEOUT_S,
    ) -> PoleReport:
        """Return the natural modes: poles, quality factors, residues, zeros, and where the energy of each is."""
        arguments = {"network": net, "observe": observe, "around_hz": around_hz}
        report: PoleReport = self._call("poles", arguments, timeout_s)
        return report

    def port_response(
        self,
        net: Network,
        frequency_hz: ArrayLike,
        *,
        timeout_s: float = DEFAULT_TIMEOUT_S,
        progress: Progress | None = None,
    ) -> PortResponse:
        """Return impedance, admittance and scattering matrices of the ports over frequency."""
        arguments = {"network": net, "frequency_hz": frequency_hz}
        response: PortResponse = self._call("port_response", arguments, timeout_s, progress)
        return response

    def port_figures(
        self,
        net: Network,
        frequency_hz: ArrayLike,
        figures: Sequence[PortFigure],
        *,
        timeout_s: float = DEFAULT_TIMEOUT_S,
    ) -> PortFigures:
        """Return what is read off the ports: insertion loss, mixed modes, transfers, the best link."""
        arguments = {"network": net, "frequency_hz": frequency_hz, "figures": figures}
        answer: PortFigures = self._call("port_figures", arguments, timeout_s)
        return answer

    def time_response(
        self,
        net: Network,
        stop_s: float,
        step_s: float,
        observe: Sequence[Observable] | None = None,
        initial: Initial = None,
        tolerance: float = 1e-6,
        *,
        recording: Recording | None = None,
        timeout_s: float = DEFAULT_TIMEOUT_S,
        progress: Progress | None = None,
    ) -> TimeResponse:
        """Return samples at 0, step_s, 2 step_s, … stop_s."""
        arguments = {
            "network": net, "stop_s": stop_s, "step_s": step_s,
            "observe": observe, "initial": initial, "tolerance": tolerance, "recording": recording,
        }  # fmt: skip
        response: TimeResponse = self._call("time_response", arguments, timeout_s, progress)
        return response

    def periodic_response(
        self,
        net: Network,
        period_s: float,
        step_s: float,
        observe: Sequence[Observable] | None = None,
        tolerance: float = 1e-6,
        *,
        timeout_s: float = DEFAULT_TIMEOUT_S,
        progress: Progress | None = None,
    ) -> PeriodicResponse:
        """Return one period of the steady state."""
        arguments = {
            "network": net, "period_s": period_s, "step_s": step_s, "observe": observe, "tolerance": tolerance,
        }  # fmt: skip
        response: PeriodicResponse = self._call("periodic_response", arguments, timeout_s, progress)
        return response

    def submit_batch(
        self,
        net: Network,
        analysis: Analysis,
        vary: Sequence[Column],
        request_id: str | None = None,
        *,
        timeout_s: float = DEFAULT_TIMEOUT_S,
    ) -> Batch:
        """Store many variants of one network to be computed; the same ``request_id`` returns the same batch."""
        submission = Submission(net, analysis, tuple(vary), request_id or str(uuid.uuid4()))
        return Batch(self._caller, self._submit(submission, timeout_s).batch_id)

    def forecast_batch(
        self, net: Network, analysis: Analysis, vary: Sequence[Column], *, timeout_s: float = DEFAULT_TIMEOUT_S
    ) -> CostForecast:
        """Check a batch and say what it would take; nothing is stored."""
        forecast = self._submit(Submission(net, analysis, tuple(vary), validate_only=True), timeout_s).forecast
        return forecast or CostForecast()

    def batch(self, batch_id: str) -> Batch:
        """Take up a batch by its id, whoever submitted it with this token."""
        return Batch(self._caller, batch_id)

    def batches(self, *, timeout_s: float = DEFAULT_TIMEOUT_S) -> Iterator[BatchProgress]:
        """Yield the batches of this token, newest first."""
        return list_batches(self._caller, Deadline(timeout_s))

    def server_info(self, *, timeout_s: float = DEFAULT_TIMEOUT_S) -> ServerInfo:
        """Return versions, limits and what the workers do; answered at once, however busy they are."""
        deadline = Deadline(timeout_s)
        answer = self._caller.repeatedly(
            lambda: self._caller.unary(
                "/interwind.v1.ServerService/GetServerInfo",
                server_service_pb2.GetServerInfoRequest(),
                server_service_pb2.GetServerInfoResponse,
                deadline,
            ),
            deadline,
        )
        values = {field.name: getattr(answer, field.name) for field in answer.DESCRIPTOR.fields}
        return ServerInfo(**values | {"library_versions": dict(answer.library_versions)})

    def health(self, *, timeout_s: float = DEFAULT_TIMEOUT_S) -> bool:
        """Say whether the server takes calls: the standard gRPC health check."""
        try:
            answer = self._caller.unary(HEALTH_CHECK, b"", _Bytes, Deadline(timeout_s))
        except Unavailable:
            return False
        return bool(answer == b"\x08\x01")  # status = SERVING

    def _submit(self, submission: Submission, timeout_s: float) -> BatchProgress:
        return submit(self._caller, submission, self._arrays, Deadline(timeout_s))

    def _arrays(self, deadline: Deadline) -> ServerArrays:
        return ServerArrays(
            lambda path, request, kind: self._caller.unary(path, request, kind, deadline),
            lambda path, request, kind: self._caller.stream(path, request, kind, deadline),
            lambda attempt: self._caller.repeatedly(attempt, deadline),
        )

    def _call(self, engine: str, arguments: dict[str, Any], timeout_s: float, progress: Progress | None = None) -> Any:
        call, deadline = BY_ENGINE[engine], Deadline(timeout_s)
        arrays = self._arrays(deadline)

        def attempt() -> Any:
            with stored_arrays(arrays):
                request = call.encode_request(**arguments)
                if not call.streaming:
                    answer = self._caller.unary(call.path, request, call.response_class, deadline)
                    return call.decode_response((answer,))
                parts = self._caller.stream(call.path, request, call.response_class, deadline)
                try:
                    return call.decode_response(parts, progress)
                finally:
                    parts.close()  # an interrupt, or an error of the progress callback, cancels the call

        return self._caller.repeatedly(attempt, deadline)


class _Bytes:
    FromString = staticmethod(bytes)


__all__ = ["Client", "InterwindError", "connect"]
