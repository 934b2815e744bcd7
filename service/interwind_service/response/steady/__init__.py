"""The periodic steady state: the cycle map, the search for its fixed point, and figures of one period."""
