"""Frozen values: windings, network, response. Shapes are checked here, physics never."""
