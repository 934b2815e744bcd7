"""The sinusoidal state over frequency: one by one, swept or sparse, with the numbers that vouch for it."""
