"""Where batches are computed: the server's own workers, or a cluster behind the same `Executor` interface."""

from __future__ import annotations

from collections.abc import Iterator
from concurrent.futures import Executor
from contextlib import contextmanager
from dataclasses import dataclass

from interwind.errors import InvalidRequest, Unavailable

DASK = "dask="


@dataclass(frozen=True, slots=True)
class Place:
    """An executor, how many chunks it is given at a time, and whether numbers come back in the answers."""

    executor: Executor
    depth: int
    by_value: bool


@contextmanager
def place_of(spec: str, own: Executor, workers: int) -> Iterator[Place]:
    """Open the place a setting names: "" = the ``own`` workers, ``dask=tls://HOST:PORT`` = a Dask cluster.

    Dask's scheduler runs whatever it is sent, so TLS is required; certificates come from Dask's own configuration.

    Raises
    ------
    InvalidRequest : the setting names no known place, or one without TLS.
    Unavailable : the extra ``cluster`` is not installed, or no scheduler answers.
    """
    if not spec:
        yield Place(own, workers + 1, by_value=False)  # one chunk more than workers, so that none waits for the next
        return
    address = spec.removeprefix(DASK)
    if not spec.startswith(DASK) or not address.startswith("tls://"):
        raise InvalidRequest.at(
            "executor", f"{spec!r} found; dask=tls://HOST:PORT is expected (without TLS anybody could run code there)"
        )
    try:
        import distributed
    except ImportError as error:
        raise Unavailable(
            "no Dask is installed here: run  pip install 'interwind[cluster]'", reason="NO_DASK"
        ) from error
    try:
        client = distributed.Client(address, security=distributed.Security(require_encryption=True), timeout="10s")
    except (OSError, TimeoutError, ValueError) as error:
        raise Unavailable(f"no scheduler answers at {address}: {error}", reason="NO_SCHEDULER") from error
    try:
        cores = sum(client.ncores().values()) or 1
        yield Place(client.get_executor(pure=False, retries=1), 2 * cores, by_value=True)
    finally:
        client.close()
