"""Lloyd's sweep: centroids, fixed points, falling energy, spacing that follows the density.

Sources: Du, Faber & Gunzburger 1999, SIAM Rev. 41, 637 (the energy falls with every sweep; h ~ rho^(-1/4)); from memory.
"""

import numpy as np
import pytest
import shapely
from scipy.spatial import SphericalVoronoi, Voronoi, cKDTree

from swe.errors import MeshError
from swe.mesh.lattice import bisected_icosahedron
from swe.mesh.lloyd import lloyd_plane, lloyd_sphere
from swe.mesh.voronoi import plane_mesh


def none(points):
    return np.zeros(len(points), dtype=bool)


def test_new_points_are_the_centroids_of_an_independent_voronoi_code():
    points = np.random.default_rng(0).random((400, 2))
    inside = np.all((points > 0.2) & (points < 0.8), axis=1)
    moved = lloyd_plane(points, ~inside)
    found = Voronoi(points)
    for i in np.flatnonzero(inside):
        cell = shapely.convex_hull(shapely.MultiPoint(found.vertices[found.regions[found.point_region[i]]]))
        assert moved[i] == pytest.approx(shapely.get_coordinates(cell.centroid)[0], abs=1e-10)
    assert np.array_equal(moved[~inside], points[~inside])


def test_density_draws_towards_it():
    # A cell of the unit square lattice (moved a little, so that no four points are on a circle) under rho = 1 + x/10
    # about its point: the centroid is int x rho / int rho = (1/10)(1/12) to first order.
    rng = np.random.default_rng(0)
    x, y = (axis.ravel() - 3.0 for axis in np.meshgrid(np.arange(7.0), np.arange(7.0)))
    points = np.column_stack([x, y]) + 1e-7 * rng.random((49, 2))
    moved = lloyd_plane(points, none(points), 1 + points[:, 0] / 10)
    assert moved[24] - points[24] == pytest.approx([1 / 120, 0], abs=1e-3)
    assert moved[24, 0] - points[24, 0] > 0.007


def test_points_on_the_hull_stay():
    points = np.random.default_rng(1).random((60, 2))
    hull = np.unique(Voronoi(points).ridge_points[[-1 in r for r in Voronoi(points).ridge_vertices]])
    assert np.array_equal(lloyd_plane(points, none(points))[hull], points[hull])


def test_energy_falls_with_every_sweep():
    rng = np.random.default_rng(2)
    points = rng.random((120, 2))
    sample = rng.random((40000, 2))
    energy = []
    for _ in range(12):
        energy.append(np.mean(cKDTree(points, boxsize=1.0).query(sample)[0] ** 2))
        points = lloyd_plane(points, none(points), period=(1.0, 1.0))
    assert np.all(np.diff(energy) < 0)
    assert energy[-1] < 0.75 * energy[0]


def test_spacing_follows_the_density():
    # Spacing wanted: 1 to 2 across the torus. Points start with about the right density, as a generator would.
    rng = np.random.default_rng(3)

    def wanted(p):
        return 1.5 + 0.5 * np.sin(2 * np.pi * p[:, 0])

    points = rng.random((4000, 2))
    points = points[rng.random(len(points)) < 0.25 * wanted(points) ** -2]
    for _ in range(80):
        points = lloyd_plane(points, none(points), wanted(points) ** -4, (1.0, 1.0))
    mesh = plane_mesh(points, ~none(points), (1.0, 1.0))
    ratio = np.sqrt(mesh.face_area) / wanted(mesh.face_xyz)
    slope = np.polyfit(np.log(wanted(mesh.face_xyz)), np.log(np.sqrt(mesh.face_area)), 1)[0]
    assert slope == pytest.approx(1.0, abs=0.15)
    assert np.std(ratio / ratio.mean()) < 0.1


def test_regular_points_stay():
    i, j = np.meshgrid(np.arange(8), np.arange(6))
    points = np.column_stack([(i + (j % 2) / 2).ravel(), (j * np.sqrt(3) / 2).ravel()]) + 0.1
    assert lloyd_plane(points, none(points), period=(8.0, 3 * np.sqrt(3))) == pytest.approx(points, abs=1e-12)
    corners = bisected_icosahedron(1)
    assert lloyd_sphere(corners, none(corners)) == pytest.approx(corners, abs=1e-12)


def test_sphere_moves_towards_the_centroid_of_an_independent_code():
    points = bisected_icosahedron(4)
    points += 0.01 * np.random.default_rng(4).normal(size=points.shape)
    points /= np.linalg.norm(points, axis=1, keepdims=True)
    moved = lloyd_sphere(points, none(points))
    found = SphericalVoronoi(points)
    found.sort_vertices_of_regions()
    for i in range(0, len(points), 50):
        # The integral of x over a spherical polygon is half the sum of (angle of side) times (pole of side).
        p = found.vertices[found.regions[i]]
        q = np.roll(p, -1, axis=0)
        pole = np.cross(p, q)
        size = np.linalg.norm(pole, axis=1)
        mean = (np.arcsin(size)[:, None] * pole / size[:, None]).sum(axis=0)
        mean *= np.sign(mean @ points[i]) / np.linalg.norm(mean)
        assert np.linalg.norm(moved[i] - mean) < 0.02 * np.linalg.norm(points[i] - mean) + 1e-5


def test_wrong_masks_and_densities_are_refused():
    points = np.random.default_rng(5).random((30, 2))
    with pytest.raises(MeshError, match=r"needed is \(30,\) bool"):
        lloyd_plane(points, np.zeros(29, dtype=bool))
    with pytest.raises(MeshError, match="finite and positive"):
        lloyd_plane(points, none(points), np.zeros(30))
