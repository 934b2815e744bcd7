"""Reciprocity and passivity of what the sources see, tested at one real s: the transfer matrix there is real.

For R, L, C, windings and ideal transformers the matrix H from the voltages and currents of the sources to the currents
and voltages they meet is symmetric up to the sign between kinds, and uᵀ H u >= 0 for s > 0 (Brune 1931).
"""

from __future__ import annotations

import math

import numpy as np

from interwind_service.network.kind import Kind
from interwind_service.response.equations.state_space import StateSpace
from interwind_service.response.sinusoidal.evidence import asymmetry, passivity


def source_evidence(space: StateSpace) -> tuple[float, float]:
    """Return (reciprocity error, passivity margin) at s0, NaN with controlled sources or without sources."""
    topology = space.basis.storage.topology
    inputs = topology.input_branch
    if topology.controls or not len(inputs):
        return math.nan, math.nan
    signals = space.gain_at_shift + space.shift * space.Y1
    voltage = topology.kind[inputs] == Kind.VOLTAGE_SOURCE
    met = np.where(voltage, inputs + len(topology.kind), inputs)
    H = -signals[met]
    scale = np.ones(len(inputs))
    for kind in (voltage, ~voltage):
        size = float(np.abs(H[np.ix_(kind, kind)]).max(initial=0.0))
        if size > 0.0:
            scale[kind] = 1.0 / np.sqrt(size)
    H = (H * scale[:, None] * scale)[None].astype(complex)
    return float(asymmetry(H, voltage)[0]), float(passivity(H)[0])
