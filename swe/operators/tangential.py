"""Tangential velocity at an edge from the normal velocities of the edges of its two faces.

    u_t,e  = -(1/d_e) sum_e' W_ee' l_e' u_e'
    W_ee'  = s_ie s_ie' ( sum of R_iv passed going counter-clockwise from e to e'  -  1/2 ),      R_iv = kite_iv / A_i

s as in `divergence`. W is antisymmetric because the fractions R of one face sum to one: the sum from e to e' and the sum
from e' to e add up to 1. Antisymmetry is what keeps the Coriolis force from doing work, and the choice of R what keeps
geostrophic states steady. Each pair is computed once and mirrored, so W + W^T = 0 bit by bit.

Border edges have neither row nor column: u = 0 on a coast. Nor have edges between two outer faces of an open boundary: on an
edge across that boundary only the inner side turns the current. Its control volume is half as deep (d/2, as for the
gradient), so T has d/2 in the place of d there and the turning does no work.
Source: Thuburn, Ringler, Skamarock & Klemp 2009, J. Comput. Phys. 228, 8321.
"""

from __future__ import annotations

from itertools import combinations

import numpy as np
from scipy import sparse

from swe.mesh.topology import gradient_distance, still_edges
from swe.operators.sparse import compressed


def kite_fractions(mesh) -> np.ndarray:
    """Return R, (nf, m): the fraction of face i that is nearest its node face_nodes[i, k]; 0 behind the last. Not collective."""
    present = mesh.face_nodes >= 0
    node = np.where(present, mesh.face_nodes, 0)
    own = mesh.node_faces[node] == np.arange(mesh.n_faces)[:, None, None]
    kite = (mesh.kite_area[node] * own).sum(axis=2) * present
    return kite / kite.sum(axis=1, keepdims=True)


def antisymmetric_weights(mesh) -> sparse.csr_array:
    """Return W, (ne, ne), dimensionless, W^T = -W bit by bit. Not collective."""
    edges = mesh.face_edges
    inner = (edges >= 0) & ~still_edges(mesh)[edges]
    outward = np.where(mesh.edge_faces[edges, 0] == np.arange(mesh.n_faces)[:, None], 1.0, -1.0)
    passed = np.cumsum(kite_fractions(mesh), axis=1)
    rows, columns, values = [], [], []
    for k, j in combinations(range(edges.shape[1]), 2):  # from edge k counter-clockwise to edge j: nodes k+1 .. j
        use = inner[:, k] & inner[:, j]
        rows.append(edges[use, k])
        columns.append(edges[use, j])
        values.append((outward[:, k] * outward[:, j] * (passed[:, j] - passed[:, k] - 0.5))[use])
    row, column, value = (np.concatenate(part) for part in (rows, columns, values))
    mirrored = np.concatenate((row, column)), np.concatenate((column, row)), np.concatenate((value, -value))
    return compressed(*mirrored, (mesh.n_edges, mesh.n_edges))


def tangential(mesh, weights: sparse.csr_array) -> sparse.csr_array:
    """Return T, (ne, ne), dimensionless: u_t = T u. Not collective."""
    rows = np.repeat(np.arange(mesh.n_edges), np.diff(weights.indptr))
    values = -weights.data * mesh.edge_length[weights.indices] / gradient_distance(mesh)[rows]
    return sparse.csr_array((values, weights.indices, weights.indptr), shape=weights.shape)
