"""Facts about who owns what."""

import numpy as np
import pytest

from swe.errors import InputError
from swe.mesh.lattice import hexagons_in
from swe.parallel.partition import LEAST_FACES, block, neighbours, partition, rank_of
from swe.parallel.subdomain import subdomains


@pytest.fixture(scope="module")
def mesh():
    return hexagons_in(40e3, 30e3, 1e3)


@pytest.mark.parametrize("count, ranks", [(1, 1), (4, 3), (7, 2), (8, 8), (10, 4)])
def test_every_subdomain_has_one_rank_and_blocks_are_contiguous(count, ranks):
    blocks = [list(block(rank, count, ranks)) for rank in range(ranks)]
    assert sum(blocks, []) == list(range(count))
    assert all(rank_of(index, count, ranks) == rank for rank, part in enumerate(blocks) for index in part)
    assert max(map(len, blocks)) - min(map(len, blocks)) <= 1


@pytest.mark.parametrize("count", [1, 3, 8])
def test_partition_is_balanced_by_work_and_deterministic(mesh, count):
    owner = partition(mesh, count)
    work = np.bincount(owner, weights=np.diff(neighbours(mesh).indptr), minlength=count)
    assert work.min() > 0
    assert work.max() < 1.1 * work.mean()
    assert np.array_equal(owner, partition(mesh, count))


def test_more_subdomains_than_faces_allow_is_refused_with_the_allowed_number(mesh):
    most = mesh.n_faces // LEAST_FACES
    with pytest.raises(InputError, match=f"allowed are 1 to {most}"):
        partition(mesh, most + 1)


@pytest.mark.parametrize("overlap", [1, 2, 4])
def test_subdomains_cover_own_once_and_know_their_partners(mesh, overlap):
    owner = partition(mesh, 5)
    parts = list(subdomains(mesh, owner, overlap))
    faces = np.concatenate([p.mesh.face_id[: p.n_owned] for p in parts])
    edges = np.concatenate([p.mesh.edge_id[p.owned_edges] for p in parts])
    nodes = np.concatenate([p.mesh.node_id[p.owned_nodes] for p in parts])
    assert np.array_equal(np.sort(faces), np.arange(mesh.n_faces))
    assert np.array_equal(np.sort(edges), np.arange(mesh.n_inner))
    assert np.array_equal(np.sort(nodes), np.arange(mesh.n_nodes))
    for p in parts:
        inner = p.mesh.edge_faces[: p.mesh.n_inner].max(axis=1)
        assert np.all(inner[: p.ms] < p.mf) and np.all(inner[p.ms :] >= p.mf)
        for source, where in p.take:
            given = dict(parts[source].give)[p.index]
            assert np.array_equal(parts[source].mesh.edge_id[given], p.mesh.edge_id[where])
            assert np.isin(given, parts[source].owned_edges).all()
        for source, where in p.take_faces:
            given = dict(parts[source].give_faces)[p.index]
            assert np.array_equal(parts[source].mesh.face_id[given], p.mesh.face_id[where])
            assert given.max() < parts[source].n_owned


def test_overlap_grows_by_whole_layers(mesh):
    owner = partition(mesh, 4)
    graph = neighbours(mesh)
    narrow, wide = (next(iter(subdomains(mesh, owner, layers))) for layers in (2, 3))
    grown = np.unique(graph[narrow.mesh.face_id[: narrow.mf]].indices)
    assert np.array_equal(np.union1d(grown, narrow.mesh.face_id[: narrow.mf]), np.sort(wide.mesh.face_id[: wide.mf]))


def test_no_overlap_is_refused(mesh):
    with pytest.raises(InputError, match="at least 1"):
        next(iter(subdomains(mesh, partition(mesh, 2), 0)))
