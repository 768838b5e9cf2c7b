"""Averages between faces, edges and nodes.

    face to edge   p_e = (p_first + p_second)/2; on a border edge the value of its one face
    node to edge   p_e = (p_v1 + p_v2)/2
    face to node   p_v = sum_i kite_iv p_i / sum_i kite_iv                over the wet faces of this mesh round node v
    kinetic        K_i = (1/A_i) sum_e l_e d_e u_e^2 / 4                  kinetic energy per mass, m2 s-2

The kinetic average is the one that balances the two-face mean of the thickness: sum_e l d h_e u^2/2 = sum_i A_i h_i K_i, so
that pressure work and kinetic energy exchange exactly. On a coast face the edges on the coast contribute nothing.
Source: Ringler et al. 2010, J. Comput. Phys. 229, 3065.
"""

from __future__ import annotations

import numpy as np
from scipy import sparse

from swe.operators.sparse import compressed, sides


def face_to_edge(mesh) -> sparse.csr_array:
    """Return the two-face mean, (ne, nf). Not collective."""
    edge, face, _ = sides(mesh)
    share = np.where(edge < mesh.n_inner, 0.5, 1.0)
    return compressed(edge, face, share, (mesh.n_edges, mesh.n_faces))


def node_to_edge(mesh) -> sparse.csr_array:
    """Return the two-node mean, (ne, nn). Not collective."""
    edge = np.repeat(np.arange(mesh.n_edges), 2)
    return compressed(edge, mesh.edge_nodes.ravel(), np.full(edge.size, 0.5), (mesh.n_edges, mesh.n_nodes))


def face_to_node(mesh) -> sparse.csr_array:
    """Return the kite-weighted mean, (nn, nf). Not collective."""
    kite = np.where(mesh.node_faces >= 0, mesh.kite_area, 0.0)
    share = kite / kite.sum(axis=1, keepdims=True)
    node, slot = np.nonzero(mesh.node_faces >= 0)
    return compressed(node, mesh.node_faces[node, slot], share[node, slot], (mesh.n_nodes, mesh.n_faces))


def kinetic(mesh) -> sparse.csr_array:
    """Return the matrix of K = kinetic @ u**2, (nf, ne). Not collective."""
    edge, face, _ = sides(mesh)
    values = 0.25 * mesh.edge_length[edge] * mesh.edge_distance[edge] / mesh.face_area[face]
    return compressed(face, edge, values, (mesh.n_faces, mesh.n_edges))
