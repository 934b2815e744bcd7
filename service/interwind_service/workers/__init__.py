"""Worker processes: the pool, the process, the job, the spool."""
