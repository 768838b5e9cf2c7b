"""Lattices: exact values of regular hexagons, rectangles of exact area, the bisected icosahedron.

Sources: elementary geometry; counts of the icosahedral grid: Euler's formula (12 five-sided faces, the rest six-sided).
"""

import numpy as np
import pytest
import shapely

from swe.errors import MeshError
from swe.mesh.lattice import bisected_icosahedron, hexagons_in, hexagons_within, icosahedral, periodic_hexagons
from swe.mesh.quality import check_invariants, quality

ROOT3 = np.sqrt(3)


@pytest.mark.parametrize(("nx", "ny"), [(3, 4), (8, 6), (5, 10)])
def test_periodic_hexagons_are_regular(nx, ny):
    s = 2.5e3
    mesh = periodic_hexagons(nx, ny, s)
    check_invariants(mesh)
    assert (mesh.n_faces, mesh.n_edges, mesh.n_nodes) == (nx * ny, 3 * nx * ny, 2 * nx * ny)
    assert mesh.n_inner == mesh.n_edges and mesh.face_nodes.shape == (nx * ny, 6) and mesh.face_nodes.min() >= 0
    assert mesh.edge_distance == pytest.approx(s, rel=1e-12)
    assert mesh.edge_length == pytest.approx(s / ROOT3, rel=1e-12)
    assert mesh.face_area == pytest.approx(ROOT3 / 2 * s**2, rel=1e-12)
    assert mesh.node_area == pytest.approx(ROOT3 / 4 * s**2, rel=1e-12)
    assert mesh.kite_area == pytest.approx(ROOT3 / 12 * s**2, rel=1e-12)
    assert mesh.period == pytest.approx((nx * s, ny * ROOT3 / 2 * s))


def test_periodic_hexagons_point_in_three_directions():
    mesh = periodic_hexagons(6, 6, 1.0)
    angle = np.degrees(np.arctan2(mesh.edge_normal[:, 1], mesh.edge_normal[:, 0])) % 60
    assert np.minimum(angle, 60 - angle).max() < 1e-9


@pytest.mark.parametrize(("nx", "ny"), [(2, 6), (6, 5), (6, 2)])
def test_too_small_a_period_is_refused(nx, ny):
    with pytest.raises(MeshError, match="needed are nx >= 3 and an even ny >= 4"):
        periodic_hexagons(nx, ny, 1.0)


@pytest.mark.parametrize(("lx", "ly", "spacing"), [(100e3, 70e3, 10e3), (40.0, 200.0, 3.3), (12.0, 6 * ROOT3 / 2, 1.0)])
def test_rectangle_has_the_area_and_the_mean_coasts_asked_for(lx, ly, spacing):
    mesh = hexagons_in(lx, ly, spacing)
    check_invariants(mesh)
    assert mesh.face_area == pytest.approx(lx * ly / mesh.n_faces, rel=1e-12)
    assert mesh.face_area.sum() == pytest.approx(lx * ly, rel=1e-12)
    # V - E + F = 1: one water, one coast.
    assert mesh.n_nodes - mesh.n_edges + mesh.n_faces == 1
    # Mean lines of the coast: area between the coast and a line well inside, over the length of the line.
    water = shapely.union_all([shapely.Polygon(mesh.node_xyz[nodes[nodes >= 0], :2]) for nodes in mesh.face_nodes])
    south = water.intersection(shapely.box(lx / 4, -ly, 3 * lx / 4, ly / 2)).area / (lx / 2)
    assert south == pytest.approx(ly / 2, abs=0.1 * spacing)
    row = ly / round(ly / (lx / round(lx / spacing) * ROOT3 / 2))
    west = water.intersection(shapely.box(-lx, row, lx / 2, 3 * row)).area / (2 * row)
    assert west == pytest.approx(lx / 2, abs=0.02 * spacing)
    xyz = mesh.node_xyz
    assert xyz[:, 1].min() == pytest.approx(-row / 6, rel=0.2) and xyz[:, 1].max() == pytest.approx(ly + row / 6, rel=0.01)


def test_rectangle_that_fits_is_regular():
    mesh = hexagons_in(12.0, 6 * ROOT3 / 2, 1.0)
    assert mesh.edge_distance == pytest.approx(1.0, rel=1e-12)
    assert mesh.edge_length == pytest.approx(1 / ROOT3, rel=1e-12)


def test_rectangle_too_small_is_refused():
    with pytest.raises(MeshError, match="needed are 2 x 2"):
        hexagons_in(10.0, 1.0, 5.0)


def test_hexagons_within_a_polygon():
    ring = shapely.Point(5e5, -2e5).buffer(2e4).difference(shapely.Point(5e5, -2e5).buffer(5e3))
    mesh = hexagons_within(ring, 900.0)
    check_invariants(mesh)
    assert mesh.face_area == pytest.approx(ROOT3 / 2 * 900**2, rel=1e-9)
    assert np.all(shapely.contains_xy(ring, mesh.face_xyz[:, :2]))
    # Centres fall inside in proportion to the area, up to the cells that the coast crosses.
    assert abs(mesh.face_area.sum() - ring.area) < 0.5 * ring.length * 900
    assert mesh.n_nodes - mesh.n_edges + mesh.n_faces == 0  # one island
    with pytest.raises(MeshError, match="give a smaller spacing"):
        hexagons_within(shapely.Point(0, 0).buffer(1.0), 500.0)


@pytest.mark.parametrize("level", [0, 1, 3])
def test_icosahedral_counts_and_area(level):
    mesh = icosahedral(level, 6.4e6, 0)
    check_invariants(mesh)
    assert mesh.n_faces == 10 * 4**level + 2
    sides = (mesh.face_nodes >= 0).sum(axis=1)
    assert np.count_nonzero(sides == 5) == 12 and np.count_nonzero(sides == 6) == mesh.n_faces - 12
    assert mesh.face_area.sum() == pytest.approx(4 * np.pi * 6.4e6**2, rel=1e-13)


def test_icosahedron_has_equal_faces():
    mesh = icosahedral(0, 1.0, 0)
    assert mesh.face_area == pytest.approx(np.pi / 3, rel=1e-12)
    # The sides of an icosahedron subtend atan 2 at its middle.
    assert mesh.edge_distance == pytest.approx(np.arctan(2), rel=1e-12)


def test_bisected_points_are_on_the_sphere_and_apart():
    points = bisected_icosahedron(4)
    assert np.linalg.norm(points, axis=1) == pytest.approx(1.0, abs=1e-15)
    assert len(np.unique(points.round(9), axis=0)) == 10 * 4**4 + 2


def test_sweeps_move_centres_to_centroids():
    offsets = [quality(icosahedral(3, 1.0, sweeps), 9.81).offset_largest for sweeps in (0, 5, 60)]
    assert offsets[1] < 0.6 * offsets[0]
    assert offsets[2] < 0.1 * offsets[0]
    with pytest.raises(MeshError, match="both must be 0 or more"):
        icosahedral(2, 1.0, -1)
