"""Voronoi meshes from points: each wet point becomes a face, each dry point only shapes the cells of its neighbours.

The Delaunay triangulation joins points whose cells touch; the circumcentre of a triangle is the node where three cells
meet. Everything is read off its half-edges. Half-edge h = 3 T + k of triangle T runs from its corner k to corner k + 1
with T on the left; twin(h) is the same side seen from the neighbour on the right; prev(h) = 3 T + (k + 2) mod 3.

    edge of the mesh    a half-edge a -> b and its twin: first face a, second face b, second node T(h), first node T(twin(h)),
                        because t = k x n points to the left of n
    round a face        twin(prev(h)) is the next half-edge out of the same point, counter-clockwise: exact, whatever the angles
    kite (T, corner a)  the right triangles (a, foot, node) on both sides of the line a - node, the foot being the midpoint
                        between two points; signed, so that kites sum to the cell even where a node lies outside its triangle
    l                   signed distance foot - second node minus signed distance foot - first node, along t
    n on the sphere     (b - a)/|b - a|, the pole of the great circle on which the edge lies: exact at each of its points

Order: faces as the wet points come; inner edges by (larger face, smaller face), so that the edges among the first k faces
come first, for every k; then coast edges by face; nodes by (smallest face, next, largest), so that the nodes of the first k faces
come first.
Sources: Thuburn et al. 2009, J. Comput. Phys. 228, 8321; Ringler et al. 2010, J. Comput. Phys. 229, 3065 (geometry);
Mueller & Preparata 1978, Theor. Comput. Sci. 7, 217 (half-edges; from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from swe.errors import MeshError
from swe.mesh.delaunay import Triangles, checked, periodic_triangles, plane_triangles, sphere_triangles, wrapped
from swe.mesh.plane import Geometry, PlaneGeometry
from swe.mesh.sphere import SphereGeometry, dot, tangential, unit
from swe.mesh.topology import COAST, Mesh

NONE = np.iinfo(np.int64).max
"""Stands behind every face number when sorting."""


def plane_mesh(points: np.ndarray, wet: np.ndarray, period: tuple[float, float] | None = None) -> Mesh:
    """Return the Voronoi mesh of points on a plane. Not collective.

    points (n, 2) in m; wet (n,) bool, the cells of wet points become faces, in the order given; period (Lx, Ly) in m of
    a doubly periodic plane (points are wrapped into 0 <= x < Lx, 0 <= y < Ly), or None. The depth is 0.
    Raises MeshError where a wet cell is unbounded or the points do not determine one triangulation.
    """
    points = checked(points, 2)
    if period is None:
        triangles = plane_triangles(points)
    else:
        points = wrapped(points, period)
        triangles = periodic_triangles(points, period)
        period = (float(period[0]), float(period[1]))
    raised = np.column_stack([points, np.zeros(len(points))])
    return _assemble(triangles, raised, _wet(wet, len(points)), PlaneGeometry(), period)


def sphere_mesh(xyz: np.ndarray, wet: np.ndarray, radius: float) -> Mesh:
    """Return the Voronoi mesh of points on a sphere, a region or all of it. Not collective.

    xyz (n, 3) earth-centred directions of any length; wet (n,) bool; radius in m. The depth is 0.
    Raises MeshError where a wet cell is unbounded or the points do not determine one triangulation.
    """
    triangles = sphere_triangles(xyz, radius)
    points = radius * unit(np.asarray(xyz, dtype=float))
    return _assemble(triangles, points, _wet(wet, len(points)), SphereGeometry(float(radius)), None)


def _wet(wet: np.ndarray, count: int) -> np.ndarray:
    wet = np.asarray(wet)
    if wet.shape != (count,) or wet.dtype != bool:
        raise MeshError(f"wet has shape {wet.shape} and type {wet.dtype}; needed is ({count},) bool, one a point")
    if not wet.any():
        raise MeshError("no point is wet: a mesh needs at least one face")
    return wet


@dataclass(frozen=True, eq=False)
class _HalfEdges:
    """start, end: point indices; face_start, face_end: face indices, NONE where dry; twin: half-edge or -1. All (3 nt,)."""

    start: np.ndarray
    end: np.ndarray
    face_start: np.ndarray
    face_end: np.ndarray
    twin: np.ndarray


def _assemble(triangles: Triangles, points: np.ndarray, wet: np.ndarray, geometry: Geometry, period) -> Mesh:
    """Build the mesh: nodes, half-edges, edges, rounds of faces, then lengths and areas."""
    face_of = np.full(wet.size, NONE)
    face_of[wet] = np.arange(np.count_nonzero(wet))
    node_points, corners, node_faces = _nodes(triangles, face_of)
    half = _half_edges(node_points, face_of, points)
    edge_half, n_inner = _edges(half)
    edge_of = np.full(half.start.size, -1)
    edge_of[edge_half] = edge_of[half.twin[edge_half]] = np.arange(edge_half.size)
    face_edges, face_nodes = _rounds(half, edge_of, np.count_nonzero(wet), points[wet])
    node_xyz = geometry.circumcentre(corners[:, 0], corners[:, 1], corners[:, 2])
    kites = np.where(node_faces < NONE, _kites(geometry, corners, node_xyz), 0.0)
    held = node_faces < NONE
    edge_faces = np.column_stack([half.face_start[edge_half], half.face_end[edge_half]])
    edge_nodes = np.column_stack([half.twin[edge_half] // 3, edge_half // 3])
    return Mesh(
        radius=geometry.radius,
        period=period,
        face_xyz=points[wet],
        node_xyz=_wrapped(node_xyz, period),
        **_edge_geometry(geometry, corners, node_xyz, edge_half, half.twin[edge_half], period),
        face_area=np.bincount(node_faces[held], kites[held], minlength=np.count_nonzero(wet)),
        node_area=kites.sum(axis=1),
        kite_area=kites,
        edge_faces=_index(edge_faces),
        edge_nodes=_index(edge_nodes),
        face_edges=_index(face_edges),
        face_nodes=_index(face_nodes),
        node_faces=_index(node_faces),
        node_coast=~held.all(axis=1),
        n_inner=n_inner,
        border_kind=np.full(edge_half.size - n_inner, COAST, dtype=np.int8),
        depth=np.zeros(np.count_nonzero(wet)),
        face_outer=np.zeros(np.count_nonzero(wet), dtype=bool),
        face_id=_index(np.arange(np.count_nonzero(wet))),
        edge_id=_index(np.arange(edge_half.size)),
        node_id=_index(np.arange(len(node_xyz))),
    )


def _index(numbers: np.ndarray) -> np.ndarray:
    return np.where(numbers == NONE, -1, numbers).astype(np.int32)


def _nodes(triangles: Triangles, face_of: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Points, corners and faces (NONE where dry) of the triangles with a wet corner, in the order of the nodes.

    Each triangle is turned so that its smallest face comes first: the order then depends on the points alone.
    """
    faces = face_of[triangles.points]
    keep = np.flatnonzero((faces < NONE).any(axis=1))
    turn = (faces[keep].argmin(axis=1)[:, None] + np.arange(3)) % 3
    points, corners = triangles.points[keep[:, None], turn], triangles.corners[keep[:, None], turn]
    faces = face_of[points]
    ranked = np.sort(faces, axis=1)
    order = np.lexsort((points[:, 2], points[:, 1], ranked[:, 2], ranked[:, 1], ranked[:, 0]))
    return points[order], corners[order], faces[order]


