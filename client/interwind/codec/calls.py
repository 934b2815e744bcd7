"""The table of calls: for each RPC, how its request and its answer become messages, on either side.

A worker decodes a request into the keyword arguments of an engine function and encodes its answer; a client does the
reverse. Nothing else in the project knows both the messages and the functions.
"""

from __future__ import annotations

from interwind.codec.call import Call
from interwind.codec.response_calls import RESPONSE_CALLS
from interwind.codec.windings_calls import WINDINGS_CALLS

CALLS: dict[str, Call] = {call.path: call for call in (*WINDINGS_CALLS, *RESPONSE_CALLS)}
BY_ENGINE: dict[str, Call] = {call.engine: call for call in CALLS.values()}
