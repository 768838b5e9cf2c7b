"""What every mesh must satisfy before anything is computed on it.

    shapes, index ranges      arrays of the sizes topology.py gives; inner edges have two faces, border edges one
    finite, positive          l, d, areas, kites; l not vanishing against d
    rounds                    edge k of a face joins its nodes k and k + 1, counter-clockwise, with n pointing out of the
                              first face; every face of an edge and of a node knows it
    directions                |n| = |t| = 1, t = k x n; n along the line of the centres and across the line of the nodes
    lengths                   d between the centres, l between the nodes
    areas                     kites sum to the face, kites sum to the dual cell, both sums are the water; the polygon of the
                              nodes has the area of the face
    Euler                     V - E + F = 2 C - B - 2 G: C separate waters, B closed borders, G = 1 only on a periodic plane

The last holds with whole numbers: every node joins three cells, so borders are closed lines that never touch.
An open circumcentre outside its triangle makes a negative kite or l; the operators would then feed energy (Ringler et al.
2010, J. Comput. Phys. 229, 3065, ask for positive weights): such a mesh is refused, with the face where it is worst.
"""

from __future__ import annotations

import numpy as np
from scipy import sparse
from scipy.sparse.csgraph import connected_components

from swe.errors import MeshError
from swe.mesh.plane import Geometry, PlaneGeometry
from swe.mesh.sphere import SphereGeometry, dot
from swe.mesh.topology import COAST, CUT, Mesh, displacement

ROUND_OFF = 1e-10
"""Largest relative error of identities that hold exactly but for round-off: a few hundred operations of 1e-16, enlarged by
up to 1e3 where a triangle is thin; a real defect is never below 1e-6."""

PLACE = 1e-13
"""Largest absolute error of a position over the extent of the mesh: positions carry 1e-16 of the extent, and a node of thin
triangles up to 1e3 times that. Divided by d or l it is what small cells far from the origin are allowed more."""

SHORTEST = 1e-6
"""Smallest l over d. Four points on one circle make an edge of length zero (1e-16 after round-off): its two nodes are
one, and its potential vorticity and directions mean nothing. Meshes that are merely poor stay above 1e-3."""

TURNED = "the mesh was damaged after it was built: build or read it again"
SMOOTHER = "give more sweeps, a smoother spacing, or a finer coast there"


def check_invariants(mesh: Mesh) -> None:
    """Raise MeshError at the first invariant that a mesh, whole or restricted, breaks. Not collective.

    The message names the face where it is worst, its position, the value found, the value allowed, and what to do.
    """
    _check_indices(mesh)
    _check_positive(mesh)
    _check_rounds(mesh)
    _check_directions(mesh)
    _check_lengths(mesh)
    _check_areas(mesh)
    _check_euler(mesh)


def place(mesh: Mesh, face: int) -> str:
    """Return the position of a face as a reader of charts wants it: m, or degrees on the sphere. Not collective."""
    x, y, z = mesh.face_xyz[face]
    if not mesh.spherical:
        return f"x {x:.6g} m, y {y:.6g} m"
    return f"longitude {np.degrees(np.arctan2(y, x)):.5f}, latitude {np.degrees(np.arctan2(z, np.hypot(x, y))):.5f}"


def geometry_of(mesh: Mesh) -> Geometry:
    """Return the geometry on which a mesh lies. Not collective."""
    return SphereGeometry(mesh.radius) if mesh.spherical else PlaneGeometry()


def edge_face(mesh: Mesh) -> np.ndarray:
    """Return a face of each edge, (ne,): the first, or the one there is. Not collective."""
    return np.where(mesh.edge_faces[:, 0] >= 0, mesh.edge_faces[:, 0], mesh.edge_faces[:, 1])


def face_polygon_areas(mesh: Mesh) -> np.ndarray:
    """Return (nf, m) areas of the triangles (centre, node k, node k + 1) of each face, 0 behind the last. Not collective."""
    centre, here, after, held = fans(mesh)
    return np.where(held, geometry_of(mesh).area(centre, here, after), 0.0)


