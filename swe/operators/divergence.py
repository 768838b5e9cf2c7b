"""Divergence of an edge-normal transport on faces.

    (div F)_i = (1/A_i) sum_e s_ie l_e F_e,     s_ie = +1 where n points out of face i, -1 where it points in

F per unit length of edge. Border edges keep their columns: a transport prescribed there counts. Summed over all faces with
A_i, inner edges cancel in pairs, so mass changes by what crosses the border only. Outer faces beyond an open boundary have
no row: their level is given, whatever crosses their edges.
Source: Ringler et al. 2010, J. Comput. Phys. 229, 3065; the theorem of Gauss on a polygon.
"""

from __future__ import annotations

import numpy as np
from scipy import sparse

from swe.operators.sparse import compressed, sides


def divergence(mesh) -> sparse.csr_array:
    """Return div, (nf, ne), m-1. Not collective."""
    edge, face, sign = sides(mesh)
    inside = ~mesh.face_outer[face]
    edge, face, sign = edge[inside], face[inside], sign[inside]
    values = sign * mesh.edge_length[edge] / mesh.face_area[face]
    return compressed(face, edge, values, (mesh.n_faces, mesh.n_edges))


def divergence_alike(mesh) -> sparse.csr_array:
    """Return div, (nf, ne), m-1, each row in the order of the edges of the WHOLE mesh. Not collective.

    A row is summed in the order in which it is stored. So every subdomain that holds a face, with all its edges, finds the
    same divergence bit for bit, however its own edges are numbered.
    """
    div = divergence(mesh)
    rows = np.repeat(np.arange(mesh.n_faces), np.diff(div.indptr))
    order = np.lexsort((mesh.edge_id[div.indices], rows))
    return sparse.csr_array((div.data[order], div.indices[order], div.indptr), shape=div.shape)
