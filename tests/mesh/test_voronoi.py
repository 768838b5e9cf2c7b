"""The Voronoi builder: identities at round-off, and the same cells as an independent library finds.

Sources: identities from method.md's published operators (Thuburn et al. 2009; Ringler et al. 2010); Euler's formula; Girard's
theorem (areas of spherical polygons). The independent cells are scipy's Voronoi and SphericalVoronoi.
"""

import numpy as np
import pytest
import shapely
from lakes import globe, lake, lake_points, torus
from scipy.spatial import SphericalVoronoi, Voronoi

from swe.errors import MeshError
from swe.mesh.lattice import bisected_icosahedron
from swe.mesh.quality import check_invariants
from swe.mesh.topology import COAST, displacement, with_depth
from swe.mesh.voronoi import plane_mesh, sphere_mesh


def cells(mesh):
    """The faces as polygons of their nodes."""
    return [shapely.Polygon(mesh.node_xyz[nodes[nodes >= 0], :2]) for nodes in mesh.face_nodes]


def spherical_triangle(a, b, c):
    """Area of a spherical triangle on the unit sphere by its angles (Girard), independent of the code's formula."""

    def corner(p, q, r):
        u, v = np.cross(p, q), np.cross(p, r)
        return np.arctan2(np.linalg.norm(np.cross(u, v), axis=-1), (u * v).sum(axis=-1))

    return corner(a, b, c) + corner(b, c, a) + corner(c, a, b) - np.pi


def test_lake_with_islands_passes_every_invariant():
    mesh = lake()
    assert mesh.n_faces > 500
    check_invariants(mesh)
    # One water with two islands: V - E + F = 1 - 2 (Euler).
    assert mesh.n_nodes - mesh.n_edges + mesh.n_faces == -1
    assert np.all(mesh.border_kind == COAST) and mesh.border_kind.size == mesh.n_edges - mesh.n_inner


def test_areas_of_faces_and_of_nodes_are_the_water():
    mesh = lake(sweeps=0)  # random points: negative kites included
    water = shapely.union_all(cells(mesh)).area
    assert mesh.kite_area.min() < 0
    assert mesh.face_area.sum() == pytest.approx(water, rel=1e-12)
    assert mesh.node_area.sum() == pytest.approx(water, rel=1e-12)


@pytest.mark.parametrize("sweeps", [0, 10])
def test_cells_are_those_of_an_independent_voronoi_code(sweeps):
    points, wet = lake_points(4, sweeps)
    mesh = plane_mesh(points, wet)
    found = Voronoi(points)
    for face, point in enumerate(np.flatnonzero(wet)):
        region = found.regions[found.point_region[point]]
        theirs = shapely.convex_hull(shapely.MultiPoint(found.vertices[region]))
        assert mesh.face_area[face] == pytest.approx(theirs.area, rel=1e-9)
        assert (mesh.face_nodes[face] >= 0).sum() == len(region)
    assert np.array_equal(mesh.face_xyz[:, :2], points[wet])


def test_closed_cells_a_uniform_flow_has_no_divergence():
    # Gauss: the sum of l n round a closed polygon is zero.
    mesh = lake(sweeps=0)
    total = np.zeros((mesh.n_faces, 3))
    flux = mesh.edge_length[:, None] * mesh.edge_normal
    np.add.at(total, mesh.edge_faces[:, 0], flux)
    inner = mesh.edge_faces[: mesh.n_inner, 1]
    np.add.at(total, inner, -flux[: mesh.n_inner])
    assert np.abs(total).max() < 1e-12 * mesh.edge_length.max() * 1e3


def test_nodes_are_at_one_distance_from_their_three_points():
    mesh = torus()
    arm = displacement(mesh, mesh.node_xyz[:, None], mesh.face_xyz[mesh.node_faces])
    reach = np.linalg.norm(arm, axis=-1)
    assert np.ptp(reach, axis=1).max() < 1e-9
    turn = np.cross(arm, np.roll(arm, -1, axis=1))[..., 2]
    assert np.all(turn.sum(axis=1) > 0)  # counter-clockwise: twice the area of the triangle


