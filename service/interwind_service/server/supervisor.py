"""Words to the supervisor that started this server: ready, stopping, alive; nothing where nobody listens."""

from __future__ import annotations

import asyncio
import os
import socket


def tell(words: str) -> None:
    """Send ``words`` to the socket named by NOTIFY_SOCKET."""
    address = os.environ.get("NOTIFY_SOCKET")
    if not address:
        return
    with socket.socket(socket.AF_UNIX, socket.SOCK_DGRAM | socket.SOCK_CLOEXEC) as out:
        out.sendto(words.encode(), "\0" + address[1:] if address.startswith("@") else address)


async def say_alive() -> None:
    """Speak twice as often as WATCHDOG_USEC asks, from the event loop: a loop that hangs falls silent."""
    limit_s = int(os.environ.get("WATCHDOG_USEC") or 0) / 1e6
    while limit_s:
        tell("WATCHDOG=1")
        await asyncio.sleep(limit_s / 2)
