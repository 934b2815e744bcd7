"""Limits of batches."""

BATCH_GROUP_COMMIT_COUNT = 256  # writes in one transaction: one sync of the disk serves them all
BATCH_CHUNK_TRIES = 2  # a chunk whose worker died is tried once more, then split
BATCH_SPLIT = 8  # parts a poisoned chunk falls into: four splits single out one row of 4096
BATCH_STORE_RETRY_S = 2.0  # before the state folder is tried again once it could not be written to
BATCH_EXPIRE_EVERY_S = 60.0  # between two looks for batches whose time has come; retention is told in days
BATCH_OPEN_COUNT = 8  # batches whose submitted numbers stay open: more run in turns rarely
BATCH_PATIENCE_S = 60.0  # a chunk is never thought stuck before: a loaded machine may be ten times slower
BATCH_PATIENCE_FACTOR = 50.0  # nor before so many times what it was forecast to take
BATCH_LOOK_EVERY_S = 5.0  # between two looks for stuck chunks
BATCH_PROVE_COUNT = 64  # newest result files read whole after a restart: what a disk may hold back unwritten
BATCH_VARIANT_LIMIT = 1_000_000  # variants in one batch: its columns then stay within some tens of megabytes
BATCH_POINT_LIMIT = 200_000  # points of a row: the grid still fits one message
BATCH_CHUNK_ROWS = 4096  # most variants computed at a time
BATCH_CHUNK_BYTES = 4 * 2**20  # numbers of a chunk: the front proves and streams it in a few milliseconds
BATCH_CHUNK_S = 0.5  # work of a chunk: what an interactive call may have to wait for, and a stop may throw away
BATCH_FORECAST_ROWS = (8, 64, 512)  # variants tried for the forecast, each while the one before was quick
BATCH_FORECAST_POINTS = 64  # points of a heavy variant tried for the forecast
BATCH_FORECAST_COLD_S = 3.0  # what the very first look may take: a cold worker loads a second of libraries
BATCH_FORECAST_TICK_S = 1e-6  # the clock of processor time may stand still over a quick look
BATCH_FORECAST_S = 0.3  # what is no longer quick: the caller waits for the forecast
OUTPUT_GRID_SHARE = 1e-6  # of a step: the end of a grid may be off by so much
WORKER_BASE_BYTES = 100 * 2**20  # resident memory of an idle worker: interpreter, NumPy, SciPy
BATCH_SUMMARY_BYTES = 64 * 2**20  # numbers a summary holds at a time
BATCH_SUMMARY_ROWS = 10_000  # extreme rows named at each end: beyond, stream the rows themselves
BATCH_PAGE_SIZE = 100  # batches a page, when the caller does not say
BATCH_PAGE_LIMIT = 1000  # batches a page at most: some hundred kilobytes
