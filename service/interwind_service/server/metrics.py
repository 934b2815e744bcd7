"""Metrics for Prometheus: calls under the names its gRPC middleware made common, and the server's own gauges."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from typing import Any, cast

from prometheus_client import CollectorRegistry, Counter, Histogram, start_http_server
from prometheus_client.core import CounterMetricFamily, GaugeMetricFamily

from interwind_service.server.admission import Admission
from interwind_service.server.boundary import Rpc
from interwind_service.server.settings import SettingsError, split_address
from interwind_service.workers.pool import WorkerPool

LABELS = ("grpc_type", "grpc_service", "grpc_method")


class Metrics:
    """Counts calls as they begin and end; reads the rest from the pool and the admission when asked."""

    def __init__(self, *, pool: WorkerPool, admission: Admission, batch_items: Callable[[], Mapping[str, int]]) -> None:
        self.registry = CollectorRegistry()
        self._started = Counter("grpc_server_started", "Calls begun.", LABELS, registry=self.registry)
        self._handled = Counter(
            "grpc_server_handled", "Calls ended, by code.", (*LABELS, "grpc_code"), registry=self.registry
        )
        self._seconds = Histogram(
            "grpc_server_handling_seconds", "Seconds from arrival to last byte.", LABELS, registry=self.registry
        )
        self._solve = Histogram(
            "interwind_solve_seconds", "Seconds a worker computed.", ("kind",), registry=self.registry
        )
        self.registry.register(_State(pool, admission, batch_items))  # type: ignore[arg-type]

    def begun(self, rpc: Rpc) -> None:
        """Count a call that arrived."""
        self._started.labels(*_labels(rpc)).inc()

    def ended(self, rpc: Rpc, code: str, seconds: float, log: dict[str, object]) -> None:
        """Count a call that ended; ``log`` holds what its handler measured."""
        labels = _labels(rpc)
        self._handled.labels(*labels, _camel(code)).inc()
        self._seconds.labels(*labels).observe(seconds)
        if isinstance(log.get("solve_s"), float):
            self._solve.labels(labels[2]).observe(cast(float, log["solve_s"]))

    def serve(self, address: str) -> str:
        """Answer scrapes on ``address`` from a thread of its own; return the address with the port that was found."""
        host, port = split_address(address, "--metrics-listen")
        try:
            server, _ = start_http_server(port, host, registry=self.registry)
        except OSError as error:
            raise SettingsError(f"--metrics-listen: {address} cannot be bound: {error.strerror}") from error
        return f"{host}:{server.server_port}"


class _State:
    """What the pool, the admission and the batches say at the moment of the scrape."""

    def __init__(self, pool: WorkerPool, admission: Admission, batch_items: Callable[[], Mapping[str, int]]) -> None:
        self._batch_items = batch_items
        self._pool = pool
        self._admission = admission

    def collect(self) -> Iterator[Any]:
        """Yield the gauges and the counters kept elsewhere."""
        pool, admission = self._pool, self._admission
        yield GaugeMetricFamily("interwind_queue_depth", "Calls waiting for a worker.", admission.queued)
        yield GaugeMetricFamily("interwind_workers", "Worker processes.", pool.count)
        yield GaugeMetricFamily("interwind_workers_busy", "Workers computing.", pool.busy)
        yield GaugeMetricFamily("interwind_memory_reserved_bytes", "Reserved by calls.", admission.reserved_bytes)
        restarts = CounterMetricFamily("interwind_worker_restarts", "Workers replaced, by reason.", labels=["reason"])
        for reason, count in sorted(pool.restarts.items()):
            restarts.add_metric([reason], count)
        yield restarts
        refused = CounterMetricFamily("interwind_calls_refused", "Calls not admitted, by reason.", labels=["reason"])
        for reason, count in sorted(admission.refused.items()):
            refused.add_metric([reason], count)
        yield refused
        items = GaugeMetricFamily("interwind_batch_items", "Rows of the batches held, by state.", labels=["state"])
        for state, count in self._batch_items().items():
            items.add_metric([state], count)
        yield items


def _labels(rpc: Rpc) -> tuple[str, str, str]:
    _, service, method = rpc.method.split("/")
    return "server_stream" if rpc.streaming else "unary", service, method


def _camel(code: str) -> str:
    """Return the code as the middleware spells it: InvalidArgument, OK."""
    return code if code == "OK" else "".join(word.capitalize() for word in code.split("_"))
