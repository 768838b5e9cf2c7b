"""Irregular meshes that the tests of the mesh room share: an invented lake with islands, a torus, a globe."""

from functools import cache

import numpy as np
import shapely

from swe.mesh.lloyd import lloyd_plane
from swe.mesh.voronoi import plane_mesh, sphere_mesh

LAKE = shapely.Polygon(
    [(0, 0), (30, -4), (44, 10), (40, 30), (22, 26), (10, 34), (-3, 18)],
    holes=[[(10, 10), (18, 9), (17, 16), (11, 17)], [(28, 8), (35, 12), (30, 17)]],
)
"""An invented lake with two islands."""


@cache
def lake_points(seed, sweeps, scale=1.0, origin=(0.0, 0.0)):
    """Random points, denser in the west (spacing 0.8 to 2.4), and which of them are wet."""

    def spacing(p):
        return 0.8 + 1.6 * np.clip((p[:, 0] + 8) / 57, 0, 1)

    rng = np.random.default_rng(seed)
    points = rng.uniform((-8, -10), (49, 40), (12000, 2))
    points = points[rng.random(len(points)) < 0.3 * spacing(points) ** -2]
    rim = np.any((points < (-5, -7)) | (points > (46, 37)), axis=1)
    for _ in range(sweeps):
        points = lloyd_plane(points, rim, spacing(points) ** -4)
    wet = shapely.contains_xy(LAKE, points)
    return points * scale + np.array(origin), wet


@cache
def lake(seed=1, sweeps=30, scale=1000.0, origin=(0.0, 0.0)):
    return plane_mesh(*lake_points(seed, sweeps, scale, origin))


@cache
def torus(seed=2, count=300):
    points = np.random.default_rng(seed).random((count, 2)) * (30.0, 20.0)
    return plane_mesh(points, np.ones(count, dtype=bool), (30.0, 20.0))


@cache
def globe(seed=3, count=500):
    return sphere_mesh(np.random.default_rng(seed).normal(size=(count, 3)), np.ones(count, dtype=bool), 6.4e6)