def _half_edges(node_points: np.ndarray, face_of: np.ndarray, points: np.ndarray) -> _HalfEdges:
    start, end = node_points.ravel(), np.roll(node_points, -1, axis=1).ravel()
    key, mirror = start * len(face_of) + end, end * len(face_of) + start
    order = np.argsort(key, kind="stable")
    ranked = key[order]
    if np.any(ranked[1:] == ranked[:-1]) or np.any(start == end):
        raise MeshError(
            "two cells touch along more than one edge: more than three points lie on one empty circle, or a period holds "
            "fewer than three cells; move the points a little or give more"
        )
    found = np.minimum(np.searchsorted(ranked, mirror), ranked.size - 1)
    twin = np.where(ranked[found] == mirror, order[found], -1)
    half = _HalfEdges(start, end, face_of[start], face_of[end], twin)
    open_side = (twin < 0) & ((half.face_start < NONE) | (half.face_end < NONE))
    if open_side.any():
        h = open_side.argmax()
        point = start[h] if half.face_start[h] < NONE else end[h]
        raise MeshError(
            f"the cell of wet point {point} at {np.array2string(points[point], precision=6)} is unbounded: surround the wet "
            "points with dry ones"
        )
    return half


def _edges(half: _HalfEdges) -> tuple[np.ndarray, int]:
    """One half-edge for each edge of the mesh, from its first face outwards; and the number of inner edges."""
    inner = np.flatnonzero((half.face_start < half.face_end) & (half.face_end < NONE))
    inner = inner[np.lexsort((half.face_start[inner], half.face_end[inner]))]
    coast = np.flatnonzero((half.face_start < NONE) & (half.face_end == NONE))
    coast = coast[np.lexsort((half.end[coast], half.face_start[coast]))]
    return np.concatenate([inner, coast]), inner.size


