"""Meshes of the checks: channels periodic along x, a plane of irregular faces, a fitted disc; and the frequency of a record."""

from functools import cache

import numpy as np
from scipy.optimize import minimize_scalar

from swe.mesh.lattice import ROW
from swe.mesh.lloyd import lloyd_plane
from swe.mesh.topology import Mesh, with_depth
from swe.mesh.voronoi import plane_mesh

TURN = 1e-3
"""Of a spacing: without it the centres on either side of a straight coast would lie four on one circle."""


def zigzag_channel(nx: int, ny: int, spacing: float, depth: float) -> Mesh:
    """Regular hexagons, ny rows (even) along x, periodic along x, land beyond. Mean lines of the coasts: y = 0 and ny rows."""
    shift = (np.arange(ny + 4) % 2) / 2
    return _channel(nx, ny, spacing, depth, shift)


def straight_channel(nx: int, ny: int, spacing: float, depth: float) -> Mesh:
    """The same rows between straight coasts on y = 0 and ny rows: the rows of land beyond mirror those of the water."""
    shift = np.concatenate([np.arange(ny) % 2 / 2, [0.5 + TURN, 0.0, 0.5, TURN]])
    return _channel(nx, ny, spacing, depth, shift)


def _channel(nx: int, ny: int, spacing: float, depth: float, shift: np.ndarray) -> Mesh:
    i, j = np.meshgrid(np.arange(nx), np.arange(ny + 4))
    points = np.column_stack([((i + shift[j]) * spacing).ravel(), ((j + 0.5) * ROW * spacing).ravel()])
    mesh = plane_mesh(points, (j < ny).ravel(), (nx * spacing, (ny + 4) * ROW * spacing))
    return with_depth(mesh, np.full(mesh.n_faces, depth))


def irregular_plane(lx: float, ly: float, count: int, sweeps: int, depth: float) -> Mesh:
    """A doubly periodic plane of `count` irregular faces, evened out by some sweeps."""
    points = np.random.default_rng(5).random((count, 2)) * (lx, ly)
    for _ in range(sweeps):
        points = lloyd_plane(points, np.zeros(count, dtype=bool), period=(lx, ly))
    mesh = plane_mesh(points, np.ones(count, dtype=bool), (lx, ly))
    return with_depth(mesh, np.full(count, depth))


@cache
def disc(radius: float, rings: int, depth: float) -> Mesh:
    """A round basin about the origin whose coast is a polygon of edges that touch the circle; spacing radius / rings.

    Two rings of points on either side of the circle mirror each other, so that the edges between them touch it (but for a small
    turn, without which four points would lie on one circle); the points inside them are evened out.
    """
    spacing = radius / rings
    count = round(2 * np.pi * radius / spacing)
    angle = 2 * np.pi * np.arange(count) / count
    circles = [
        (radius + (k + 0.5) * spacing) * np.column_stack([np.cos(angle + shift), np.sin(angle + shift)])
        for k, shift in ((-2, np.pi / count), (-1, 0.0), (0, 0.05 / rings), (1, np.pi / count))
    ]
    i, j = np.meshgrid(np.arange(-rings - 2, rings + 3), np.arange(-rings - 3, rings + 4))
    x, y = (i + (j % 2) / 2) * spacing + 0.013 * spacing, j * ROW * spacing
    free = np.column_stack([x.ravel(), y.ravel()])
    free = free[np.hypot(*free.T) < radius - 2.2 * spacing]
    points = np.concatenate([free, *circles])
    fixed = np.arange(len(points)) >= len(free)
    for _ in range(60):
        points = lloyd_plane(points, fixed)
    mesh = plane_mesh(points, np.hypot(*points.T) < radius)
    return with_depth(mesh, np.full(mesh.n_faces, depth))


def frequency(times: np.ndarray, record: np.ndarray, near: float) -> float:
    """Return the frequency, rad s-1, of the one cosine and constant that fit a record best, within a tenth of `near`."""

    def misfit(omega):
        basis = np.column_stack([np.cos(omega * times), np.sin(omega * times), np.ones_like(times)])
        return np.sum((record - basis @ np.linalg.lstsq(basis, record)[0]) ** 2)

    return minimize_scalar(misfit, bounds=(0.9 * near, 1.1 * near), method="bounded", options={"xatol": 1e-7 * near}).x
