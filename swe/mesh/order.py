"""Order of faces along a space-filling curve, so that near faces have near numbers.

Numbers near in space are near in memory: products with the operators run faster, and a contiguous range of faces is a
compact piece of water. Hilbert's curve is used because consecutive cells of it always touch. Points are put in order
BEFORE the mesh is built: then a mesh has one numbering, its ids are 0, 1, 2, ... and files, checkpoints and stations need
no second one. On a sphere the curve runs through the cube around it, in three dimensions: no seam, no pole, one algorithm.

Index of a cell of a grid of 2^b cells a side, in n dimensions, from its coordinates x_0 ... x_{n-1} (b-bit integers):

    1. from the highest bit q down to the second: in each axis i, where bit q of x_i is set, invert the bits below q of x_0;
       where it is not, exchange them between x_0 and x_i (undoes the rotation of each sub-cube)
    2. Gray code across the axes: x_i ^= x_{i-1}; then every axis ^= the parity mask of the last one
    3. interleave the bits, highest first, axis 0 first

Source: Skilling 2004, AIP Conf. Proc. 707, 381 (from memory; the tests prove the curve by its own property).
"""

from __future__ import annotations

import numpy as np

from swe.errors import MeshError

BITS = 20
"""Grid cells a side are 2^BITS: 60 bits in three dimensions fit an integer, and a million cells a side separate all
points of a mesh that fits in memory; points of one cell keep their order."""


def curve_order(points: np.ndarray) -> np.ndarray:
    """Return the permutation that puts points (n, 2) or (n, 3) in order along Hilbert's curve. Not collective.

    points[curve_order(points)] follows the curve. Positions in any unit; the curve fills the cube that just holds them.
    """
    points = np.asarray(points, dtype=float)
    if points.ndim != 2 or points.shape[1] not in (2, 3):
        raise MeshError(f"points have shape {points.shape}; needed is (n, 2) or (n, 3)")
    if not len(points):
        return np.zeros(0, dtype=np.int64)
    low = points.min(axis=0)
    side = max((points.max(axis=0) - low).max(), np.finfo(float).tiny)
    cells = np.minimum(((points - low) / side * 2**BITS).astype(np.int64), 2**BITS - 1)
    return np.argsort(hilbert_index(cells, BITS), kind="stable")


def hilbert_index(cells: np.ndarray, bits: int) -> np.ndarray:
    """Return the place (n,) along Hilbert's curve of integer cells (n, dimensions), 0 <= cell < 2^bits. Not collective."""
    axes = [column.copy() for column in np.asarray(cells, dtype=np.int64).T]
    for level in range(bits - 1, 0, -1):  # 1.
        below = (1 << level) - 1
        for i in range(len(axes)):
            set_ = (axes[i] >> level & 1).astype(bool)
            swapped = np.where(set_, 0, (axes[0] ^ axes[i]) & below)
            axes[0] ^= np.where(set_, below, swapped)
            axes[i] ^= swapped
    for i in range(1, len(axes)):  # 2.
        axes[i] ^= axes[i - 1]
    parity = np.zeros_like(axes[0])
    for level in range(bits - 1, 0, -1):
        parity ^= (axes[-1] >> level & 1) * ((1 << level) - 1)
    index = np.zeros_like(axes[0])
    for level in range(bits - 1, -1, -1):  # 3.
        for axis in axes:
            index = index << 1 | (axis ^ parity) >> level & 1
    return index
