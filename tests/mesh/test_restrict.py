"""A part of a mesh is the parent's geometry, renumbered. Source: the conventions of swe/mesh/topology.py."""

from dataclasses import fields

import numpy as np
import pytest
from lakes import globe, lake, torus

from swe.errors import MeshError
from swe.mesh.quality import check_invariants
from swe.mesh.restrict import restrict
from swe.mesh.topology import COAST, CUT, displacement, with_depth

MESHES = {"lake": lake, "torus": torus, "globe": globe}


@pytest.fixture(params=sorted(MESHES))
def mesh(request):
    whole = MESHES[request.param]()
    return with_depth(whole, np.arange(whole.n_faces) + 1.0)


def some_faces(mesh, count, seed=0):
    return np.random.default_rng(seed).permutation(mesh.n_faces)[:count]


def same(one, other):
    """Names of the fields that differ."""
    pairs = ((item.name, getattr(one, item.name), getattr(other, item.name)) for item in fields(one))
    return [name for name, a, b in pairs if not (np.array_equal(a, b) and getattr(a, "dtype", 0) == getattr(b, "dtype", 0))]


def ids(table, index):
    """Whole-mesh numbers of local ones, -1 kept."""
    return np.where(index >= 0, table[np.maximum(index, 0)], -1)


def test_all_faces_in_order_are_the_mesh_itself(mesh):
    part = restrict(mesh, np.arange(mesh.n_faces))
    assert same(mesh, part) == []
    assert part.checksum() == mesh.checksum()


def test_part_of_a_part_is_a_part_of_the_whole(mesh):
    faces = some_faces(mesh, 200)
    chosen = some_faces(mesh, 500, seed=1)
    chosen = chosen[chosen < 200]
    assert same(restrict(restrict(mesh, faces), chosen), restrict(mesh, faces[chosen])) == []


def test_geometry_is_the_parents(mesh):
    faces = some_faces(mesh, 150)
    part = restrict(mesh, faces)
    assert np.array_equal(part.face_id, faces)
    for prefix, names in {
        "face": ("face_xyz", "face_area", "depth"),
        "edge": ("edge_xyz", "edge_normal", "edge_tangent", "edge_length", "edge_distance"),
        "node": ("node_xyz", "node_area", "node_coast"),
    }.items():
        for name in names:
            assert np.array_equal(getattr(part, name), getattr(mesh, name)[getattr(part, f"{prefix}_id")])


def test_connectivity_is_the_parents(mesh):
    faces = some_faces(mesh, 150)
    part = restrict(mesh, faces)
    assert np.array_equal(ids(part.edge_id, part.face_edges), mesh.face_edges[faces])
    assert np.array_equal(ids(part.node_id, part.face_nodes), mesh.face_nodes[faces])
    assert np.array_equal(ids(part.node_id, part.edge_nodes), mesh.edge_nodes[part.edge_id])
    for name, own in (("edge_faces", part.edge_id), ("node_faces", part.node_id)):
        theirs = getattr(mesh, name)[own]
        assert np.array_equal(ids(part.face_id, getattr(part, name)), np.where(np.isin(theirs, faces), theirs, -1))
    assert np.array_equal(np.sort(part.edge_id), np.flatnonzero(np.isin(mesh.edge_faces, faces).any(axis=1)))
    assert np.array_equal(np.sort(part.node_id), np.flatnonzero(np.isin(mesh.node_faces, faces).any(axis=1)))


def test_kites_of_missing_faces_are_zero(mesh):
    part = restrict(mesh, some_faces(mesh, 150))
    held = part.node_faces >= 0
    assert np.all(part.kite_area[~held] == 0)
    assert np.array_equal(part.kite_area[held], mesh.kite_area[part.node_id][held])
    assert not held.all()


@pytest.mark.parametrize("count", [1, 2, 17, 60, 149])
def test_edges_and_nodes_of_the_first_faces_are_prefixes(mesh, count):
    part = restrict(mesh, some_faces(mesh, 150))
    first = restrict(part, np.arange(count))
    assert np.array_equal(first.edge_id[: first.n_inner], part.edge_id[: first.n_inner])
    assert np.array_equal(first.edge_faces[: first.n_inner], part.edge_faces[: first.n_inner])
    assert np.array_equal(first.node_id, part.node_id[: first.n_nodes])
    beyond = part.edge_faces[first.n_inner : part.n_inner]
    assert np.all(beyond.max(axis=1) >= count)


def test_border_kinds_and_directions():
    mesh = lake()
    part = restrict(mesh, np.flatnonzero(mesh.face_xyz[:, 0] < 2e4)[::-1])
    border, kind = part.edge_faces[part.n_inner :], part.border_kind
    was_coast = part.edge_id[part.n_inner :] >= mesh.n_inner
    assert np.array_equal(kind, np.where(was_coast, COAST, CUT))
    assert np.all(border[kind == COAST, 0] >= 0)
    # The face that is left stands in either column, and n points out of column 0 and into column 1.
    cut = border[kind == CUT]
    assert (cut[:, 0] < 0).any() and (cut[:, 1] < 0).any() and np.all((cut >= 0).sum(axis=1) == 1)
    face = np.where(border[:, 0] >= 0, border[:, 0], border[:, 1])
    out = displacement(part, part.face_xyz[face], part.edge_xyz[part.n_inner :])
    way = (out * part.edge_normal[part.n_inner :]).sum(axis=1)
    assert np.all(np.where(border[:, 0] >= 0, way, -way) > 0)


def test_parts_pass_the_invariants():
    mesh = lake()
    for seed, count in ((0, 1), (1, 40), (2, mesh.n_faces // 2)):
        check_invariants(restrict(mesh, some_faces(mesh, count, seed)))


@pytest.mark.parametrize(
    ("faces", "message"),
    [
        ([0, 3, 3], "face 3 is listed 2 times"),
        ([-1, 2], "from -1 to 2"),
        ([0, 10**6], "allowed are 0 to"),
        ([], "needed"),
        ([0.5], "needed"),
    ],
)
def test_wrong_lists_are_refused(faces, message):
    with pytest.raises(MeshError, match=message):
        restrict(torus(), np.array(faces))
