"""A growing set of long vectors, each stored in one piece.

The number of vectors is not known beforehand, and most actions stop after a dozen, so memory comes in blocks and
nothing is ever copied to make room. A block holds its vectors one after the other (the column-major layout of the
literature, where a vector is a column); projections and combinations are BLAS-2 calls on each block.
"""

from __future__ import annotations

import numpy as np
from scipy.linalg.blas import dgemv

BLOCK = 32
"""Vectors per block. Most actions fit into one: two that are freed together went back to the system each time (glibc)
and cost 2 ms of page faults an action at n = 30,000, more than all arithmetic on them."""


class Basis:
    """Vectors v_0, v_1, ... of one length n."""

    def __init__(self, length: int):
        self.length = length
        self.blocks: list[np.ndarray] = []

    def vector(self, index: int) -> np.ndarray:
        """Return the storage of one vector, (n,), making room for it; what it holds at first is undefined."""
        block, row = divmod(index, BLOCK)
        while block >= len(self.blocks):
            self.blocks.append(np.empty((BLOCK, self.length)))
        return self.blocks[block][row]

    def project(self, vector: np.ndarray, count: int) -> np.ndarray:
        """Return the inner products of a vector with the first `count` of the basis, (count,)."""
        return np.concatenate([rows @ vector for rows in self._first(count)])

    def add(self, coefficients: np.ndarray, target: np.ndarray) -> None:
        """Add sum_j coefficients[j] v_j to `target`, (n,), in place."""
        for k, rows in enumerate(self._first(len(coefficients))):
            part = coefficients[k * BLOCK : (k + 1) * BLOCK]
            dgemv(1.0, rows.T, part, beta=1.0, y=target, overwrite_y=True)

    def combine(self, coefficients: np.ndarray) -> np.ndarray:
        """Return sum_j coefficients[j] v_j, (n,)."""
        total = np.zeros(self.length)
        self.add(coefficients, total)
        return total

    def _first(self, count: int) -> list[np.ndarray]:
        return [block[: count - k * BLOCK] for k, block in enumerate(self.blocks) if k * BLOCK < count]
