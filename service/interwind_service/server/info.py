"""ServerService: what the server is and what it is doing, answered by the front whatever the workers do."""

from __future__ import annotations

from importlib.metadata import version

from interwind.v1 import server_service_pb2 as messages
from interwind_service.server.admission import Admission
from interwind_service.server.boundary import Call, Rpc
from interwind_service.server.settings import Settings
from interwind_service.tolerances import MAX_REQUEST_BYTES, MAX_WINDINGS
from interwind_service.version import SERVICE_VERSION
from interwind_service.workers.pool import Job, WorkerPool

API_VERSION = "v1"


def blas_threads() -> int:
    """Return the threads a worker's BLAS uses. Runs in a worker."""
    import numpy  # noqa: F401  loads the BLAS that is counted
    from threadpoolctl import threadpool_info

    return max((int(library["num_threads"]) for library in threadpool_info()), default=1)


class Info:
    """Answers GetServerInfo."""

    def __init__(self, *, settings: Settings, pool: WorkerPool, admission: Admission) -> None:
        self._settings = settings
        self._pool = pool
        self._admission = admission
        self._threads: Job = pool.call(blas_threads)
        self._libraries = {name: version(name) for name in ("numpy", "scipy", "grpcio", "protobuf")}

    def rpcs(self) -> list[Rpc]:
        """Return the RPCs of ServerService."""
        return [Rpc("/interwind.v1.ServerService/GetServerInfo", self._answer)]

    async def _answer(self, request: bytes, call: Call) -> bytes:
        answer = messages.GetServerInfoResponse(
            service_version=SERVICE_VERSION,
            api_version=API_VERSION,
            worker_count=self._pool.count,
            busy_worker_count=self._pool.busy,
            blas_thread_count=self._known_threads(),
            queue_limit_count=self._admission.queue_limit,
            queued_count=self._admission.queued,
            memory_limit_bytes=self._admission.memory_bytes,
            max_timeout_s=self._settings.max_timeout_s,
            max_request_bytes=MAX_REQUEST_BYTES,
            max_winding_count=MAX_WINDINGS,
            library_versions=self._libraries,
        )
        return bytes(answer.SerializeToString())

    def _known_threads(self) -> int:
        """Return what the first worker measured; 0 as long as it has not, asked again if it died over it."""
        if not self._threads.done():
            return 0
        if self._threads.cancelled() or self._threads.exception() is not None:
            self._threads = self._pool.call(blas_threads)
            return 0
        return int(self._threads.result())
