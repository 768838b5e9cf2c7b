"""Delaunay triangulations of points on a plane, a doubly periodic plane, and a sphere.

    plane      the planar triangulation
    periodic   the planar triangulation of the points and of their images in a margin of width w round the period; one
               triangle is kept of each class of images. A triangle whose circle has radius r depends on points within
               2 r of its corners, so the answer is exact when w >= 2 r for all triangles kept: checked, and the margin
               widened to a full period if need be.
    sphere     points within a cap: stereographic projection about its middle, which keeps circles, then the planar
               triangulation: its accuracy is relative to the size of the basin, not of the planet.
               Points all round: the convex hull in space, whose facets are the spherical Delaunay triangles. A projection
               would have to send one point to infinity and make small triangles there from numbers without digits.
               Facets that have the centre of the sphere outside are dropped: their circle is larger than a hemisphere,
               so the points leave that side open, as a plane is open beyond its outermost points.

Triangles run counter-clockwise (seen from outside).
Sources: Brown 1979, Inf. Process. Lett. 9, 223 (hulls and Voronoi diagrams; from memory); Barber, Dobkin & Huhdanpaa 1996,
ACM Trans. Math. Softw. 22, 469 (the algorithm behind scipy.spatial).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.spatial import ConvexHull, Delaunay, QhullError

from swe.errors import MeshError
from swe.mesh.plane import PlaneGeometry
from swe.mesh.sphere import dot, stereographic

CAP = 75.0
"""Largest angle (degrees) from their middle of points that are projected; beyond it the hull is used. Arbitrary: at this
angle the projection stretches lengths by 1.6."""

MARGIN = 5.0
"""First width of the periodic margin in mean spacings; a first guess only, the result is checked."""


@dataclass(frozen=True, eq=False)
class Triangles:
    """points (nt, 3) index of the corners, counter-clockwise; corners (nt, 3, 3) their positions, m, in one frame."""

    points: np.ndarray
    corners: np.ndarray


def plane_triangles(points: np.ndarray) -> Triangles:
    """Return the Delaunay triangles of points (n, 2) in m. Not collective."""
    points = checked(points, 2)
    corners = _planar(points, np.arange(len(points)))
    return Triangles(corners, _raised(points)[corners])


def periodic_triangles(points: np.ndarray, period: tuple[float, float]) -> Triangles:
    """Return the Delaunay triangles of points (n, 2), 0 <= x < Lx, 0 <= y < Ly, on the doubly periodic plane. Not collective.

    Each triangle lies where its corner of smallest index is one of the given points.
    """
    points = checked(points, 2)
    sides = np.array(period, dtype=float)
    margin = MARGIN * np.sqrt(sides.prod() / len(points))
    for width in (margin, sides.max()):
        width = np.minimum(width, sides)
        images, base, home = _images(points, sides, width)
        corners = _planar(images, base)
        smallest = np.take_along_axis(corners, base[corners].argmin(axis=1)[:, None], axis=1)[:, 0]
        kept = corners[home[smallest]]
        triangles = Triangles(base[kept], _raised(images)[kept])
        reach = 2 * _circumradius(triangles).max(initial=0.0)
        if reach <= width.min():
            return triangles
    raise MeshError(
        f"periodic mesh: the largest empty circle has a diameter of {reach:.6g} m, allowed is the shorter period "
        f"{sides.min():.6g} m: give more points or a larger period"
    )


def wrapped(points: np.ndarray, period: tuple[float, float]) -> np.ndarray:
    """Return points (n, 2) moved by whole periods into 0 <= x < Lx, 0 <= y < Ly. Not collective."""
    points = np.mod(points, period)
    return np.where(points < period, points, 0.0)  # mod of a tiny negative number is the period itself


def sphere_triangles(xyz: np.ndarray, radius: float) -> Triangles:
    """Return the spherical Delaunay triangles of points (n, 3) of any length; radius in m. Not collective."""
    xyz = checked(xyz, 3)
    length = np.linalg.norm(xyz, axis=1)
    if not length.min() > 0:
        raise MeshError(f"point {length.argmin()} lies at the centre of the sphere: give positions on it")
    xyz = xyz / length[:, None]
    middle = xyz.mean(axis=0)
    if np.linalg.norm(middle) > 0 and (xyz @ middle).min() >= np.cos(np.radians(CAP)) * np.linalg.norm(middle):
        points = _planar(stereographic(xyz), np.arange(len(xyz)))
    else:
        points = _outward(_hull(xyz), xyz)
    return Triangles(points, radius * xyz[points])


def checked(points: np.ndarray, columns: int) -> np.ndarray:
    """Return the points as a float array; raise MeshError unless (n, columns), n >= 4, finite. Not collective."""
    points = np.asarray(points, dtype=float)
    if points.ndim != 2 or points.shape[1] != columns or len(points) < 4:
        raise MeshError(f"points have shape {points.shape}; needed is (n, {columns}) with n >= 4")
    bad = ~np.isfinite(points).all(axis=1)
    if bad.any():
        raise MeshError(f"point {bad.argmax()} is {points[bad.argmax()]}: positions must be finite numbers")
    return points


def _planar(points: np.ndarray, names: np.ndarray) -> np.ndarray:
    """Counter-clockwise corners of the Delaunay triangles of planar points, moved to their middle to keep digits.

    names: what to call each point in a message.
    """
    try:
        found = Delaunay(points - points.mean(axis=0))
    except QhullError as problem:
        raise MeshError(f"the points have no triangulation ({_first_line(problem)}): are they all on one line?") from problem
    _refuse_doubles(names[found.coplanar[:, [0, 2]]])
    corners = found.simplices.astype(np.int64)
    a, b, c = (points[corners[:, k]] for k in range(3))
    turn = (b - a)[:, 0] * (c - a)[:, 1] - (b - a)[:, 1] * (c - a)[:, 0]
    corners[turn < 0] = corners[turn < 0][:, ::-1]
    return corners


def _hull(xyz: np.ndarray) -> np.ndarray:
    try:
        hull = ConvexHull(xyz)
    except QhullError as problem:
        raise MeshError(f"the points have no hull ({_first_line(problem)}): are they all on one circle?") from problem
    missing = np.setdiff1d(np.arange(len(xyz)), hull.vertices)
    if missing.size:
        raise MeshError(f"point {missing[0]} coincides with another to round-off: remove one of the two")
    return hull.simplices.astype(np.int64)


def _outward(corners: np.ndarray, xyz: np.ndarray) -> np.ndarray:
    """Hull facets counter-clockwise seen from outside the hull, without those that have the origin outside."""
    a, b, c = (xyz[corners[:, k]] for k in range(3))
    pole = np.cross(b - a, c - a)
    outside = dot(pole, a - xyz.mean(axis=0)) < 0
    corners[outside] = corners[outside][:, ::-1]
    return corners[np.where(outside, -1, 1) * dot(pole, a) > 0]


def _refuse_doubles(pairs: np.ndarray) -> None:
    if len(pairs):
        raise MeshError(f"points {pairs[0, 0]} and {pairs[0, 1]} coincide to round-off: remove one of the two")


def _first_line(problem: Exception) -> str:
    return str(problem).splitlines()[0].strip()


def _raised(points: np.ndarray) -> np.ndarray:
    return np.column_stack([points, np.zeros(len(points))])


def _images(points: np.ndarray, sides: np.ndarray, width: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Points with their images up to `width` outside the period, their indices, and which of them are the points."""
    shifts = np.array([(i, j) for i in (0, -1, 1) for j in (0, -1, 1)], dtype=float)
    images = (points[None] + shifts[:, None] * sides).reshape(-1, 2)
    near = np.all((images >= -width) & (images < sides + width), axis=1)
    index = np.tile(np.arange(len(points)), len(shifts))[near]
    home = np.repeat(~shifts.any(axis=1), len(points))[near]
    return images[near], index, home


def _circumradius(triangles: Triangles) -> np.ndarray:
    a, b, c = triangles.corners.transpose(1, 0, 2)
    plane = PlaneGeometry()
    return plane.distance(a, plane.circumcentre(a, b, c))