def fans(mesh: Mesh) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Return centre, node k, node k + 1 (nf, m, 3) near the face, and where they exist (nf, m). Not collective."""
    held = mesh.face_nodes >= 0
    count = held.sum(axis=1)
    follow = (np.arange(held.shape[1]) + 1) % count[:, None]
    centre = np.broadcast_to(mesh.face_xyz[:, None], (*held.shape, 3))
    here = centre + displacement(mesh, centre, mesh.node_xyz[np.where(held, mesh.face_nodes, mesh.face_nodes[:, :1])])
    return centre, here, np.take_along_axis(here, follow[..., None], axis=1), held


def _refuse(mesh: Mesh, what: str, unit: str, value, allowed, face: np.ndarray, do: str) -> None:
    """Raise when a value (k,) exceeds what is allowed (scalar or (k,)) or is not a number, naming its face (k,)."""
    value, allowed = np.broadcast_arrays(np.asarray(value, dtype=float), np.asarray(allowed, dtype=float))
    if np.all(value <= allowed):
        return
    excess = np.where(np.isnan(value), np.inf, value - allowed)
    worst = int(excess.argmax())
    _raise(mesh, what, f"{value[worst]:.6g}{unit}", f"at most {allowed[worst]:.3g}{unit}", int(face[worst]), do)


def _raise(mesh: Mesh, what: str, found: str, allowed: str, face: int, do: str) -> None:
    raise MeshError(f"mesh: face {face} ({place(mesh, face)}): {what} is {found}; allowed is {allowed}; {do}")


def _check_indices(mesh: Mesh) -> None:
    nf, ne, nn = mesh.n_faces, mesh.n_edges, mesh.n_nodes
    width = mesh.face_edges.shape[1]
    shapes = {
        "face_xyz": (nf, 3), "depth": (nf,), "face_id": (nf,), "face_edges": (nf, width), "face_nodes": (nf, width),
        "node_xyz": (nn, 3), "kite_area": (nn, 3), "node_faces": (nn, 3), "node_coast": (nn,), "node_id": (nn,),
        "edge_xyz": (ne, 3), "edge_normal": (ne, 3), "edge_tangent": (ne, 3), "edge_distance": (ne,), "edge_id": (ne,),
        "edge_faces": (ne, 2), "edge_nodes": (ne, 2), "border_kind": (ne - mesh.n_inner,),
    }  # fmt: skip
    for name, shape in shapes.items():
        if getattr(mesh, name).shape != shape:
            raise MeshError(f"mesh: {name} has shape {getattr(mesh, name).shape}; needed is {shape}; {TURNED}")
    limits = {"face_edges": (-1, ne), "face_nodes": (-1, nn), "node_faces": (-1, nf), "edge_faces": (-1, nf)}
    for name, (low, high) in {**limits, "edge_nodes": (0, nn)}.items():
        index = getattr(mesh, name)
        if index.min() < low or index.max() >= high:
            raise MeshError(f"mesh: {name} runs from {index.min()} to {index.max()}; allowed is {low} to {high - 1}; {TURNED}")
    held = mesh.edge_faces >= 0
    inner, border = held[: mesh.n_inner], held[mesh.n_inner :]
    turned = (mesh.border_kind == COAST) & ~border[:, 0]
    wrong = ~np.concatenate([inner.all(axis=1), (border.sum(axis=1) == 1) & ~turned])
    if wrong.any():
        edge = wrong.argmax()
        raise MeshError(f"mesh: edge {edge} has faces {mesh.edge_faces[edge]}, which its kind does not allow; {TURNED}")
    if not np.isin(mesh.border_kind, (COAST, CUT)).all():
        raise MeshError(f"mesh: border_kind holds {np.unique(mesh.border_kind)}; allowed are {COAST}, {CUT}; {TURNED}")


def _check_positive(mesh: Mesh) -> None:
    of_edge, of_node = edge_face(mesh), mesh.node_faces.max(axis=1)
    held = mesh.node_faces >= 0
    for what, unit, value, face in (
        ("the area", " m2", mesh.face_area, np.arange(mesh.n_faces)),
        ("the distance d across an edge", " m", mesh.edge_distance, of_edge),
        ("the dual area of a node", " m2", mesh.node_area, of_node),
        ("the area of a kite", " m2", mesh.kite_area[held], mesh.node_faces[held]),
    ):
        wrong = np.flatnonzero(~(value > 0) | ~np.isfinite(value))
        if wrong.size:
            worst = wrong[np.argmin(np.where(np.isfinite(value[wrong]), value[wrong], -np.inf))]
            _raise(mesh, what, f"{value[worst]:.6g}{unit}", "a finite number > 0", int(face[worst]), SMOOTHER)
    ratio = mesh.edge_length / mesh.edge_distance
    worst = int(np.where(np.isfinite(ratio), ratio, -np.inf).argmin())
    if not ratio[worst] >= SHORTEST:
        what = "the length of an edge over the distance across it, l/d,"
        do = "more than three points lie on one circle there: move them a little, or give more sweeps"
        _raise(mesh, what, f"{ratio[worst]:.6g}", f"at least {SHORTEST:g}", int(of_edge[worst]), do)
    for name in ("face_xyz", "node_xyz", "edge_xyz", "edge_normal", "edge_tangent", "depth"):
        if not np.isfinite(getattr(mesh, name)).all():
            raise MeshError(f"mesh: {name} holds numbers that are not finite; {TURNED}")


def _check_rounds(mesh: Mesh) -> None:
    held = mesh.face_edges >= 0
    face, slot = np.nonzero(held)
    edge = mesh.face_edges[face, slot]
    count = held.sum(axis=1)
    here, after = mesh.face_nodes[face, slot], mesh.face_nodes[face, (slot + 1) % count[face]]
    first = mesh.edge_faces[edge, 0] == face
    faces_right = first | (mesh.edge_faces[edge, 1] == face)
    start, end = mesh.edge_nodes[edge].T
    nodes_right = (np.where(first, start, end) == here) & (np.where(first, end, start) == after)
    wrong = ~(faces_right & nodes_right & np.any(mesh.node_faces[here] == face[:, None], axis=1))
    _refuse(mesh, "the number of edges out of their round", "", np.bincount(face, wrong), 0, np.arange(mesh.n_faces), TURNED)
    expected = (mesh.edge_faces >= 0).sum(axis=1)
    missing = np.abs(np.bincount(edge, minlength=mesh.n_edges) - expected)
    _refuse(mesh, "the number of faces that do not list an edge of theirs", "", missing, 0, edge_face(mesh), TURNED)
    corners = np.bincount(mesh.face_nodes[face, slot], minlength=mesh.n_nodes)
    missing = np.abs(corners - (mesh.node_faces >= 0).sum(axis=1))
    _refuse(mesh, "the number of faces that do not list a node of theirs", "", missing, 0, mesh.node_faces.max(axis=1), TURNED)
    clockwise = -np.where(held, face_polygon_areas(mesh), np.inf).min(axis=1)
    do = "its nodes must run counter-clockwise round its centre: " + TURNED
    _refuse(mesh, "minus the smallest triangle from centre to edge", " m2", clockwise, 0, np.arange(mesh.n_faces), do)


def _extent(mesh: Mesh) -> float:
    return mesh.radius if mesh.spherical else float(np.abs(mesh.face_xyz).max())


def _check_directions(mesh: Mesh) -> None:
    n, t, face = mesh.edge_normal, mesh.edge_tangent, edge_face(mesh)
    up = geometry_of(mesh).up(mesh.edge_xyz)
    for what, value in (
        ("| |n| - 1 | of an edge", np.abs(np.linalg.norm(n, axis=1) - 1)),
        ("|t - k x n| of an edge", np.linalg.norm(t - np.cross(up, n), axis=1)),
        ("n.k of an edge", np.abs(dot(n, up))),
    ):
        allowed = ROUND_OFF + PLACE * _extent(mesh) / mesh.edge_distance
        _refuse(mesh, what, "", value, allowed, face, TURNED)
    line = displacement(mesh, mesh.node_xyz[mesh.edge_nodes[:, 0]], mesh.node_xyz[mesh.edge_nodes[:, 1]])
    lean = np.abs(dot(line, n)) / mesh.edge_length
    allowed = ROUND_OFF + PLACE * _extent(mesh) / mesh.edge_length
    do = "edge and line of centres must cross at right angles: " + TURNED
    _refuse(mesh, "the cosine between n and an edge", "", lean, allowed, face, do)
    first, second = mesh.edge_faces[: mesh.n_inner].T
    across = displacement(mesh, mesh.face_xyz[first], mesh.face_xyz[second])
    off = np.linalg.norm(across / np.linalg.norm(across, axis=1, keepdims=True) - n[: mesh.n_inner], axis=1)
    allowed = ROUND_OFF + PLACE * _extent(mesh) / mesh.edge_distance[: mesh.n_inner]
    _refuse(mesh, "the angle between n and the line of centres", " rad", off, allowed, first, TURNED)


def _check_lengths(mesh: Mesh) -> None:
    geometry, face = geometry_of(mesh), edge_face(mesh)
    start, end = mesh.node_xyz[mesh.edge_nodes].transpose(1, 0, 2)
    error = np.abs(geometry.distance(start, start + displacement(mesh, start, end)) - mesh.edge_length)
    allowed = ROUND_OFF * mesh.edge_length + PLACE * _extent(mesh)
    _refuse(mesh, "the difference of l and the distance of the nodes of an edge", " m", error, allowed, face, TURNED)
    first, second = mesh.face_xyz[mesh.edge_faces[: mesh.n_inner]].transpose(1, 0, 2)
    d = mesh.edge_distance[: mesh.n_inner]
    error = np.abs(geometry.distance(first, first + displacement(mesh, first, second)) - d)
    allowed = ROUND_OFF * d + PLACE * _extent(mesh)
    _refuse(mesh, "the difference of d and the distance of two centres", " m", error, allowed, face, TURNED)


def _check_areas(mesh: Mesh) -> None:
    faces = np.arange(mesh.n_faces)
    held = mesh.node_faces >= 0
    slack = PLACE * _extent(mesh) * np.sqrt(mesh.face_area)
    allowed = ROUND_OFF * mesh.face_area + slack
    kites = np.bincount(mesh.node_faces[held], mesh.kite_area[held], minlength=mesh.n_faces)
    _refuse(mesh, "the difference of area and sum of kites", " m2", np.abs(kites - mesh.face_area), allowed, faces, TURNED)
    polygon = face_polygon_areas(mesh).sum(axis=1)
    _refuse(mesh, "the difference of area and polygon", " m2", np.abs(polygon - mesh.face_area), allowed, faces, TURNED)
    face = mesh.node_faces.max(axis=1)
    allowed = ROUND_OFF * mesh.node_area + slack[face]
    excess = mesh.kite_area.sum(axis=1) - mesh.node_area
    complete = held.all(axis=1) | (mesh.node_coast & (not np.any(mesh.border_kind == CUT)))
    excess = np.where(complete, np.abs(excess), excess)
    _refuse(mesh, "the difference of dual area and sum of kites", " m2", excess, allowed, face, TURNED)


def _check_euler(mesh: Mesh) -> None:
    inner = mesh.edge_faces[: mesh.n_inner]
    waters, _ = connected_components(pair_graph(inner, mesh.n_faces), directed=False)
    ends = mesh.edge_nodes[mesh.n_inner :]
    used, ends = np.unique(ends, return_inverse=True)
    borders = connected_components(pair_graph(ends.reshape(-1, 2), used.size), directed=False)[0] if used.size else 0
    euler = mesh.n_nodes - mesh.n_edges + mesh.n_faces
    handles = 2 * waters - borders - euler
    if handles not in ((0,) if mesh.period is None else (0, 2)):
        raise MeshError(
            f"mesh: V - E + F is {euler} with {waters} waters and {borders} closed borders; needed is {2 * waters - borders}"
            f"{' or 2 less' if mesh.period else ''}; faces, edges and nodes do not fit together: {TURNED}"
        )


def pair_graph(pairs: np.ndarray, size: int) -> sparse.coo_array:
    """Return the graph (size, size) that joins the two numbers of each pair (k, 2). Not collective."""
    return sparse.coo_array((np.ones(len(pairs)), (pairs[:, 0], pairs[:, 1])), shape=(size, size))
