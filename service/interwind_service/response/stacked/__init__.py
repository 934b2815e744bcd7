"""Many variants of one network at once, as one straight line of array operations."""
