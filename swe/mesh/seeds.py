"""First positions of the face centres, spread so that their density follows the wanted spacing h.

Centres h apart in a hexagonal pattern own sqrt(3)/2 h^2 each, so an area holds

    N = integral of 2 / (sqrt(3) h^2) dA                                                        (1)

of them. `scattered` walks the pixels of the spacing raster along Hilbert's curve and drops a centre whenever the integral
(1) has grown by one: every stretch of the curve, and so every compact area, gets its share. `halved` makes four times as
many out of few: the centres and the midpoints of their Delaunay edges, which keeps regular patterns regular.
"""

from __future__ import annotations

import numpy as np

from swe.mesh.delaunay import plane_triangles
from swe.mesh.order import hilbert_index
from swe.mesh.spacing import SpacingField

CELL = np.sqrt(3) / 2
"""Area of a regular hexagon whose neighbours are at distance 1."""

SHAKE = 1e-3
"""In spacings: midpoints are moved at random by up to this, so that no three lie on a line and no four on a circle."""


def expected(field: SpacingField, wanted: np.ndarray) -> float:
    """Return the number of centres (1) in the pixels (ny, nx) bool that are wanted. Not collective."""
    return float((wanted / field.values**2).sum() * field.raster.pixel**2 / CELL)


def scattered(field: SpacingField, wanted: np.ndarray, factor: float, seed: int) -> np.ndarray:
    """Return centres (n, 2) for `factor` times the spacing in the wanted pixels; the same seed gives the same. Not collective."""
    rows, columns = np.nonzero(wanted)
    order = np.argsort(hilbert_index(np.column_stack([columns, rows]), int(max(wanted.shape)).bit_length()))
    rows, columns = rows[order], columns[order]
    total = np.cumsum(field.raster.pixel**2 / (CELL * (factor * field.values[rows, columns]) ** 2))
    chosen = np.searchsorted(total, np.arange(0.5, total[-1]))
    shift = np.random.default_rng(seed).uniform(-0.5, 0.5, (len(chosen), 2))
    corner = np.array([field.raster.west, field.raster.south])
    return corner + field.raster.pixel * (np.column_stack([columns[chosen], rows[chosen]]) + shift)


def halved(centres: np.ndarray, spacing: np.ndarray, seed: int) -> np.ndarray:
    """Return the centres and, almost, the midpoints of their Delaunay edges; the same seed gives the same. Not collective.

    spacing   (n,) m at the centres; edges longer than twice of it bridge land without centres and are not halved
    """
    corners = plane_triangles(centres).points
    ends = np.vstack([corners[:, [0, 1]], corners[:, [1, 2]], corners[:, [2, 0]]])
    first, second = np.unique(np.sort(ends, axis=1), axis=0).T
    longest = spacing[first] + spacing[second]
    short = np.hypot(*(centres[first] - centres[second]).T) <= longest
    shake = np.random.default_rng(seed).uniform(-SHAKE, SHAKE, (np.count_nonzero(short), 2)) * longest[short, None] / 4
    return np.vstack([centres, (centres[first] + centres[second])[short] / 2 + shake])
