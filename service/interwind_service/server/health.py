"""The standard health service, by name and as a whole; not serving in a drain, nor while no worker can be had."""

from __future__ import annotations

import asyncio
from collections.abc import Iterable

import grpc
from grpc_health.v1 import health, health_pb2, health_pb2_grpc

from interwind_service.server.logs import emit
from interwind_service.tolerances import HEALTH_INTERVAL_S
from interwind_service.workers.pool import WorkerPool

SERVICE_NAME = health.SERVICE_NAME
Status = health_pb2.HealthCheckResponse


class Health:
    """Says whether the server serves."""

    def __init__(self, server: grpc.aio.Server, names: Iterable[str]) -> None:
        self._servicer = health.aio.HealthServicer()
        self._names = ("", *names)
        health_pb2_grpc.add_HealthServicer_to_server(self._servicer, server)

    async def follow(self, pool: WorkerPool) -> None:
        """Say what the pool's state means, from now on."""
        said: bool | None = None
        while True:
            if pool.able is not said:
                said = pool.able
                emit("health", serving=said)
                for name in self._names:
                    await self._servicer.set(name, Status.SERVING if said else Status.NOT_SERVING)
            await asyncio.sleep(HEALTH_INTERVAL_S)

    async def drain(self) -> None:
        """Say that nothing is served any more, whatever is set later."""
        await self._servicer.enter_graceful_shutdown()
