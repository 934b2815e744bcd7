"""How a chunk's computing can end other than with an answer, and what its rows are then told."""

from __future__ import annotations

from concurrent.futures import Future

from interwind.errors import DeadlineExceeded, InterwindError, Unavailable, WorkerLost
from interwind_service.batch.work import ChunkAnswer

LOST = "a worker died twice at this variant; look at its size, and at the server's log for the signal"
DEFECT = "computing this variant broke the solver; report it with the batch and the row"
TOO_LONG = "this variant took far longer than the others; give it an analysis of its own, with a limit of its own"
OUT_OF_MEMORY = "this variant needs more memory than one worker may use; ask for fewer points or observables"
INPUT_GONE = "the submitted numbers of this batch fail their checksum; delete it and submit it again"


def end(future: Future[ChunkAnswer] | None, reason: InterwindError) -> None:
    """Free the worker at once where the executor can; elsewhere take the chunk from the queue."""
    if future is not None:
        ending = getattr(future, "end", None)
        if ending is not None:
            ending(reason)
        else:
            future.cancel()


def draining(error: BaseException) -> bool:
    """Say whether it was only that the executor takes no more work."""
    return isinstance(error, Unavailable) and not isinstance(error, WorkerLost)


def verdict(error: BaseException) -> tuple[str, str]:
    """Return the code and message of a row that ended so for good."""
    if isinstance(error, MemoryError):
        return "OUT_OF_MEMORY", OUT_OF_MEMORY
    if isinstance(error, DeadlineExceeded):
        return "TOO_LONG", TOO_LONG
    if isinstance(error, WorkerLost) or type(error).__name__ == "KilledWorker":
        return "WORKER_LOST", LOST
    return "INTERNAL", DEFECT