def test_torus_closes():
    mesh = torus()
    assert mesh.n_nodes - mesh.n_edges + mesh.n_faces == 0
    assert mesh.n_inner == mesh.n_edges == 3 * mesh.n_faces
    assert mesh.face_area.sum() == pytest.approx(600.0, rel=1e-13)
    assert mesh.node_area.sum() == pytest.approx(600.0, rel=1e-13)
    assert not mesh.node_coast.any()


def test_torus_does_not_care_where_the_period_starts():
    points = np.random.default_rng(5).random((200, 2)) * (30.0, 20.0)
    wet = np.random.default_rng(6).random(200) < 0.9
    here = plane_mesh(points, wet, (30.0, 20.0))
    there = plane_mesh(points + (13.7, -45.1), wet, (30.0, 20.0))
    assert np.array_equal(here.edge_faces, there.edge_faces)
    assert np.array_equal(here.node_faces, there.node_faces)
    for name in ("edge_length", "edge_distance", "face_area", "kite_area", "edge_normal"):
        assert getattr(there, name) == pytest.approx(getattr(here, name), abs=1e-9)


def test_uneven_torus_widens_its_margin():
    # All points in one corner: circles reach further than the first margin.
    points = np.random.default_rng(7).random((150, 2)) * (14.0, 14.0)
    mesh = plane_mesh(points, np.ones(150, dtype=bool), (30.0, 30.0))
    assert mesh.face_area.sum() == pytest.approx(900.0, rel=1e-12)
    assert mesh.n_nodes - mesh.n_edges + mesh.n_faces == 0


def test_sphere_closes():
    mesh = globe()
    whole = 4 * np.pi * mesh.radius**2
    assert mesh.n_nodes - mesh.n_edges + mesh.n_faces == 2
    for areas in (mesh.face_area, mesh.node_area, mesh.kite_area):
        assert areas.sum() == pytest.approx(whole, rel=1e-13)


def test_dual_areas_on_the_sphere_are_girard_triangles():
    mesh = globe()
    a, b, c = (mesh.face_xyz[mesh.node_faces[:, k]] / mesh.radius for k in range(3))
    assert mesh.node_area / mesh.radius**2 == pytest.approx(spherical_triangle(a, b, c), abs=1e-12)


def test_cells_on_the_sphere_are_those_of_an_independent_code():
    mesh = globe()
    theirs = SphericalVoronoi(mesh.face_xyz / mesh.radius)
    assert mesh.face_area / mesh.radius**2 == pytest.approx(theirs.calculate_areas(), rel=1e-9)
    assert (mesh.face_nodes >= 0).sum(axis=1).tolist() == [len(region) for region in theirs.regions]


def test_a_region_by_projection_equals_the_same_cells_of_the_globe_by_hull():
    points = bisected_icosahedron(4)
    pole = np.array([0.3, -0.5, 0.6]) / np.linalg.norm([0.3, -0.5, 0.6])
    height = points @ pole
    wet = height > np.cos(np.radians(35))
    near = height > np.cos(np.radians(45))
    globe_part = sphere_mesh(points, wet, 6.4e6)
    region = sphere_mesh(points[near] * 7.0, wet[near], 6.4e6)
    check_invariants(region)
    assert np.array_equal(globe_part.edge_faces[: globe_part.n_inner], region.edge_faces[: region.n_inner])
    assert np.array_equal(globe_part.node_faces, region.node_faces)
    for name in ("edge_length", "edge_distance", "face_area", "node_area", "kite_area", "node_xyz"):
        assert getattr(region, name) == pytest.approx(getattr(globe_part, name), rel=1e-9, abs=1e-3)


def test_small_cells_far_from_the_origin_keep_their_digits():
    # 100 m cells on the Earth, and on a plane 5000 km from its origin.
    points, wet = lake_points(1, 30, 100.0)
    turn = np.linalg.qr(np.random.default_rng(0).normal(size=(3, 3)))[0]
    turn *= np.linalg.det(turn)
    earth = sphere_mesh(np.column_stack([np.full(len(points), 6.371e6), points]) @ turn.T, wet, 6.371e6)
    plane = plane_mesh(points + (4e6, -3e6), wet)
    check_invariants(earth)
    check_invariants(plane)
    flat = plane_mesh(points, wet)
    assert np.array_equal(earth.edge_faces[: earth.n_inner], flat.edge_faces[: flat.n_inner])
    assert plane.face_area == pytest.approx(flat.face_area, rel=1e-8)
    # A 5 km basin is flat to (5/6371)^2.
    assert earth.face_area == pytest.approx(flat.face_area, rel=2e-6)


