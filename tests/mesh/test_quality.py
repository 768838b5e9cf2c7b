"""Numbers of exact meshes, and meshes broken on purpose that must be refused with the face named.

Sources: elementary geometry of the regular hexagon; the refusals are this project's own rules (swe/mesh/invariants.py).
"""

import re
from dataclasses import replace

import numpy as np
import pytest
from lakes import globe, lake, torus

from swe.errors import MeshError
from swe.mesh.lattice import hexagons_in, icosahedral, periodic_hexagons
from swe.mesh.quality import check_invariants, quality
from swe.mesh.restrict import restrict
from swe.mesh.topology import CUT, with_depth


def test_regular_hexagons_have_the_exact_numbers():
    found = quality(with_depth(periodic_hexagons(6, 4, 1e3), 40.0), 10.0)
    assert (found.faces, found.edges, found.nodes, found.waters) == (24, 72, 48, 1)
    assert found.area == pytest.approx(24 * np.sqrt(3) / 2 * 1e6)
    assert (found.spacing_smallest, found.spacing_median, found.spacing_largest) == pytest.approx((1e3, 1e3, 1e3))
    assert found.angle_smallest == pytest.approx(60.0)
    assert (found.ratio_smallest, found.ratio_largest) == pytest.approx((1 / np.sqrt(3), 1 / np.sqrt(3)))
    assert found.evenness_smallest == pytest.approx(1.0)
    assert found.offset_largest < 1e-12
    assert found.growth_largest == pytest.approx(1.0)
    assert found.travel_smallest == pytest.approx(1e3 / np.sqrt(10.0 * 40.0))


def test_shortest_travel_time_names_the_deep_face():
    mesh = lake()
    depth = np.full(mesh.n_faces, 10.0)
    depth[123] = 4000.0
    found = quality(with_depth(mesh, depth), 9.81)
    assert found.travel_face == 123
    edges = mesh.face_edges[123][mesh.face_edges[123] >= 0]
    shortest = mesh.edge_distance[edges[edges < mesh.n_inner]].min()
    assert found.travel_smallest == pytest.approx(shortest / np.sqrt(9.81 * 2005.0))
    x, y, _ = mesh.face_xyz[123]
    assert found.travel_place == f"x {x:.6g} m, y {y:.6g} m"
    assert any(f"face 123, x {x:.6g} m" in line for line in found.lines())


def test_relaxed_meshes_score_better_than_random_ones():
    random, relaxed = quality(lake(sweeps=0), 9.81), quality(lake(sweeps=30), 9.81)
    assert relaxed.angle_smallest > 2 * random.angle_smallest
    assert relaxed.offset_median < 0.2 * random.offset_median
    assert relaxed.growth_largest < random.growth_largest
    assert random.travel_smallest == np.inf  # no depth yet


def test_separate_waters_are_counted():
    mesh = hexagons_in(10.0, 10.0, 1.0)
    x = mesh.face_xyz[:, 0]
    part = restrict(mesh, np.flatnonzero((x < 3) | (x > 7)))
    check_invariants(part)
    assert quality(part, 9.81).waters == 2


def test_places_on_the_sphere_are_degrees():
    found = quality(icosahedral(2, 6.4e6, 0), 9.81)
    assert re.fullmatch(r"longitude -?\d+\.\d{5}, latitude -?\d+\.\d{5}", found.growth_place)


def test_one_face_alone_has_no_spacing():
    found = quality(restrict(torus(), np.array([5])), 9.81)
    assert np.isnan(found.spacing_median) and found.growth_face == -1
    assert len(found.lines()) == 14


def test_random_points_are_refused_and_the_worst_face_named():
    mesh = torus()
    worst = np.unravel_index(mesh.kite_area.argmin(), mesh.kite_area.shape)
    face = mesh.node_faces[worst]
    assert mesh.kite_area[worst] < 0
    with pytest.raises(MeshError, match=rf"face {face} \(x .* the area of a kite is {mesh.kite_area[worst]:.6g} m2; allowed is"):
        check_invariants(mesh)


def changed(mesh, name, index, value):
    array = getattr(mesh, name).copy()
    array[index] = value(array[index]) if callable(value) else value
    return replace(mesh, **{name: array})


def grow(factor):
    return lambda old: old * factor


