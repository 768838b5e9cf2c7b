"""Identities that the operators satisfy at round-off on every mesh.

Sources: Thuburn et al. 2009, J. Comput. Phys. 228, 8321; Ringler et al. 2010, J. Comput. Phys. 229, 3065; the identities
themselves are verified by substitution.
"""

import numpy as np
import pytest
from operators.operator_meshes import MESHES, periodic_irregular, rough

from swe.operators import build

CLOSED = ["regular", "irregular", "globe"]
COASTAL = ["rectangle", "lake", "sphere sea"]


@pytest.fixture(params=CLOSED + COASTAL)
def mesh(request):
    return MESHES[request.param]()


@pytest.fixture
def op(mesh):
    return build(mesh)


def random(n, seed=0):
    return np.random.default_rng(seed).standard_normal(n)


def close(a, b, tolerance=1e-12):
    assert np.abs(a - b).max() <= tolerance * max(np.abs(a).max(), np.abs(b).max())


def test_divergence_and_gradient_are_negative_adjoints(mesh, op):
    volume_rate = op.div.toarray() * mesh.face_area[:, None]
    work = op.grad.toarray() * (mesh.edge_length * mesh.edge_distance)[:, None]
    inner = slice(None, mesh.n_inner)
    close(volume_rate[:, inner], -work.T[:, inner], 1e-14)


def test_inner_transports_neither_make_nor_lose_water(mesh, op):
    flow = random(mesh.n_edges)
    flow[mesh.n_inner :] = 0.0
    assert abs((mesh.face_area * (op.div @ flow)).sum()) < 1e-12 * (mesh.edge_length * np.abs(flow)).sum()


@pytest.mark.parametrize("mesh", COASTAL, indirect=True)
def test_border_transport_counts_with_the_sign_of_its_face(mesh, op):
    flow = np.zeros(mesh.n_edges)
    flow[-1] = 2.0  # n points out of the one face there is
    out = (mesh.face_area * (op.div @ flow)).sum()
    assert out == pytest.approx(2.0 * mesh.edge_length[-1], rel=1e-14)


def test_curl_of_a_gradient_is_zero(mesh, op):
    slope = op.grad @ random(mesh.n_faces)
    scale = (abs(op.curl) @ np.abs(slope)).max()
    assert np.abs(op.curl @ slope).max() < 1e-13 * scale


def test_flow_along_a_stream_function_is_free_of_divergence(mesh, op):
    psi = random(mesh.n_nodes)
    psi[mesh.node_coast] = 0.0
    flow = op.along @ psi
    assert np.abs(op.div @ flow).max() < 1e-13 * (abs(op.div) @ np.abs(flow)).max()


@pytest.mark.parametrize("mesh", CLOSED, indirect=True)
def test_vorticity_sums_to_zero_without_coast(mesh, op):
    terms = mesh.node_area * (op.curl @ random(mesh.n_edges))
    assert abs(terms.sum()) < 1e-12 * np.abs(terms).sum()


def test_weights_are_antisymmetric_bit_by_bit(op):
    assert abs(op.weights + op.weights.T).max() == 0.0


def test_no_weight_touches_a_border(mesh, op):
    rows = op.weights[mesh.n_inner :]
    assert rows.nnz == 0 and op.tangential[:, mesh.n_inner :].nnz == 0


def test_turning_a_flow_turns_divergence_into_vorticity(mesh, op):
    """curl (T u) = - (div u averaged to nodes): why geostrophic modes stay steady (Thuburn et al. 2009)."""
    u = random(mesh.n_edges)
    u[mesh.n_inner :] = 0.0
    wet = ~mesh.node_coast
    spin = op.curl @ (op.tangential @ u)
    share = mesh.kite_area / mesh.node_area[:, None]
    spread = (share * (op.div @ u)[mesh.node_faces]).sum(axis=1)
    close(spin[wet], -spread[wet], 1e-11)


def test_averages_keep_constants_and_sums(mesh, op):
    assert np.abs(op.face_to_edge @ np.ones(mesh.n_faces) - 1).max() < 1e-15
    assert np.abs(op.node_to_edge @ np.ones(mesh.n_nodes) - 1).max() < 1e-15
    h = rough(mesh).depth
    close(np.array([(mesh.node_area * (op.face_to_node @ h)).sum()]), np.array([(mesh.face_area * h).sum()]), 1e-12)


def test_kinetic_average_is_the_partner_of_the_thickness_average(mesh, op):
    h, u = rough(mesh).depth, random(mesh.n_edges)
    u[mesh.n_inner :] = 0.0
    on_edges = 0.5 * mesh.edge_length * mesh.edge_distance * (op.face_to_edge @ h) * u**2
    on_faces = mesh.face_area * h * (op.kinetic @ u**2)
    assert on_edges.sum() == pytest.approx(on_faces.sum(), rel=1e-13)


@pytest.mark.parametrize("direction", [0.0, 0.7, 2.0])
def test_tangential_velocity_of_uniform_flow_is_exact_on_regular_hexagons(direction):
    mesh = MESHES["regular"]()
    flow = np.array([np.cos(direction), np.sin(direction), 0.0])
    found = build(mesh).tangential @ (mesh.edge_normal @ flow)
    assert np.abs(found - mesh.edge_tangent @ flow).max() < 1e-13


def test_tangential_velocity_of_uniform_flow_is_not_exact_on_irregular_polygons():
    """As published: consistent on average only. A change of this fact would be news."""
    mesh = periodic_irregular()
    flow = np.array([1.0, 0.0, 0.0])
    error = build(mesh).tangential @ (mesh.edge_normal @ flow) - mesh.edge_tangent @ flow
    assert 1e-3 < np.sqrt((error**2).mean()) < 0.2
