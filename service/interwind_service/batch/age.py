"""The clock that retention counts on: how long a state folder has been kept, whatever the wall clock says.

While a server runs the age grows with the monotonic clock. While none runs only the wall clock knows, and it may be
wrong by years in either direction: such a gap counts from 0 up to a small share of the retention, so that no false
date, whether it comes or goes, makes a batch much older than it is.
"""

from __future__ import annotations

import sqlite3
import time
from collections.abc import Callable

from interwind_service.batch.journal import Journal
from interwind_service.tolerances import BATCH_GAP_SHARE


class FolderAge:
    """Seconds that the folder of ``journal`` has been kept; batches in it are kept ``retain_s`` after they are done."""

    def __init__(self, journal: Journal, retain_s: float, wall_s: Callable[[], float]) -> None:
        (row,) = journal.read("SELECT age_s, wall_s FROM clock")
        gap_s = 0.0 if row["wall_s"] is None else wall_s() - row["wall_s"]
        self._base_s = row["age_s"] + min(max(gap_s, 0.0), BATCH_GAP_SHARE * retain_s) - time.monotonic()
        self._wall_s = wall_s

    def now_s(self) -> float:
        """Return the age now."""
        return self._base_s + time.monotonic()

    def keep(self, connection: sqlite3.Connection) -> None:
        """Write the age down; a job of the journal."""
        connection.execute("UPDATE clock SET age_s = ?, wall_s = ?", (self.now_s(), self._wall_s()))
