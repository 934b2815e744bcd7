"""What the forkserver imports once for all workers. It stops at once when the server is gone meanwhile."""

from __future__ import annotations

import atexit
import gc
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
    "interwind_service.windings.repair",
    "interwind_service.windings.identify",
    "interwind_service.windings.characterize",
    "interwind_service.network.system",
    "interwind_service.response.frequency",
    "interwind_service.response.ports",
    "interwind_service.response.time",
    "interwind_service.response.periodic",
    "interwind_service.response.adaptive",
    "interwind_service.response.stack",
)

atexit.register(os._exit, 0)  # the forkserver has nothing to tidy up; it leaves as soon as the server is gone
_parent = os.getppid()
for _name in MODULES:
    importlib.import_module(_name)
    if os.getppid() != _parent:  # an orphan need not finish
        os._exit(1)
gc.freeze()  # what is imported stays: the collector need not walk it, and its pages stay shared
