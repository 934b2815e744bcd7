"""Blocks of steps with events on the grid alone: samples and ends as one product with what kicks the flow.

y_{k+1} = e^(M h) y_k + E c_{k+1}, with c the change of the drives at a grid point beyond their own flow, known
beforehand. So all samples of a block are one row z = (y, c_1, .., c_B) times a block Toeplitz matrix, its end is
another such product, and Σ zᵀz over the blocks holds Σ yᵀy over all their steps.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


class KickedBlocks:
    """The products for blocks of ``block`` steps and kicks of q numbers a step.

    Parameters
    ----------
    move : y_{k+1} = y_k ``move`` between kicks, rows, shape (s, s).
    observe : samples of a block from its start, shape (s, B p).
    kick : E as rows, shape (q, s).
    readout : rows of the samples, shape (p, s).
    block : B.
    """

    def __init__(
        self, move: FloatArray, observe: FloatArray, kick: FloatArray, readout: FloatArray, block: int
    ) -> None:
        self.move, self.kick, self.block = move, kick, block
        moved = [kick]
        for _ in range(block - 1):
            moved.append(moved[-1] @ move)
        self.ends = np.vstack(moved[::-1])
        seen = np.stack([rows @ readout.T for rows in moved])  # (B, q, p): a kick, so many steps later
        width, outputs = kick.shape[0], readout.shape[0]
        toeplitz = np.zeros((block, width, block, outputs))
        for step in range(1, block):  # a kick at the end of step j is seen from sample j on
            toeplitz[step - 1, :, step:] = seen[: block - step].transpose(1, 0, 2)
        self.samples = np.vstack((observe, toeplitz.reshape(block * width, block * outputs)))
        self.square = np.zeros((len(self.samples), len(self.samples)))

    def take(self, y: FloatArray, kicks: FloatArray) -> FloatArray:
        """Return the samples (blocks, B p) of blocks that start at y (blocks, s), kicks (blocks, B q) on their way."""
        z = np.hstack((y, kicks))
        self.square += z.T @ z
        return z @ self.samples

    def sum_of_squares(self) -> FloatArray:
        """Return Σ y yᵀ over all steps taken, shape (s, s)."""
        size, width = len(self.move), len(self.kick)
        along = np.vstack((self.move, self.kick))
        square = self.square
        total = square[:size, :size].copy()
        for _ in range(self.block - 1):
            own, rest = square[: size + width], square[size + width :, size + width :]
            across = along.T @ own[:, size + width :]
            square = np.block([[along.T @ own[:, : size + width] @ along, across], [across.T, rest]])
            total += square[:size, :size]
        return total