def _rounds(half: _HalfEdges, edge_of: np.ndarray, n_faces: int, centres: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Edges and nodes of each face, counter-clockwise from its edge of smallest number, NONE behind the last."""
    out = np.flatnonzero(half.face_start < NONE)
    out = out[np.lexsort((edge_of[out], half.face_start[out]))]
    count = np.bincount(half.face_start[out], minlength=n_faces)
    start = out[np.cumsum(count) - count]
    face_edges = np.full((n_faces, count.max()), NONE)
    face_nodes = np.full((n_faces, count.max()), NONE)
    here = start.copy()
    for k in range(count.max()):  # over the corners of the largest face, all faces at once
        live = np.flatnonzero(k < count)
        face_edges[live, k] = edge_of[here[live]]
        face_nodes[live, k] = half.twin[here[live]] // 3
        here[live] = half.twin[here[live] // 3 * 3 + (here[live] + 2) % 3]
    # A star of one cycle is back at its start after `count` steps and has not been there before.
    seen = np.sort(face_edges, axis=1)
    torn = (here != start) | np.any((seen[:, 1:] == seen[:, :-1]) & (seen[:, 1:] < NONE), axis=1)
    if torn.any():
        face = torn.argmax()
        raise MeshError(
            f"the triangles round face {face} at {np.array2string(centres[face], precision=6)} do not close: its "
            "neighbours coincide or lie on one circle; move them a little"
        )
    return face_edges, face_nodes


def _kites(geometry: Geometry, corners: np.ndarray, node: np.ndarray) -> np.ndarray:
    """Signed kite of each corner, (nn, 3): the right triangles (corner, foot ahead, node) and (corner, node, foot behind)."""
    after = np.roll(corners, -1, axis=1)
    foot = geometry.midpoint(corners, after)
    middle = np.broadcast_to(node[:, None], corners.shape)
    ahead = geometry.area(corners, foot, middle)
    behind = geometry.area(corners, middle, np.roll(foot, 1, axis=1))
    return ahead + behind


def _edge_geometry(geometry: Geometry, corners, node_xyz, half: np.ndarray, twin: np.ndarray, period) -> dict[str, np.ndarray]:
    """The edge arrays of `Mesh`. On a periodic plane the triangle of the twin is moved to where that of the half-edge lies."""
    first, second = corners[half // 3, half % 3], corners[half // 3, (half + 1) % 3]
    shift = first - corners[twin // 3, (twin + 1) % 3] if period else 0.0
    left, right = node_xyz[half // 3], node_xyz[twin // 3] + shift
    foot = geometry.midpoint(first, second)
    normal = unit(tangential(second - first, geometry.up(foot)))  # the last digit of |second| must not tilt it
    along = np.cross(geometry.up(foot), normal)
    middle = geometry.midpoint(right, left)
    return {
        "edge_xyz": _wrapped(middle, period),
        "edge_normal": normal,
        "edge_tangent": unit(np.cross(geometry.up(middle), normal)),
        "edge_length": _signed(geometry, foot, left, along) - _signed(geometry, foot, right, along),
        "edge_distance": geometry.distance(first, second),
    }


def _signed(geometry: Geometry, start: np.ndarray, end: np.ndarray, along: np.ndarray) -> np.ndarray:
    return np.copysign(geometry.distance(start, end), dot(end - start, along))


def _wrapped(xyz: np.ndarray, period) -> np.ndarray:
    return xyz if period is None else np.mod(xyz, np.array([*period, 1.0]))
