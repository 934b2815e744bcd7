"""Who may come in: a bounded queue, a share for each client, a memory budget; the refused learn when to come back."""

from __future__ import annotations

import math
import time
from collections import Counter
from dataclasses import dataclass

from interwind.errors import InvalidRequest, Overloaded, Unavailable
from interwind_service.tolerances import CALL_MEAN_WEIGHT, FIRST_CALL_S, RETRY_AFTER_CEILING_S, RETRY_AFTER_FLOOR_S


@dataclass(slots=True)
class Ticket:
    """A call that was let in, and what it holds."""

    client: str
    compute_bytes: int
    result_bytes: int
    entered_s: float
    computing: bool = True


class Admission:
    """Counts the calls between their arrival and their last byte. Used from the event loop alone."""

    def __init__(self, *, workers: int, queue_limit: int, client_limit: int, memory_bytes: int) -> None:
        self.workers = workers
        self.queue_limit = queue_limit
        self.client_limit = client_limit or workers + queue_limit
        self.memory_bytes = memory_bytes
        self.reserved_bytes = 0
        self.computing = 0
        self.draining = False
        self.refused: Counter[str] = Counter()
        self._by_client: Counter[str] = Counter()
        self._mean_s = FIRST_CALL_S

    @property
    def queued(self) -> int:
        """Calls waiting for a worker."""
        return max(0, self.computing - self.workers)

    def enter(self, client: str, compute_bytes: int, result_bytes: int) -> Ticket:
        """Let a call in, or raise why not."""
        if self.draining:
            raise Unavailable(
                "the server is stopping; send the call again to another one", reason="DRAINING", retry_after_s=1.0
            )
        needed = compute_bytes + result_bytes
        if needed > self.memory_bytes:
            raise InvalidRequest.at(
                "size",
                f"the call needs about {needed} bytes, the server has {self.memory_bytes}; ask for fewer points or "
                "observables, or split the windings",
                reason="TOO_LARGE",
                estimate_bytes=needed,
                limit_bytes=self.memory_bytes,
            )
        if self.computing >= self.workers + self.queue_limit:
            self._refuse("QUEUE_FULL", f"{self.queued} calls wait, at most {self.queue_limit} may")
        if self._by_client[client] >= self.client_limit:
            held = self._by_client[client]
            self._refuse("CLIENT_LIMIT", f"you have {held} calls here, at most {self.client_limit} are allowed")
        free = self.memory_bytes - self.reserved_bytes
        if needed > free:
            self._refuse("MEMORY_FULL", f"about {needed} bytes needed, {free} of {self.memory_bytes} are free")
        self.computing += 1
        self.reserved_bytes += needed
        self._by_client[client] += 1
        return Ticket(client, compute_bytes, result_bytes, time.monotonic())

    def computed(self, ticket: Ticket, result_bytes: int) -> None:
        """Give back the worker: what is left of the call is ``result_bytes`` on their way out."""
        if not ticket.computing:
            return
        ticket.computing = False
        self.computing -= 1
        self.reserved_bytes += result_bytes - ticket.compute_bytes - ticket.result_bytes
        ticket.result_bytes = result_bytes
        self._mean_s += CALL_MEAN_WEIGHT * (time.monotonic() - ticket.entered_s - self._mean_s)

    def leave(self, ticket: Ticket) -> None:
        """Give back all that the call still holds."""
        self.computed(ticket, 0)
        self.reserved_bytes -= ticket.result_bytes
        self._by_client[ticket.client] -= 1
        if not self._by_client[ticket.client]:
            del self._by_client[ticket.client]

    def _refuse(self, reason: str, why: str) -> None:
        self.refused[reason] += 1
        wait = self._mean_s * (self.queued + 1) / self.workers
        wait = min(RETRY_AFTER_CEILING_S, max(RETRY_AFTER_FLOOR_S, math.ceil(wait * 10) / 10))
        raise Overloaded(f"{why}; try again in {wait:g} s", reason=reason, retry_after_s=wait)
