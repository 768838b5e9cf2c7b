"""Lattices of hexagons and of the bisected icosahedron.

    periodic   nx cells in each of ny rows, points at ( (i + (j mod 2)/2) s, j s sqrt(3)/2 ): regular hexagons of
               area sqrt(3)/2 s^2, l = s/sqrt(3), d = s
    in a rectangle, with coast all round (`hexagons_in`)
    in a polygon, with a coast of whole hexagons (`hexagons_within`): a staircase, so its error is of first order
    on the whole sphere, from the bisected icosahedron (`icosahedral`)

Hexagons of the plane are numbered row by row, which tests can count; the sphere's along a space-filling curve.
"""

from __future__ import annotations

import numpy as np
from shapely import contains_xy

from swe.errors import MeshError
from swe.mesh.lloyd import lloyd_sphere
from swe.mesh.order import curve_order
from swe.mesh.sphere import unit
from swe.mesh.topology import Mesh
from swe.mesh.voronoi import plane_mesh, sphere_mesh

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


def hexagons_within(polygon, spacing: float) -> Mesh:
    """Return the regular hexagons whose centres lie in a shapely polygon (m), coast along their sides. Not collective.

    The coast is a staircase of whole hexagons: lengths and areas of the basin are met to first order in the spacing.
    """
    west, south, east, north = polygon.bounds
    row = ROW * spacing
    i, j = np.meshgrid(np.arange(-2, np.ceil((east - west) / spacing) + 3), np.arange(-2, np.ceil((north - south) / row) + 3))
    x, y = (west + (i + (j % 2) / 2) * spacing).ravel(), (south + j * row).ravel()
    wet = contains_xy(polygon, x, y)
    if not wet.any():
        raise MeshError(f"no hexagon of spacing {spacing:g} m has its centre in the polygon: give a smaller spacing")
    return plane_mesh(np.column_stack([x, y]), wet)


def icosahedral(level: int, radius: float, sweeps: int) -> Mesh:
    """Return a global mesh of 10 4^level + 2 faces, 12 of them pentagons, the others hexagons. Not collective.

    Each side of the icosahedron is bisected `level` times on the sphere, then `sweeps` Lloyd sweeps even out the cells.
    Faces run along a space-filling curve. radius in m. Source: Heikes & Randall 1995, Mon. Weather Rev. 123, 1862 (from
    memory) for the grid; lloyd.py for the sweeps.
    """
    if level < 0 or sweeps < 0:
        raise MeshError(f"icosahedral mesh: level {level} and {sweeps} sweeps; both must be 0 or more")
    points = bisected_icosahedron(level)
    free = np.zeros(len(points), dtype=bool)
    for _ in range(sweeps):
        points = lloyd_sphere(points, free)
    points = points[curve_order(points)]
    return sphere_mesh(points, np.ones(len(points), dtype=bool), radius)


def bisected_icosahedron(level: int) -> np.ndarray:
    """Return unit vectors (10 4^level + 2, 3): corners of the icosahedron with its sides bisected level times. Not collective."""
    latitude = np.arctan(0.5)
    turn = np.arange(5) * 2 * np.pi / 5
    ring = np.column_stack([np.cos(turn), np.sin(turn), np.full(5, np.tan(latitude))]) * np.cos(latitude)
    half = np.pi / 5
    turned = ring @ np.array([[np.cos(half), np.sin(half), 0], [-np.sin(half), np.cos(half), 0], [0, 0, -1]])
    points = np.vstack([[0.0, 0.0, 1.0], ring, turned, [0.0, 0.0, -1.0]])
    a, b = np.arange(5), (np.arange(5) + 1) % 5
    top = np.column_stack([np.zeros(5, dtype=int), 1 + a, 1 + b])
    middle = np.vstack([np.column_stack([1 + a, 6 + a, 1 + b]), np.column_stack([6 + a, 6 + b, 1 + b])])
    triangles = np.vstack([top, middle, np.column_stack([np.full(5, 11), 6 + b, 6 + a])])
    for _ in range(level):
        points, triangles = _bisected(points, triangles)
    return points


def _bisected(points: np.ndarray, triangles: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Put a new point on the middle of each side and replace each triangle by four."""
    sides = np.sort(np.stack([triangles, np.roll(triangles, -1, axis=1)], axis=-1).reshape(-1, 2), axis=1)
    unique, inverse = np.unique(sides, axis=0, return_inverse=True)
    middle = len(points) + inverse.reshape(-1, 3)  # of sides 01, 12, 20
    (a, b, c), (p, q, r) = triangles.T, middle.T
    points = np.vstack([points, unit(points[unique[:, 0]] + points[unique[:, 1]])])
    return points, np.vstack([np.column_stack(t) for t in ((a, p, r), (p, b, q), (r, q, c), (p, q, r))])
