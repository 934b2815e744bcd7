"""The process from which all workers are forked, started first: it reads its libraries while the front reads its own.

Forking the front itself is no way: gRPC does not survive it.
"""

from __future__ import annotations

import multiprocessing
import os
from multiprocessing import forkserver
from multiprocessing.context import ForkServerContext

PRELOAD = "interwind_service.workers.preload"
SINGLE_THREAD = ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS", "NUMEXPR_NUM_THREADS")


def start_forkserver() -> ForkServerContext:
    """Start it unless it runs; return the context whose processes it forks, each with one BLAS thread."""
    for name in SINGLE_THREAD:
        os.environ[name] = "1"  # BLAS reads it once, at its import
    context = multiprocessing.get_context("forkserver")
    context.set_forkserver_preload([PRELOAD])
    forkserver.ensure_running()
    return context
