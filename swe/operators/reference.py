"""Slow twins of the operators: loops straight from the formulas, one face, edge or node at a time.

For tests on small meshes only; the fast operators must give the same numbers. Each function states its formula; symbols as
in the module of the fast twin.
"""

from __future__ import annotations

import numpy as np

from swe.mesh.topology import Mesh


def outward(mesh: Mesh, face: int, edge: int) -> float:
    """Return s: +1 where n points out of `face`, -1 where it points in."""
    return 1.0 if mesh.edge_faces[edge, 0] == face else -1.0


def edges_of(mesh: Mesh, face: int) -> list[int]:
    """Return the edges of `face`, counter-clockwise."""
    return [int(edge) for edge in mesh.face_edges[face] if edge >= 0]


def divergence(mesh: Mesh, flow: np.ndarray) -> np.ndarray:
    """(1/A) sum s l F over the edges of each face."""
    out = np.zeros(mesh.n_faces)
    for face in range(mesh.n_faces):
        for edge in edges_of(mesh, face):
            out[face] += outward(mesh, face, edge) * mesh.edge_length[edge] * flow[edge]
        out[face] /= mesh.face_area[face]
    return out


def gradient(mesh: Mesh, p: np.ndarray) -> np.ndarray:
    """(p_second - p_first)/d on edges with two faces."""
    out = np.zeros(mesh.n_edges)
    for edge in range(mesh.n_inner):
        first, second = mesh.edge_faces[edge]
        out[edge] = (p[second] - p[first]) / mesh.edge_distance[edge]
    return out


def vorticity(mesh: Mesh, u: np.ndarray) -> np.ndarray:
    """Circulation d u along the lines of centres, counter-clockwise round each node, over its area; zero at the coast."""
    out = np.zeros(mesh.n_nodes)
    for edge in range(mesh.n_inner):
        right, left = mesh.edge_nodes[edge]  # seen along n
        out[left] += mesh.edge_distance[edge] * u[edge]
        out[right] -= mesh.edge_distance[edge] * u[edge]
    out /= mesh.node_area
    out[mesh.node_coast] = 0.0
    return out


def fraction(mesh: Mesh, face: int, node: int) -> float:
    """Return R: kite of (face, node) over the sum of the kites of the face."""
    kites = {}
    for corner in mesh.face_nodes[face]:
        if corner >= 0:
            kites[int(corner)] = sum(mesh.kite_area[corner, k] for k in range(3) if mesh.node_faces[corner, k] == face)
    return kites[int(node)] / sum(kites.values())


def tangential(mesh: Mesh, u: np.ndarray) -> np.ndarray:
    """u_t = -(1/d) sum W l' u': walk counter-clockwise round both faces of each edge, summing R at each node passed."""
    out = np.zeros(mesh.n_edges)
    for edge in range(mesh.n_inner):
        for face in mesh.edge_faces[edge]:
            ring = edges_of(mesh, face)
            start = ring.index(edge)
            passed = 0.0
            for step in range(1, len(ring)):
                place = (start + step) % len(ring)
                passed += fraction(mesh, face, mesh.face_nodes[face, place])
                other = ring[place]
                if other < mesh.n_inner:
                    weight = outward(mesh, face, edge) * outward(mesh, face, other) * (passed - 0.5)
                    out[edge] -= weight * mesh.edge_length[other] * u[other] / mesh.edge_distance[edge]
    return out


def face_to_edge(mesh: Mesh, p: np.ndarray) -> np.ndarray:
    """Mean of the two faces, or the one there is."""
    return np.array([np.mean([p[face] for face in faces if face >= 0]) for faces in mesh.edge_faces])


def node_to_edge(mesh: Mesh, p: np.ndarray) -> np.ndarray:
    """Mean of the two nodes."""
    return np.array([0.5 * (p[first] + p[second]) for first, second in mesh.edge_nodes])


def face_to_node(mesh: Mesh, p: np.ndarray) -> np.ndarray:
    """Kite-weighted mean of the wet faces round each node."""
    out = np.zeros(mesh.n_nodes)
    for node in range(mesh.n_nodes):
        pairs = [(mesh.kite_area[node, k], p[face]) for k, face in enumerate(mesh.node_faces[node]) if face >= 0]
        out[node] = sum(kite * value for kite, value in pairs) / sum(kite for kite, _ in pairs)
    return out


def kinetic(mesh: Mesh, u: np.ndarray) -> np.ndarray:
    """K = (1/A) sum l d u^2 / 4 over the edges of each face."""
    out = np.zeros(mesh.n_faces)
    for face in range(mesh.n_faces):
        for edge in edges_of(mesh, face):
            out[face] += 0.25 * mesh.edge_length[edge] * mesh.edge_distance[edge] * u[edge] ** 2 / mesh.face_area[face]
    return out


def gradient_along(mesh: Mesh, p: np.ndarray) -> np.ndarray:
    """(p_v2 - p_v1)/l on edges with two faces."""
    out = np.zeros(mesh.n_edges)
    for edge in range(mesh.n_inner):
        first, second = mesh.edge_nodes[edge]
        out[edge] = (p[second] - p[first]) / mesh.edge_length[edge]
    return out
