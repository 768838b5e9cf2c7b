"""Gradients: of a face field along n, of a node field along t.

    (grad p)_e  = (p_second - p_first) / d_e          faces on both sides of the edge; zero row on border edges
    (along p)_e = (p_v2 - p_v1) / l_e                 nodes at both ends of the edge; zero row on border edges

Open boundary: d/2 in the place of d, for the level is given on the boundary line; zero rows between two outer faces.

`A div` and `l d grad` are negative adjoints; curl grad = 0 and div along = 0 hold exactly (telescoping sums).
Source: Ringler et al. 2010, J. Comput. Phys. 229, 3065.
"""

from __future__ import annotations

import numpy as np
from scipy import sparse

from swe.mesh.topology import gradient_distance, open_edges, still_edges
from swe.operators.sparse import compressed


def gradient(mesh) -> sparse.csr_array:
    """Return grad, (ne, nf), m-1. Not collective."""
    moving = np.flatnonzero(~still_edges(mesh))
    return _difference(moving, mesh.edge_faces, gradient_distance(mesh), (mesh.n_edges, mesh.n_faces))


def gradient_inside(mesh, grad: sparse.csr_array) -> sparse.csr_array:
    """Return `grad` without the rows of edges across an open boundary, (ne, nf), m-1; `grad` itself where there is none.

    For the kinetic energy: an outer face knows none, so no difference of it acts across the boundary. Not collective.
    """
    across = open_edges(mesh)[0]
    if not across.size:
        return grad
    keep = np.ones(mesh.n_edges)
    keep[across] = 0.0
    inside = (sparse.diags_array(keep) @ grad).tocsr()
    inside.sort_indices()
    return inside


def gradient_along(mesh) -> sparse.csr_array:
    """Return the gradient of a node field along the edge tangent, (ne, nn), m-1. Not collective."""
    moving = np.flatnonzero(~still_edges(mesh))
    return _difference(moving, mesh.edge_nodes, mesh.edge_length, (mesh.n_edges, mesh.n_nodes))


def _difference(edge, ends, length, shape) -> sparse.csr_array:
    inverse = 1.0 / length[edge]
    rows = np.concatenate((edge, edge))
    columns = np.concatenate((ends[edge, 1], ends[edge, 0]))
    return compressed(rows, columns, np.concatenate((inverse, -inverse)), shape)
