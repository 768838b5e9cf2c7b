"""Small meshes on which the operators are tested: regular, irregular, with coast and island, on the sphere."""

import numpy as np

from swe.mesh.lattice import hexagons_in, periodic_hexagons
from swe.mesh.topology import with_depth
from swe.mesh.voronoi import plane_mesh, sphere_mesh

RADIUS = 6.37122e6


def periodic_irregular(nx=8, ny=8, spacing=1000.0, shake=0.15, seed=1):
    """Points of a regular lattice moved by up to `shake` spacings: a doubly periodic plane of unequal polygons."""
    rng = np.random.default_rng(seed)
    i, j = np.meshgrid(np.arange(nx), np.arange(ny))
    points = np.column_stack([((i + (j % 2) / 2) * spacing).ravel(), (j * spacing * np.sqrt(3) / 2).ravel()])
    points += rng.uniform(-shake, shake, points.shape) * spacing
    return plane_mesh(points, np.ones(len(points), dtype=bool), (nx * spacing, ny * spacing * np.sqrt(3) / 2))


def lake(n=12, spacing=1000.0, shake=0.12, seed=2):
    """An irregular lake with a ragged coast and an island of three or so dry cells."""
    rng = np.random.default_rng(seed)
    i, j = np.meshgrid(np.arange(n), np.arange(n))
    points = np.column_stack([((i + (j % 2) / 2) * spacing).ravel(), (j * spacing * np.sqrt(3) / 2).ravel()])
    points += rng.uniform(-shake, shake, points.shape) * spacing
    middle = points.mean(axis=0)
    away = np.hypot(*(points - middle).T)
    wet = (away < 0.33 * n * spacing) & (away > 0.9 * spacing)
    return plane_mesh(points, wet)


def spread_points(n):
    """n nearly even directions on the sphere, by turning through the golden angle."""
    k = np.arange(n) + 0.5
    z = 1.0 - 2.0 * k / n
    angle = np.pi * (1.0 + np.sqrt(5.0)) * k
    ring = np.sqrt(1.0 - z**2)
    return np.column_stack([ring * np.cos(angle), ring * np.sin(angle), z])


def globe(n=122):
    return sphere_mesh(spread_points(n), np.ones(n, dtype=bool), RADIUS)


def sphere_sea(n=260):
    """A third of the sphere with a ragged coast and an island."""
    points = spread_points(n)
    wet = (points[:, 0] > 0.1) & (points[:, 0] < 0.97)
    return sphere_mesh(points, wet, RADIUS)


def rough(mesh, mean=100.0, amplitude=60.0, seed=5):
    """The mesh with a random depth between mean - amplitude and mean + amplitude."""
    return with_depth(mesh, mean + amplitude * np.random.default_rng(seed).uniform(-1, 1, mesh.n_faces))


MESHES = {
    "regular": lambda: periodic_hexagons(6, 6, 1000.0),
    "irregular": periodic_irregular,
    "rectangle": lambda: hexagons_in(8000.0, 6000.0, 1000.0),
    "lake": lake,
    "globe": globe,
    "sphere sea": sphere_sea,
}


def part_of(mesh, layers=3):
    """Faces within `layers` neighbours of face 5, from the inside out; the number of those that keep all neighbours."""
    rank = np.full(mesh.n_faces, -1)
    rank[5] = 0
    pairs = mesh.edge_faces[: mesh.n_inner]
    for layer in range(1, layers + 1):
        for first, second in (pairs.T, pairs[:, ::-1].T):
            near = second[(rank[first] == layer - 1) & (rank[second] < 0)]
            rank[near] = layer
    faces = np.flatnonzero(rank >= 0)
    faces = faces[np.argsort(rank[faces], kind="stable")]
    return faces, np.count_nonzero((rank >= 0) & (rank < layers))
