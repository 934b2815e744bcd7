"""What a server says about itself."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True)
class ServerInfo:
    """Versions, limits and what the workers do; no call may last longer than ``max_timeout_s``."""

    service_version: str
    api_version: str
    worker_count: int
    busy_worker_count: int
    blas_thread_count: int
    queue_limit_count: int
    queued_count: int
    memory_limit_bytes: int
    max_timeout_s: float
    max_request_bytes: int
    max_winding_count: int
    library_versions: Mapping[str, str] = field(default_factory=dict)