def test_order_of_edges_and_nodes():
    mesh = lake()
    larger, smaller = mesh.edge_faces[: mesh.n_inner].max(axis=1), mesh.edge_faces[: mesh.n_inner].min(axis=1)
    assert np.all(np.diff(larger.astype(np.int64) * mesh.n_faces + smaller) > 0)
    assert np.all(mesh.edge_faces[: mesh.n_inner, 0] < mesh.edge_faces[: mesh.n_inner, 1])
    assert np.all(np.diff(mesh.edge_faces[mesh.n_inner :, 0]) >= 0)
    first = np.where(mesh.node_faces >= 0, mesh.node_faces, mesh.n_faces).min(axis=1)
    assert np.all(np.diff(first) >= 0)
    assert all(getattr(mesh, name).dtype == np.int32 for name in ("edge_faces", "face_nodes", "node_faces", "edge_id"))


def test_coast_distance_is_twice_the_way_to_the_edge():
    mesh = lake()
    face = mesh.edge_faces[mesh.n_inner :, 0]
    way = ((mesh.edge_xyz[mesh.n_inner :] - mesh.face_xyz[face]) * mesh.edge_normal[mesh.n_inner :]).sum(axis=1)
    assert 2 * way == pytest.approx(mesh.edge_distance[mesh.n_inner :], rel=1e-10)


def test_with_depth():
    mesh = torus()
    assert np.all(with_depth(mesh, 12.5).depth == 12.5)
    depth = np.full(mesh.n_faces, 3.0)
    depth[7] = np.nan
    with pytest.raises(MeshError, match="face 7 is nan"):
        with_depth(mesh, depth)


SQUARE = np.stack(np.meshgrid(np.arange(5.0), np.arange(5.0)), axis=-1).reshape(-1, 2)
CAP = bisected_icosahedron(3)[bisected_icosahedron(3)[:, 2] > 0]


@pytest.mark.parametrize(
    ("build", "message"),
    [
        (lambda: plane_mesh(np.random.default_rng(0).random((30, 2)), np.ones(30, dtype=bool)), "unbounded: surround"),
        (lambda: sphere_mesh(CAP, np.ones(len(CAP), dtype=bool), 1.0), "unbounded: surround"),
        (lambda: plane_mesh(np.column_stack([np.arange(9.0), np.zeros(9)]), np.ones(9, dtype=bool)), "on one line"),
        (lambda: plane_mesh(np.vstack([SQUARE, SQUARE[7]]), np.ones(26, dtype=bool)), "coincide to round-off"),
        (lambda: plane_mesh(np.where(SQUARE == 3, np.nan, SQUARE), np.ones(25, dtype=bool)), "point 3 is .*finite"),
        (lambda: plane_mesh(SQUARE, np.zeros(25, dtype=bool)), "no point is wet"),
        (lambda: plane_mesh(SQUARE, np.ones(24, dtype=bool)), r"needed is \(25,\) bool"),
        (lambda: plane_mesh(SQUARE[:4] * 0.1, np.ones(4, dtype=bool), (1.0, 1.0)), "period"),
        (lambda: sphere_mesh(SQUARE, np.ones(25, dtype=bool), 1.0), r"needed is \(n, 3\)"),
        (lambda: sphere_mesh(np.zeros((5, 3)), np.ones(5, dtype=bool), 1.0), "centre of the sphere"),
    ],
)
def test_what_cannot_be_built_is_refused(build, message):
    with pytest.raises(MeshError, match=message):
        build()


def test_points_on_one_circle_are_refused():
    wet = np.all((SQUARE > 0) & (SQUARE < 4), axis=1)
    with pytest.raises(MeshError, match="l/d"):
        check_invariants(plane_mesh(SQUARE, wet))
