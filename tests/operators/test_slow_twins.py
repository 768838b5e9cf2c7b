"""Every operator equals its slow twin, which loops straight over the formula."""

import numpy as np
import pytest
from operators.operator_meshes import MESHES

from swe.operators import build, reference

SMALL = ["regular", "irregular", "rectangle", "lake", "sphere sea"]


@pytest.fixture(params=SMALL)
def mesh(request):
    return MESHES[request.param]()


PAIRS = [
    ("div", "divergence", "edges"),
    ("grad", "gradient", "faces"),
    ("along", "gradient_along", "nodes"),
    ("curl", "vorticity", "edges"),
    ("tangential", "tangential", "edges"),
    ("face_to_edge", "face_to_edge", "faces"),
    ("node_to_edge", "node_to_edge", "nodes"),
    ("face_to_node", "face_to_node", "faces"),
]


@pytest.mark.parametrize("fast, slow, place", PAIRS)
def test_fast_equals_slow(mesh, fast, slow, place):
    field = np.random.default_rng(3).standard_normal(getattr(mesh, "n_" + place))
    matrix = getattr(build(mesh), fast)
    scale = (abs(matrix) @ np.abs(field)).max()
    assert np.abs(matrix @ field - getattr(reference, slow)(mesh, field)).max() < 1e-13 * scale


def test_kinetic_energy_equals_slow(mesh):
    u = np.random.default_rng(4).standard_normal(mesh.n_edges)
    expected = reference.kinetic(mesh, u)
    assert np.abs(build(mesh).kinetic @ u**2 - expected).max() < 1e-13 * expected.max()
