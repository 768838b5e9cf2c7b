"""Where a mesh wants the weather, and the box that holds it."""

import numpy as np
import pytest
from operators.operator_meshes import MESHES, lake

from swe.atmosphere.places import box_of, edge_points, face_points
from swe.mesh.surface import unit_vectors
from swe.mesh.voronoi import sphere_mesh


def test_points_of_a_plane_are_x_and_y():
    mesh = lake()
    assert np.array_equal(face_points(mesh), mesh.face_xyz[:, :2]) and np.array_equal(edge_points(mesh), mesh.edge_xyz[:, :2])
    west, south, east, north = box_of(mesh)
    assert (west, north) == (mesh.edge_xyz[:, 0].min(), mesh.edge_xyz[:, 1].max())
    assert east > west and north > south


def test_points_of_a_sphere_are_longitude_and_latitude():
    mesh = MESHES["sphere sea"]()
    for points, xyz in ((face_points(mesh), mesh.face_xyz), (edge_points(mesh), mesh.edge_xyz)):
        assert unit_vectors(points) == pytest.approx(xyz / np.linalg.norm(xyz, axis=1, keepdims=True), abs=1e-14)


@pytest.mark.parametrize("middle", [0.0, 100.0, 180.0, -179.0, 359.0])
def test_box_of_a_sea_passes_the_date_line_where_the_sea_does(middle):
    """A patch of 20 by 10 degrees: 231 points about its middle."""
    lon, lat = np.meshgrid(middle + np.linspace(-10, 10, 21), 40 + np.linspace(-5, 5, 11))
    points = np.column_stack([lon.ravel(), lat.ravel()]) + np.random.default_rng(0).uniform(-0.1, 0.1, (231, 2))
    wet = (np.abs(points[:, 0] - middle) < 9.5) & (np.abs(points[:, 1] - 40) < 4.5)
    mesh = sphere_mesh(unit_vectors(points), wet, 6.4e6)
    west, south, east, north = box_of(mesh)
    assert 18.0 < east - west < 21.0 and 8.0 < north - south < 11.0
    assert np.mod((west + east) / 2 - middle + 180.0, 360.0) - 180.0 == pytest.approx(0.0, abs=0.5)
