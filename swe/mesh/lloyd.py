"""Lloyd's sweep: move each point to the centroid of its Voronoi cell, weighted by a density.

    x_i  <-  integral over V_i of rho x dA / integral over V_i of rho dA

Repeated, it tends to a centroidal Voronoi tessellation: cells near regular hexagons, of spacing h ~ rho^(-1/4) in two
dimensions; so for a wanted spacing h give rho = h^(-4). A cell is the sum of the right triangles (point, foot, node),
signed as in voronoi.py; rho is given at the points and taken linear on the triangles (foot: mean of its two points, node: mean of
its three), and a linear rho is integrated exactly on each:

    integral rho dA = A (rho_1 + rho_2 + rho_3)/3,   integral rho x dA = A/12 ( sum rho sum x + sum rho_k x_k )

Open cells do not move, and no step is longer than the mean distance to the neighbours: a cell on the rim that is closed
only far outside the points must not fling its point away. Surround free points by two rows of fixed ones, so that no
such cell is free.

On the sphere A is the spherical area and x the chord, then the point is put back on the sphere: exact to second order in
the spacing, and a regular cell keeps its centre.
Sources: Lloyd 1982, IEEE Trans. Inf. Theory 28, 129; Du, Faber & Gunzburger 1999, SIAM Rev. 41, 637; Du, Gunzburger & Ju
2003, Comput. Methods Appl. Mech. Eng. 192, 3933 (on surfaces). From memory.
"""

from __future__ import annotations

import numpy as np

from swe.errors import MeshError
from swe.mesh.delaunay import Triangles, checked, periodic_triangles, plane_triangles, sphere_triangles, wrapped
from swe.mesh.plane import Geometry, PlaneGeometry
from swe.mesh.sphere import SphereGeometry, unit


def lloyd_plane(
    points: np.ndarray, fixed: np.ndarray, density: np.ndarray | None = None, period: tuple[float, float] | None = None
) -> np.ndarray:
    """Return the points (n, 2), m, after one sweep on a plane. Not collective.

    fixed (n,) bool: points that stay; so do points whose cell is unbounded (those on the hull). density (n,) > 0 at the
    points, in any unit, or None for a constant one. period (Lx, Ly) in m of a doubly periodic plane, into which the points
    are wrapped, or None.
    """
    points = checked(points, 2)
    if period is None:
        triangles = plane_triangles(points)
    else:
        points = wrapped(points, period)
        triangles = periodic_triangles(points, period)
    step, free = _steps(triangles, len(points), density, PlaneGeometry())
    free &= ~_fixed(fixed, len(points))
    moved = np.where(free[:, None], points + step[:, :2], points)
    return moved if period is None else wrapped(moved, period)


def lloyd_sphere(xyz: np.ndarray, fixed: np.ndarray, density: np.ndarray | None = None) -> np.ndarray:
    """Return the points as unit vectors (n, 3) after one sweep on the sphere, a region or all of it. Not collective.

    xyz (n, 3) directions of any length; fixed and density as in `lloyd_plane`.
    """
    xyz = unit(checked(xyz, 3))
    step, free = _steps(sphere_triangles(xyz, 1.0), len(xyz), density, SphereGeometry(1.0))
    free &= ~_fixed(fixed, len(xyz))
    return np.where(free[:, None], unit(xyz + step), xyz)


def _fixed(fixed: np.ndarray, count: int) -> np.ndarray:
    fixed = np.asarray(fixed)
    if fixed.shape != (count,) or fixed.dtype != bool:
        raise MeshError(f"fixed has shape {fixed.shape} and type {fixed.dtype}; needed is ({count},) bool, one a point")
    return fixed


def _steps(triangles: Triangles, count: int, density: np.ndarray | None, geometry: Geometry) -> tuple[np.ndarray, np.ndarray]:
    """Centroid minus point, (n, 3), no longer than the way to the neighbours; and which points may take it."""
    mass, moment = _moments(triangles, count, density, geometry)
    free = (mass > 0) & ~_hull(triangles.points, count)
    step = np.zeros_like(moment)
    step[free] = moment[free] / mass[free, None]
    length = np.linalg.norm(step, axis=1)
    longest = _neighbour_distance(triangles, count, geometry)
    return step * np.minimum(1.0, longest / np.where(length > 0, length, 1.0))[:, None], free


def _neighbour_distance(triangles: Triangles, count: int, geometry: Geometry) -> np.ndarray:
    """Mean distance to the Delaunay neighbours, (n,); inner sides count twice alike. 0 for a point of no triangle."""
    side = geometry.distance(triangles.corners, np.roll(triangles.corners, -1, axis=1))
    ends = np.concatenate([triangles.points.ravel(), np.roll(triangles.points, -1, axis=1).ravel()])
    total = np.bincount(ends, np.tile(side.ravel(), 2), minlength=count)
    return total / np.maximum(np.bincount(ends, minlength=count), 1)


def _moments(triangles: Triangles, count: int, density: np.ndarray | None, geometry: Geometry) -> tuple[np.ndarray, np.ndarray]:
    """Mass (n,) of each cell, and its first moment (n, 3) about its point."""
    corners, points = triangles.corners, triangles.points
    node = np.broadcast_to(geometry.circumcentre(*corners.transpose(1, 0, 2))[:, None], corners.shape)
    ahead = geometry.midpoint(corners, np.roll(corners, -1, axis=1))
    behind = np.roll(ahead, 1, axis=1)
    at_corner = np.ones(points.shape) if density is None else _density(density, count)[points]
    at_node = np.broadcast_to(at_corner.mean(axis=1, keepdims=True), points.shape)
    at_ahead = (at_corner + np.roll(at_corner, -1, axis=1)) / 2
    mass, moment = np.zeros(count), np.zeros((count, 3))
    for foot, at_foot, area in (
        (ahead, at_ahead, geometry.area(corners, ahead, node)),
        (behind, np.roll(at_ahead, 1, axis=1), geometry.area(corners, node, behind)),
    ):
        total = at_corner + at_foot + at_node
        mass += np.bincount(points.ravel(), (area * total / 3).ravel(), minlength=count)
        for axis in range(3):
            a, b = (foot - corners)[..., axis], (node - corners)[..., axis]
            part = area / 12 * (total * (a + b) + at_foot * a + at_node * b)
            moment[:, axis] += np.bincount(points.ravel(), part.ravel(), minlength=count)
    return mass, moment


def _density(density: np.ndarray, count: int) -> np.ndarray:
    density = np.asarray(density, dtype=float)
    if density.shape != (count,) or not (np.isfinite(density) & (density > 0)).all():
        raise MeshError(f"density has shape {density.shape}; needed is ({count},), finite and positive at every point")
    return density


def _hull(points: np.ndarray, count: int) -> np.ndarray:
    """Points on a side that only one triangle has."""
    start, end = points.ravel(), np.roll(points, -1, axis=1).ravel()
    key = np.minimum(start, end) * count + np.maximum(start, end)
    order = np.argsort(key, kind="stable")
    ranked = key[order]
    same = np.concatenate([[False], ranked[1:] == ranked[:-1], [False]])
    single = order[~same[1:] & ~same[:-1]]
    hull = np.zeros(count, dtype=bool)
    hull[start[single]] = hull[end[single]] = True
    return hull
