"""Sparse matrices of the operators: compressed rows, sorted columns, 32-bit indices."""

from __future__ import annotations

import numpy as np
from scipy import sparse


def compressed(rows, columns, values, shape) -> sparse.csr_array:
    """Return the CSR array with `values` at (rows, columns), duplicates summed. Not collective.

    Stored zeros are kept: a pattern must not depend on the round-off of the geometry.
    """
    matrix = sparse.coo_array((np.asarray(values, dtype=float), (rows, columns)), shape=shape).tocsr()
    matrix.sort_indices()
    return matrix


def sides(mesh):
    """Return (edge, face, sign) of every edge-face pair: sign +1 where n points out of the face. Not collective.

    One side of a border edge may be missing, in either column of `edge_faces`.
    """
    edge, column = np.nonzero(mesh.edge_faces >= 0)
    return edge, mesh.edge_faces[edge, column], 1.0 - 2.0 * column


def inner_edges(mesh) -> np.ndarray:
    """Return (ne,) bool: True where an edge separates two faces of this mesh. Not collective."""
    return np.arange(mesh.n_edges) < mesh.n_inner
