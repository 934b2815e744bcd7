"""What the forkserver imports once for all workers. It stops at once when the server is gone meanwhile."""

from __future__ import annotations

import importlib
import os

MODULES = (
    "numpy",
    "google.protobuf.message",
    "interwind.codec.calls",
    "scipy.linalg",
    "threadpoolctl",
    "interwind_service.workers.job",
    "interwind_service.windings.verdict",
    "interwind_service.network.system",
    "interwind_service.response.frequency",
    "interwind_service.response.ports",
    "interwind_service.response.time",
)

_parent = os.getppid()
for _name in MODULES:
    importlib.import_module(_name)
    if os.getppid() != _parent:  # an orphan need not finish
        os._exit(1)
