"""Lattices of hexagons and of the bisected icosahedron.

    periodic   nx cells in each of ny rows, points at ( (i + (j mod 2)/2) s, j s sqrt(3)/2 ): regular hexagons of area sqrt(3)/2 s^2,
               l = s/sqrt(3), d = s
    in a rectangle, with coast all round (`hexagons_in`)
    in a polygon, with a coast of whole hexagons (`hexagons_within`): a staircase, so its error is of first order
"""

from __future__ import annotations

import numpy as np

from swe.errors import MeshError
from swe.mesh.topology import Mesh
from swe.mesh.voronoi import plane_mesh

ROW = np.sqrt(3) / 2
"""Distance between rows of a regular lattice over its spacing."""


def periodic_hexagons(nx: int, ny: int, spacing: float) -> Mesh:
    """Return nx times ny regular hexagons on a doubly periodic plane; ny even, spacing in m. Not collective.

    Face j nx + i is cell i of row j. The period is (nx s, ny s sqrt(3)/2).
    """
    if nx < 3 or ny < 4 or ny % 2:
        raise MeshError(f"periodic hexagons: {nx} x {ny} cells; needed are nx >= 3 and an even ny >= 4")
    i, j = np.meshgrid(np.arange(nx), np.arange(ny))
    x, y = (i + (j % 2) / 2) * spacing, j * ROW * spacing
    period = (nx * spacing, ny * ROW * spacing)
    return plane_mesh(np.column_stack([x.ravel(), y.ravel()]), np.ones(x.size, dtype=bool), period)


def hexagons_in(lx: float, ly: float, spacing: float) -> Mesh:
    """Return a lattice of hexagons that fills the rectangle 0 <= x <= lx, 0 <= y <= ly (m), coast all round. Not collective.

    Rows run along x, every row has the same number of cells, every other row is shifted by half a cell:

        s = lx / nx,  nx = round(lx / spacing);     row height r = ly / ny,  ny = round(ly / (s sqrt(3)/2))

    so every cell has the area s r and the water has exactly the area lx ly. Unless r = s sqrt(3)/2 the lattice is
    stretched in y, by at most half a row over the whole height; cells stay equal and centred on their points.
    The coasts are as straight as hexagons allow: the west and east ones step by s/2 from row to row (1/4 s either side of
    x = 0 and x = lx), the south and north ones zigzag (by r/6 either side of y = 0 and y = ly);
    x = 0, lx and y = 0, ly are their mean lines, so lx and ly are the effective lengths for standing waves.
    For exactly regular hexagons give ly = ny s sqrt(3)/2. Face j nx + i is cell i of row j.
    """
    nx = round(lx / spacing)
    ny = round(ly / (lx / max(nx, 1) * ROW))
    if nx < 2 or ny < 2:
        raise MeshError(f"rectangle {lx:g} m x {ly:g} m at a spacing of {spacing:g} m has {nx} x {ny} cells; needed are 2 x 2")
    i, j = np.meshgrid(np.arange(-2, nx + 2), np.arange(-2, ny + 2))
    x = (i + 0.25 + (j % 2) / 2) * lx / nx
    y = (j + 0.5) * ly / ny
    wet = (i >= 0) & (i < nx) & (j >= 0) & (j < ny)
    return plane_mesh(np.column_stack([x.ravel(), y.ravel()]), wet.ravel())
