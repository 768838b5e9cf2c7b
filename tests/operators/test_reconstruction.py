"""Vectors at face centres (Perot 2000, J. Comput. Phys. 159, 58)."""

import numpy as np
import pytest
from operators.operator_meshes import MESHES, globe

from swe.operators import axes, reconstruction


@pytest.mark.parametrize("name", ["regular", "irregular", "rectangle", "lake"])
def test_uniform_flow_is_exact_on_plane_polygons(name):
    mesh = MESHES[name]()
    r1, r2 = reconstruction(mesh)
    u = mesh.edge_normal @ [0.6, -1.1, 0.0]  # border edges included: a closed polygon each
    assert np.abs(r1 @ u - 0.6).max() < 1e-13
    assert np.abs(r2 @ u + 1.1).max() < 1e-13


def rotation_error(n):
    """Largest error of a solid rotation about a tilted axis, over its largest speed."""
    mesh = globe(n)
    spin = np.array([0.3, -0.5, 0.8])
    u = (np.cross(spin, mesh.edge_xyz) * mesh.edge_normal).sum(axis=1)
    flow = np.cross(spin, mesh.face_xyz)
    parts = zip(reconstruction(mesh), axes(mesh, mesh.face_xyz), strict=True)
    return max(np.abs(r @ u - (axis * flow).sum(axis=1)).max() for r, axis in parts) / np.linalg.norm(flow, axis=1).max()


def test_solid_rotation_converges_on_the_sphere():
    coarse, fine = rotation_error(250), rotation_error(4000)  # spacing 4 times smaller
    assert fine < 0.01 and coarse / fine > 4.0


def test_axes_are_orthonormal_and_defined_at_the_poles():
    mesh = globe()
    points = np.vstack([mesh.face_xyz, [[0, 0, 1.0], [0, 0, -1.0]]])
    east, north = axes(mesh, points)
    up = points / np.linalg.norm(points, axis=1, keepdims=True)
    assert np.abs(np.cross(east, north) - up).max() < 1e-14
