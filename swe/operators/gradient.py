"""Gradients: of a face field along n, of a node field along t.

    (grad p)_e  = (p_second - p_first) / d_e          faces on both sides of the edge; zero row on border edges
    (along p)_e = (p_v2 - p_v1) / l_e                 nodes at both ends of the edge; zero row on border edges

`A div` and `l d grad` are negative adjoints; curl grad = 0 and div along = 0 hold exactly (telescoping sums).
Source: Ringler et al. 2010, J. Comput. Phys. 229, 3065.
"""

from __future__ import annotations

import numpy as np
from scipy import sparse

from swe.operators.sparse import compressed


def gradient(mesh) -> sparse.csr_array:
    """Return grad, (ne, nf), m-1. Not collective."""
    return _difference(mesh.edge_faces[: mesh.n_inner], mesh.edge_distance, mesh.n_inner, (mesh.n_edges, mesh.n_faces))


def gradient_along(mesh) -> sparse.csr_array:
    """Return the gradient of a node field along the edge tangent, (ne, nn), m-1. Not collective."""
    return _difference(mesh.edge_nodes[: mesh.n_inner], mesh.edge_length, mesh.n_inner, (mesh.n_edges, mesh.n_nodes))


def _difference(ends, length, count, shape) -> sparse.csr_array:
    edge = np.arange(count)
    inverse = 1.0 / length[:count]
    rows = np.concatenate((edge, edge))
    columns = np.concatenate((ends[:, 1], ends[:, 0]))
    return compressed(rows, columns, np.concatenate((inverse, -inverse)), shape)
