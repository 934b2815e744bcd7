"""Exact runs of linear networks: propagation, energy ledger, recording."""
