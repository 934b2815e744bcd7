"""Logs: one JSON object a line on stderr, never a payload, never a secret, never waiting for a slow reader."""

from __future__ import annotations

import json
import logging
import logging.handlers
import queue
import sys
from typing import Any

from interwind_service.tolerances import LOG_QUEUE_LINES

logger = logging.getLogger("interwind_service")


class JsonLine(logging.Formatter):
    """A record as one JSON object."""

    def format(self, record: logging.LogRecord) -> str:
        """Return the line."""
        line: dict[str, Any] = {
            "time": self.formatTime(record, "%Y-%m-%dT%H:%M:%S") + f".{int(record.msecs):03d}",
            "level": record.levelname.lower(),
            "event": record.getMessage(),
            **getattr(record, "fields", {}),
        }
        if record.name != logger.name:
            line["logger"] = record.name
        if record.exc_info:
            line["trace"] = self.formatException(record.exc_info)
        return json.dumps(line, default=str)


class _NeverWaits(logging.handlers.QueueHandler):
    """Hands lines to a thread; when stderr is stuck they are dropped, the server is not."""

    def enqueue(self, record: logging.LogRecord) -> None:
        try:
            self.queue.put_nowait(record)
        except queue.Full:
            pass

    def prepare(self, record: logging.LogRecord) -> logging.LogRecord:
        return record


def configure() -> logging.handlers.QueueListener:
    """Send every log of this process to stderr as JSON; stop the returned listener at the end."""
    handler = logging.StreamHandler(sys.stderr)
    handler.setFormatter(JsonLine())
    lines: queue.Queue[logging.LogRecord] = queue.Queue(LOG_QUEUE_LINES)
    root = logging.getLogger()
    root.handlers[:] = [_NeverWaits(lines)]
    root.setLevel(logging.INFO)
    listener = logging.handlers.QueueListener(lines, handler)
    listener.start()
    return listener


def emit(event: str, *, level: int = logging.INFO, exc_info: Any = None, **fields: object) -> None:
    """Log one event with its fields."""
    logger.log(level, event, exc_info=exc_info, extra={"fields": fields})
