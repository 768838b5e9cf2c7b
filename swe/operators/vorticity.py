"""Relative vorticity on nodes: circulation along the lines of centres round a node, over its dual area.

    (curl u)_v = (1/A_v) sum_e c_ve d_e u_e,     c_ve = +1 where v is the second node of e, -1 where it is the first

(t points from the first node to the second, so the second lies to the left of n and n runs counter-clockwise round it.)

Coast, free slip: the water exerts no tangential stress on land, so the vorticity of a coast node is zero: its row is
empty. So is that of a node on an open boundary, where the currents beyond are not known. Columns of border
edges are dropped (u = 0 on a coast; unknown where a restricted mesh is cut).
Source: Ringler et al. 2010, J. Comput. Phys. 229, 3065.
"""

from __future__ import annotations

import numpy as np
from scipy import sparse

from swe.operators.sparse import compressed


def vorticity(mesh) -> sparse.csr_array:
    """Return curl, (nn, ne), m-1. Not collective."""
    edge = np.repeat(np.arange(mesh.n_inner), 2)
    node = mesh.edge_nodes[: mesh.n_inner].ravel()
    sign = np.tile([-1.0, 1.0], mesh.n_inner)
    wet = ~(mesh.node_coast | beyond(mesh))[node]
    edge, node, sign = edge[wet], node[wet], sign[wet]
    return compressed(node, edge, sign * mesh.edge_distance[edge] / mesh.node_area[node], (mesh.n_nodes, mesh.n_edges))


def beyond(mesh) -> np.ndarray:
    """Return (nn,) bool: nodes that touch an outer face. Not collective."""
    present = mesh.node_faces >= 0
    return (mesh.face_outer[np.where(present, mesh.node_faces, 0)] & present).any(axis=1)
