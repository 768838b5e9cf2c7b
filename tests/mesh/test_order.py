"""Hilbert's curve by its own property: it visits every cell once and each step is to a neighbour.

Source: Hilbert 1891, Math. Ann. 38, 459 (from memory).
"""

import numpy as np
import pytest
from lakes import globe, lake

from swe.errors import MeshError
from swe.mesh.order import curve_order, hilbert_index
from swe.mesh.restrict import restrict


@pytest.mark.parametrize(("dimensions", "bits"), [(2, 1), (2, 6), (3, 1), (3, 4)])
def test_the_curve_visits_every_cell_by_unit_steps(dimensions, bits):
    cells = np.stack(np.meshgrid(*[np.arange(2**bits)] * dimensions, indexing="ij"), axis=-1).reshape(-1, dimensions)
    index = hilbert_index(cells, bits)
    assert np.array_equal(np.sort(index), np.arange(len(cells)))
    assert np.all(np.abs(np.diff(cells[np.argsort(index)], axis=0)).sum(axis=1) == 1)


@pytest.mark.parametrize("build", [lake, globe])
def test_neighbours_get_near_numbers(build):
    mesh = build()
    xyz = mesh.face_xyz if mesh.spherical else mesh.face_xyz[:, :2]

    def near(part):
        step = np.abs(np.diff(part.edge_faces[: part.n_inner].astype(int), axis=1))
        return np.mean(step <= 20)

    order = curve_order(xyz)
    assert np.array_equal(np.sort(order), np.arange(mesh.n_faces))
    shuffled = np.random.default_rng(0).permutation(mesh.n_faces)
    assert near(restrict(mesh, order)) > 0.6
    assert near(restrict(mesh, shuffled)) < 0.1


def test_a_range_of_numbers_is_a_compact_piece():
    # The border of 64 consecutive faces of 1024 on a square: a compact piece has about 4 sqrt(64) sides, strips more.
    x, y = np.meshgrid(np.arange(32.0), np.arange(32.0))
    points = np.column_stack([x.ravel(), y.ravel()])
    piece = points[curve_order(points)][256:320]
    assert np.ptp(piece, axis=0).max() <= 16


def test_order_is_stable_and_takes_any_input():
    assert curve_order(np.ones((5, 2))).tolist() == [0, 1, 2, 3, 4]
    assert curve_order(np.zeros((0, 3))).size == 0
    with pytest.raises(MeshError, match="needed is"):
        curve_order(np.zeros(5))
