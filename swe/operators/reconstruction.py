"""Vectors at face centres from edge-normal components.

For a constant vector U and any closed polygon with centre x_i the theorem of Gauss gives

    A_i U = sum_e s_ie l_e (x_e - x_i) (U . n_e),        x_e midpoint of the edge between its two nodes

so U_i = (1/A_i) sum_e s_ie l_e (x_e - x_i) u_e is exact for uniform flow on every plane polygon, and of first order else.
Components: x and y on a plane; east and north at the face centre on a sphere (chords projected on the tangent plane).
Source: Perot 2000, J. Comput. Phys. 159, 58.
"""

from __future__ import annotations

import numpy as np
from scipy import sparse

from swe.mesh.topology import displacement
from swe.operators.sparse import compressed, sides


def axes(mesh, xyz) -> tuple[np.ndarray, np.ndarray]:
    """Return the unit vectors of the two components at points `xyz` (n, 3): each (n, 3). Not collective.

    Plane: x and y. Sphere: east and north; at a pole, where east is not defined, the direction of y.
    """
    if not mesh.spherical:
        return np.broadcast_to([1.0, 0.0, 0.0], xyz.shape), np.broadcast_to([0.0, 1.0, 0.0], xyz.shape)
    up = xyz / np.linalg.norm(xyz, axis=1, keepdims=True)
    east = np.stack((-up[:, 1], up[:, 0], np.zeros(len(up))), axis=1)
    size = np.linalg.norm(east, axis=1, keepdims=True)
    east = np.where(size > 1e-12, east / np.maximum(size, 1e-300), [0.0, 1.0, 0.0])
    return east, np.cross(up, east)


def reconstruction(mesh) -> tuple[sparse.csr_array, sparse.csr_array]:
    """Return (R1, R2), each (nf, ne), dimensionless: components of the velocity at face centres. Not collective."""
    edge, face, sign = sides(mesh)
    arm = displacement(mesh, mesh.face_xyz[face], mesh.edge_xyz[edge])
    scale = sign * mesh.edge_length[edge] / mesh.face_area[face]
    shape = (mesh.n_faces, mesh.n_edges)
    return tuple(compressed(face, edge, scale * (arm * axis[face]).sum(axis=1), shape) for axis in axes(mesh, mesh.face_xyz))
