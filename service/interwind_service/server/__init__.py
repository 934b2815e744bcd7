"""The front: it authenticates, admits, hands on and streams; it never computes."""
