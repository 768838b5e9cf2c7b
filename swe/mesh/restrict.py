"""A part of a mesh as a mesh of its own: the faces of a subdomain with all their edges and nodes.

    faces   in the order given
    edges   inner ones (both faces held) first, by (larger local face, smaller local face): the edges among the first k
            faces are a prefix, for every k; then the border by (local face, edge of the whole mesh)
    nodes   by their smallest local face, then by node of the whole mesh: the nodes of the first k faces are a prefix, in
            the same order, for every k
    kinds   an edge that separated two faces of the parent and now has one is CUT; others keep the kind they had

No edge is turned round (topology.py) and nothing is computed anew: every length, area and direction is the parent's, bit for
bit. node_area and node_coast speak of the whole mesh; node_faces is -1 and kite_area 0 where a face is missing.
So the restriction to all faces in their order is the mesh itself, and a part of a part is a part of the whole.
"""

from __future__ import annotations

import numpy as np

from swe.errors import MeshError
from swe.mesh.topology import CUT, Mesh

NONE = np.iinfo(np.int32).max
"""Stands behind every face number when sorting."""


def restrict(mesh: Mesh, faces: np.ndarray) -> Mesh:
    """Return the part of a mesh that holds the given faces, in the given order. Not collective.

    faces (k,) indices into `mesh`, each once. face_id, edge_id and node_id of the part index the WHOLE mesh, also when
    `mesh` is a part itself. Raises MeshError when an index is out of range or repeated.
    """
    faces = _checked(faces, mesh.n_faces)
    local_face = _inverse(faces, mesh.n_faces)
    edge_faces = local_face[mesh.edge_faces]
    edges, n_inner = _edges(edge_faces, mesh.edge_id)
    node_faces = local_face[mesh.node_faces]
    nodes = _nodes(node_faces, mesh.node_id)
    local_edge, local_node = _inverse(edges, mesh.n_edges), _inverse(nodes, mesh.n_nodes)
    kind = np.full(mesh.n_edges, CUT, dtype=np.int8)
    kind[mesh.n_inner :] = mesh.border_kind
    return Mesh(
        radius=mesh.radius,
        period=mesh.period,
        face_xyz=mesh.face_xyz[faces],
        node_xyz=mesh.node_xyz[nodes],
        edge_xyz=mesh.edge_xyz[edges],
        edge_normal=mesh.edge_normal[edges],
        edge_tangent=mesh.edge_tangent[edges],
        edge_length=mesh.edge_length[edges],
        edge_distance=mesh.edge_distance[edges],
        face_area=mesh.face_area[faces],
        node_area=mesh.node_area[nodes],
        kite_area=np.where(node_faces[nodes] >= 0, mesh.kite_area[nodes], 0.0),
        edge_faces=edge_faces[edges],
        edge_nodes=local_node[mesh.edge_nodes[edges]],
        face_edges=local_edge[mesh.face_edges[faces]],
        face_nodes=local_node[mesh.face_nodes[faces]],
        node_faces=node_faces[nodes],
        node_coast=mesh.node_coast[nodes],
        n_inner=n_inner,
        border_kind=kind[edges[n_inner:]],
        depth=mesh.depth[faces],
        face_outer=mesh.face_outer[faces],
        face_id=mesh.face_id[faces],
        edge_id=mesh.edge_id[edges],
        node_id=mesh.node_id[nodes],
    )


def _checked(faces: np.ndarray, count: int) -> np.ndarray:
    faces = np.asarray(faces)
    if faces.ndim != 1 or faces.size == 0 or not np.issubdtype(faces.dtype, np.integer):
        raise MeshError(f"restriction: faces have shape {faces.shape} and type {faces.dtype}; needed is a list of face indices")
    if faces.min() < 0 or faces.max() >= count:
        raise MeshError(f"restriction: faces run from {faces.min()} to {faces.max()}; allowed are 0 to {count - 1}")
    times = np.bincount(faces, minlength=count)
    if times.max() > 1:
        raise MeshError(f"restriction: face {times.argmax()} is listed {times.max()} times; list each face once")
    return faces.astype(np.int32)


def _inverse(chosen: np.ndarray, size: int) -> np.ndarray:
    """Local index of each index of the parent, -1 where not chosen; one entry more, so that index -1 maps to -1."""
    table = np.full(size + 1, -1, dtype=np.int32)
    table[chosen] = np.arange(chosen.size, dtype=np.int32)
    return table


def _edges(edge_faces: np.ndarray, ids: np.ndarray) -> tuple[np.ndarray, int]:
    """Edges of the parent with a face held, in local order, and how many have two."""
    low, high = edge_faces.min(axis=1), edge_faces.max(axis=1)
    inner = np.flatnonzero(low >= 0)
    inner = inner[np.lexsort((low[inner], high[inner]))]
    border = np.flatnonzero((low < 0) & (high >= 0))
    border = border[np.lexsort((ids[border], high[border]))]
    return np.concatenate([inner, border]), inner.size


def _nodes(node_faces: np.ndarray, ids: np.ndarray) -> np.ndarray:
    """Nodes of the parent with a face held, in local order."""
    held = np.flatnonzero((node_faces >= 0).any(axis=1))
    faces = node_faces[held]
    return held[np.lexsort((ids[held], np.where(faces >= 0, faces, NONE).min(axis=1)))]