BREAKS = [
    ("edge_length", 40, grow(1 + 1e-6), "difference of l and the distance of the nodes", "edge"),
    ("edge_length", 40, grow(-1), "l/d", "edge"),
    ("edge_length", 40, grow(1e-9), "more than three points lie on one circle", "edge"),
    ("edge_distance", 40, grow(1 - 1e-6), "difference of d and the distance of two centres", "edge"),
    ("edge_distance", 40, 0.0, "distance d across an edge is 0 m", "edge"),
    ("edge_normal", 40, grow(1 + 1e-6), r"\| \|n\| - 1 \|", "edge"),
    ("edge_normal", 40, grow(-1), r"\|t - k x n\|", "edge"),
    ("edge_tangent", 40, grow(-1), r"\|t - k x n\|", "edge"),
    ("face_area", 7, grow(1 + 1e-6), "difference of area and sum of kites", "face"),
    ("face_area", 7, np.nan, "the area is nan m2; allowed is a finite number > 0", "face"),
    ("face_area", 7, -3.0, "the area is -3 m2", "face"),
    ("node_area", 30, grow(1 + 1e-6), "difference of dual area and sum of kites", "node"),
    ("node_area", 30, 0.0, "dual area of a node is 0", "node"),
    ("face_edges", 7, lambda row: np.roll(row, 1), "edges out of their round is 6", "face"),
    ("face_nodes", 7, lambda row: row[::-1], "edges out of their round is", "face"),
    ("edge_nodes", 40, lambda row: row[::-1], "edges out of their round is", None),
    ("node_faces", 30, lambda row: np.roll(row, 1), "difference of area and sum of kites|kite", None),
    ("node_xyz", 30, grow(1 + 1e-6), "difference of l and the distance of the nodes", None),
    ("node_xyz", 30, lambda x: x + 10 * np.cross(x, [0.6, 0.0, 0.8]) / 6.4e6, "cosine between n and an edge", None),
    ("face_xyz", 7, grow(1 + 1e-5), "angle between n and the line of centres", None),
]


@pytest.mark.parametrize(("name", "index", "value", "message", "owner"), BREAKS)
def test_a_broken_mesh_is_refused_and_its_face_named(name, index, value, message, owner):
    mesh = icosahedral(2, 6.4e6, 10)
    check_invariants(mesh)
    if owner == "face" or name == "face_xyz":
        assert np.all(mesh.face_edges[index] >= 0)  # a hexagon
    broken = changed(mesh, name, index, value)
    with pytest.raises(MeshError, match=message) as caught:
        check_invariants(broken)
    named = re.search(r"face (\d+) \(longitude", str(caught.value))
    assert named
    if owner:
        known = {"face": [index], "edge": mesh.edge_faces[index], "node": mesh.node_faces[index]}[owner]
        assert int(named.group(1)) in known
    assert str(caught.value).count(";") >= 2  # found; allowed; what to do


@pytest.mark.parametrize(
    ("name", "index", "value", "message"),
    [
        ("edge_faces", (3, 0), 10**6, "edge_faces runs from 0 to 1000000"),
        ("edge_faces", (3, 1), -1, "edge 3 has faces"),
        ("node_faces", (3, 1), -2, "node_faces runs from -2"),
        ("edge_nodes", (3, 1), -1, "edge_nodes runs from -1"),
        ("edge_xyz", (3, 1), np.inf, "edge_xyz holds numbers that are not finite"),
        ("depth", 3, np.nan, "depth holds numbers that are not finite"),
    ],
)
def test_broken_arrays_are_refused(name, index, value, message):
    with pytest.raises(MeshError, match=message):
        check_invariants(changed(icosahedral(1, 1.0, 0), name, index, value))


def test_wrong_shapes_and_kinds_are_refused():
    mesh = hexagons_in(5.0, 5.0, 1.0)
    with pytest.raises(MeshError, match=r"depth has shape \(3,\)"):
        check_invariants(replace(mesh, depth=np.zeros(3)))
    with pytest.raises(MeshError, match="border_kind holds"):
        check_invariants(changed(mesh, "border_kind", 0, 9))
    turned = changed(mesh, "edge_faces", mesh.n_inner, lambda row: row[::-1])
    with pytest.raises(MeshError, match="its kind does not allow"):
        check_invariants(turned)
    with pytest.raises(MeshError, match="out of their round"):
        check_invariants(changed(turned, "border_kind", 0, CUT))


def test_a_mesh_cut_open_breaks_euler():
    # An edge listed twice over two nodes more: counts no longer fit.
    mesh = hexagons_in(5.0, 5.0, 1.0)
    extra = {
        name: np.concatenate([getattr(mesh, name), getattr(mesh, name)[-1:]])
        for name in ("node_xyz", "node_area", "kite_area", "node_faces", "node_coast", "node_id")
    }
    with pytest.raises(MeshError, match="do not list a node|V - E"):
        check_invariants(replace(mesh, **extra))


def test_clockwise_faces_are_refused():
    mesh = hexagons_in(5.0, 5.0, 1.0)
    mirrored = {name: getattr(mesh, name) * (-1.0, 1.0, 1.0) for name in ("face_xyz", "node_xyz", "edge_xyz")}
    with pytest.raises(MeshError, match="counter-clockwise"):
        check_invariants(replace(mesh, **mirrored))


@pytest.mark.parametrize("build", [lake, lambda: hexagons_in(9e3, 7e3, 1e3), lambda: icosahedral(3, 6.4e6, 5)])
def test_good_meshes_pass(build):
    check_invariants(build())


def test_invariants_do_not_depend_on_the_unit_of_length():
    # The same lake in cells of 1 m and of 1000 km.
    for scale in (1.0, 1e6):
        check_invariants(lake(scale=scale))
    with pytest.raises(MeshError):
        check_invariants(globe())  # random points
