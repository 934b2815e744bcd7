"""The table of what is served: every RPC by name, and who answers it. A new service is one more entry here."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable

import grpc

from interwind.codec.calls import CALLS
from interwind_service.server.arrays import ArrayDoor
from interwind_service.server.batches import BatchDoor
from interwind_service.server.boundary import Boundary, Rpc
from interwind_service.server.compute import Compute
from interwind_service.server.info import Info


def rpcs(compute: Compute, arrays: ArrayDoor, batches: BatchDoor, info: Info) -> list[Rpc]:
    """Return every RPC of the server."""
    computing = [Rpc(path, compute.frames, streaming=call.streaming) for path, call in CALLS.items()]
    return [*computing, *arrays.rpcs(), *batches.rpcs(), *info.rpcs()]


def generic_handlers(table: Iterable[Rpc], boundary: Boundary) -> list[grpc.GenericRpcHandler]:
    """Return the gRPC handlers of the table, one a service."""
    by_service: dict[str, dict[str, grpc.RpcMethodHandler]] = defaultdict(dict)
    for rpc in table:
        _, service, method = rpc.method.split("/")
        by_service[service][method] = boundary.method_handler(rpc)
    return [grpc.method_handlers_generic_handler(service, methods) for service, methods in by_service.items()]


def service_names(table: Iterable[Rpc]) -> list[str]:
    """Return the full names of the services, sorted."""
    return sorted({rpc.method.split("/")[1] for rpc in table})
