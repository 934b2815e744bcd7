"""The command `interwind`: a request in a file, an answer on standard output."""
