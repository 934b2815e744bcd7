"""Starting, serving, draining: the life of a server process."""

from __future__ import annotations

import asyncio
import contextlib
import json
import os
import shutil
import signal
from collections.abc import AsyncIterator
from pathlib import Path

os.environ.setdefault("GRPC_VERBOSITY", "NONE")  # the C core writes plain text on stderr, which is for JSON lines

import grpc
from grpc_reflection.v1alpha import reflection

from interwind_service.server.admission import Admission
from interwind_service.server.arrays import ArrayDoor
from interwind_service.server.auth import TokenGate, Tokens, client_of
from interwind_service.server.batch_room import BatchRoom, batch_room
from interwind_service.server.batches import BatchDoor
from interwind_service.server.boundary import Boundary
from interwind_service.server.compute import Compute
from interwind_service.server.doors import channel_options, open_door
from interwind_service.server.health import SERVICE_NAME, Health
from interwind_service.server.info import Info
from interwind_service.server.logs import configure, emit
from interwind_service.server.metrics import Metrics
from interwind_service.server.servicers import generic_handlers, rpcs, service_names
from interwind_service.server.settings import Settings, SettingsError
from interwind_service.server.spool_folder import spool_folder
from interwind_service.server.supervisor import say_alive, tell
from interwind_service.tolerances import PARENT_POLL_S, WORKER_BASE_ADDRESS_BYTES
from interwind_service.version import SERVICE_VERSION
from interwind_service.workers.arrays import ArrayFolder
from interwind_service.workers.pool import WorkerPool
from interwind_service.workers.process import Guards


def run(settings: Settings) -> int:
    """Serve until asked to stop; return the exit status."""
    listener = configure()
    try:
        return asyncio.run(_serve(settings))
    finally:
        listener.stop()


async def _serve(settings: Settings) -> int:
    stop = asyncio.Event()
    loop = asyncio.get_running_loop()
    for number in (signal.SIGTERM, signal.SIGINT):
        loop.add_signal_handler(number, stop.set)
    with spool_folder(settings.spool_dir) as spool:
        guards = Guards(WORKER_BASE_ADDRESS_BYTES + settings.memory_bytes, str(spool))
        pool = WorkerPool(settings.worker_count, guards=guards)
        try:
            with batch_room(settings, pool, spool) as batches:
                async with _serving(settings, pool, spool, batches) as address:
                    print(json.dumps({"listening": address}), flush=True)
                    emit("listening", address=address, version=SERVICE_VERSION, pid=os.getpid(), workers=pool.count)
                    if not await _asked_to_stop(stop, settings.parent_pid):
                        for folder in (spool, Path(address.removeprefix("unix:")).parent):
                            shutil.rmtree(folder, ignore_errors=True)
                        os._exit(1)  # nobody is left to drain for; the workers follow, and batches survive any end
        finally:
            await asyncio.to_thread(pool.shutdown, cancel_futures=True)
    emit("stopped")
    return 0


@contextlib.asynccontextmanager
async def _serving(settings: Settings, pool: WorkerPool, spool: Path, batches: BatchRoom) -> AsyncIterator[str]:
    """Serve inside; drain at the end: first say so, then let running calls finish within the grace."""
    admission = Admission(
        workers=pool.count,
        queue_limit=settings.queue_count,
        client_limit=settings.client_limit,
        memory_bytes=settings.memory_bytes,
    )
    arrays = ArrayFolder(spool / "arrays", settings.array_store_bytes)
    table = rpcs(
        Compute(pool=pool, admission=admission, arrays=arrays, spool=spool / "calls"),
        ArrayDoor(arrays),
        BatchDoor(room=batches, pool=pool, admission=admission, arrays=arrays),
        Info(settings=settings, pool=pool, admission=admission),
    )
    gates = []
    if settings.token_file:
        tokens = Tokens(settings.token_file)
        gates.append(TokenGate(tokens, admission.refused))
        asyncio.get_running_loop().add_signal_handler(signal.SIGHUP, tokens.look_again)
    server = grpc.aio.server(options=channel_options(settings), interceptors=gates)
    metrics = Metrics(pool=pool, admission=admission, batch_items=batches.store.item_counts)
    boundary = Boundary(max_timeout_s=settings.max_timeout_s, client_of=client_of, metrics=metrics)
    server.add_generic_rpc_handlers(generic_handlers(table, boundary))
    names = service_names(table)
    health = Health(server, names)
    if settings.reflection:
        reflection.enable_server_reflection([*names, SERVICE_NAME, reflection.SERVICE_NAME], server)
    try:
        address = open_door(server, settings)
    except RuntimeError as error:
        raise SettingsError(
            f"--listen: {settings.listen} cannot be bound; is another server there, are the certificates whole?"
        ) from error
    if settings.metrics_listen:
        emit("metrics", metrics=metrics.serve(settings.metrics_listen))
    pool.start()
    await server.start()
    beside = [asyncio.create_task(health.follow(pool)), asyncio.create_task(say_alive())]
    tell("READY=1")
    try:
        yield address
    finally:
        tell("STOPPING=1")
        for task in beside:
            task.cancel()
        emit("draining", grace_s=settings.grace_s)
        admission.draining = True
        await asyncio.to_thread(batches.runner.stop)
        await health.drain()
        await server.stop(settings.grace_s)


async def _asked_to_stop(stop: asyncio.Event, parent_pid: int) -> bool:
    """Wait until asked to stop; return False when ``parent_pid`` is no longer the parent."""
    while not stop.is_set() and (not parent_pid or os.getppid() == parent_pid):
        with contextlib.suppress(TimeoutError):
            await asyncio.wait_for(stop.wait(), PARENT_POLL_S if parent_pid else None)
    return stop.is_set()
