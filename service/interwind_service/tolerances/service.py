"""Limits of the front and of its workers."""

WORKER_OOM_SCORE_ADJUST = 700  # the kernel, short of memory, takes a worker and not the server
# Freed memory a worker keeps for its next arrays: the largest that the C library still takes from its heap, twice.
WORKER_KEPT_HEAP_BYTES = 64 * 1024 * 1024
WORKER_RESPAWN_PAUSE_S = 0.2  # between tries to start a process when the system has none to give
IDLE_LOOK_S = 0.5  # how soon a worker that died without work is replaced
WORKER_LEAVE_S = 0.3  # a stopping server waits so long for its workers; they see its end by themselves
INLINE_ANSWER_BYTES = 64 * 1024  # below this a file costs more than the pipe (measured: 0.4 ms against 0.3 ms)
MAX_REQUEST_BYTES = 4 * 2**20  # what every gRPC library sends and takes unasked; larger arrays go through PutArray
MAX_ARRAY_PART_BYTES = 2**20  # one part of an array: the chunk size at which Python streams fastest
MAX_SIZE_HEADER_BYTES = 72  # six varints and their keys
DEFAULT_QUEUE_PER_WORKER = 4  # waiting calls a worker: with calls of a second, nobody waits longer than a few
DEFAULT_MAX_TIMEOUT_S = 600.0  # no call may hold a worker longer; batches are for that
# Of the machine's memory for all calls together; the rest is for whoever else is on the node
DEFAULT_MEMORY_SHARE = 0.5
# Address space of an idle worker (libraries, arenas), before its share of the budget
WORKER_BASE_ADDRESS_BYTES = 2 * 2**30
DEFAULT_ARRAY_STORE_BYTES = 512 * 2**20  # uploaded and fetched arrays together; the least recently used leave first
ARRAY_UPLOAD_IDLE_S = 600.0  # an upload nobody continues is forgotten
MAX_OPEN_UPLOADS = 64  # unfinished uploads at a time; the longest idle leaves first
SPOOL_FULL_RETRY_S = 2.0  # a full spool empties as answers are read
MAX_WINDINGS = 4000  # a dense set of this size is 128 MB a matrix and some minutes of eigenvalues
RETRY_AFTER_FLOOR_S = 0.1  # shortest wait asked of a refused caller
RETRY_AFTER_CEILING_S = 5.0  # longest wait asked of a refused caller; load changes faster than that
DEFAULT_GRACE_S = 10.0  # a drain waits so long for running calls, below the 30 s service supervisors allow
HANDSHAKE_TIMEOUT_MS = 5_000  # a connection that says nothing is closed
MAX_CONNECTION_AGE_MS = 1_800_000  # after that a client connects anew, and so finds servers that were added
MAX_CONNECTION_IDLE_MS = 300_000  # a connection without calls is closed; clients reconnect by themselves
# 0 = a caller may ping as often as he likes. gRPC up to 1.80 books one more error for every ping above a limit: a
# million on one connection took 3.4 GB and 30 s. Without a limit they take 0.3 s and no memory, read or not (measured).
MAX_PING_STRIKES = 0
MAX_CONCURRENT_STREAMS = 256  # calls a connection may have open at once
CALL_MEAN_WEIGHT = 0.1  # weight of the newest call in the running mean of call seconds
FIRST_CALL_S = 1.0  # what a call is taken to last before any was measured
# Dense complex matrices a solve holds at once, 16 m² bytes each (measured: 7 to 8.6 from 500 to 2000 coupled windings)
ESTIMATE_MATRICES = 8
# What an unknown takes beside them: names, branches, rows, sparse factors (measured: 2.4 KB in a ladder)
ESTIMATE_UNKNOWN_BYTES = 32 * 1024
UNSTATED_BYTES = 64 * 2**20  # what a request may cost beyond its stated size: enough to type small ones by hand
ESTIMATE_COPIES = 4  # copies of a request in flight: received, piped, parsed, decoded
LOG_QUEUE_LINES = 10_000  # lines that may wait for a slow reader of stderr; later ones are counted and dropped
TOKEN_RELOAD_INTERVAL_S = 1.0  # how often the token file is looked at, at most
PROGRESS_INTERVAL_S = 0.1  # progress is for eyes; more often it only costs
HEALTH_INTERVAL_S = 0.5  # how soon health tells that no worker can be had
PARENT_POLL_S = 0.2  # how often an embedded server looks whether its parent lives

# A table shorter than this is made before it is sent; a longer one goes out while it is made.
STREAMED_ROWS_BYTES = 4 * 1024 * 1024
