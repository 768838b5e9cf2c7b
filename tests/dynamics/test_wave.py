"""The wave operator: skewness, spectrum, steady states, bound, restriction.

Dispersion relation on regular hexagons: derived for these tests and verified against the 4 by 4 symbol; the published analysis
is Thuburn 2008, J. Comput. Phys. 227 (cited from memory).
"""

import numpy as np
import pytest
from dynamics import slow_dynamics
from dynamics.dynamics_examples import GRAVITY, close, flat_mesh, random_state, rough_mesh, water_on
from operators.operator_meshes import MESHES, part_of

from swe.dynamics.bounds import GravityBound
from swe.dynamics.physics import FPlane, NoRotation
from swe.dynamics.wave import wave_operator
from swe.errors import NumericalFailure
from swe.mesh.lattice import periodic_hexagons
from swe.mesh.restrict import restrict
from swe.mesh.topology import with_depth

NAMES = list(MESHES)


def whole(water, rotation=True, eta=None):
    return wave_operator(water, water.mesh.n_faces, water.mesh.n_inner, rotation, eta)


@pytest.mark.parametrize("rotation", [False, True])
@pytest.mark.parametrize("name", NAMES)
def test_scaled_matrix_is_skew_bit_by_bit(name, rotation):
    water = water_on(rough_mesh(name))
    operator = whole(water, rotation, random_state(water.mesh)[0])
    assert operator.skew and abs(operator.matrix + operator.matrix.T).max() == 0.0


@pytest.mark.parametrize("rotation", [False, True])
@pytest.mark.parametrize("name", NAMES)
def test_apply_equals_the_general_products(name, rotation):
    water = water_on(rough_mesh(name))
    operator = whole(water, rotation)
    x = np.random.default_rng(1).standard_normal(operator.size)
    close(operator.apply(x), slow_dynamics.wave(water, operator.mf, operator.ms, rotation) @ x, 1e-13)
    close(operator.product(operator.weights * x), operator.weights * operator.apply(x), 1e-13)


def test_rotation_block_is_there_only_when_asked_for_and_needed():
    mesh = rough_mesh("lake")
    assert whole(water_on(mesh), True).matrix.nnz > whole(water_on(mesh), False).matrix.nnz
    assert whole(water_on(mesh, NoRotation()), True).matrix.nnz == whole(water_on(mesh), False).matrix.nnz


@pytest.mark.parametrize("name", NAMES)
def test_level_rows_are_minus_the_divergence_of_the_transport(name):
    water = water_on(rough_mesh(name))
    operator = whole(water)
    x = np.random.default_rng(2).standard_normal(operator.size)
    flow = np.zeros(water.mesh.n_edges)
    flow[: operator.ms] = operator.transport(x)
    close(operator.apply(x)[: operator.mf], -water.operators.div @ flow, 1e-13)


def test_weights_are_the_energy():
    """|weights x|^2 / 2 = sum g A eta^2/2 + sum l d D_e u^2/2."""
    water = water_on(rough_mesh("lake"))
    mesh, operator = water.mesh, whole(water)
    eta, u = random_state(mesh)
    x = np.concatenate([eta, u[: operator.ms]])
    kinetic = 0.5 * (mesh.edge_length * mesh.edge_distance * (water.operators.face_to_edge @ mesh.depth) * u**2).sum()
    energy = kinetic + 0.5 * GRAVITY * (mesh.face_area * eta**2).sum()
    assert 0.5 * ((operator.weights * x) ** 2).sum() == pytest.approx(energy, rel=1e-13)


@pytest.mark.parametrize("name", NAMES)
def test_rates_near_rest_are_the_wave_operator(name):
    """The wave operator is the derivative of the rates at rest."""
    water = water_on(rough_mesh(name))
    operator = whole(water)
    eta, u = random_state(water.mesh)
    small = 1e-6
    level, velocity = water.rates(small * eta, small * u, 0.0)
    found = np.concatenate([level, velocity[: operator.ms]]) / small
    expected = operator.apply(np.concatenate([eta, u[: operator.ms]]))
    assert np.abs(found - expected).max() < 1e-6 * np.abs(expected).max()


@pytest.mark.parametrize("name", NAMES)
def test_refresh_equals_a_mesh_of_that_depth(name):
    mesh = rough_mesh(name)
    eta, _ = random_state(mesh)
    operator = whole(water_on(mesh))
    at_rest = operator.radius
    operator.refresh(eta)
    fresh = whole(water_on(with_depth(mesh, mesh.depth + eta)))
    assert np.array_equal(operator.matrix.data, fresh.matrix.data)
    assert np.array_equal(operator.weights, fresh.weights) and np.array_equal(operator.depth_edge, fresh.depth_edge)
    assert operator.radius == fresh.radius != at_rest


def test_refresh_refuses_a_dry_edge():
    mesh = flat_mesh("lake", 2.0)
    operator = whole(water_on(mesh))
    with pytest.raises(NumericalFailure, match="depth -1 m at edge"):
        operator.refresh(np.full(mesh.n_faces, -3.0))
    with pytest.raises(NumericalFailure, match="depth nan m at edge"):
        operator.refresh(np.full(mesh.n_faces, np.nan))


def hexagon_frequencies(nx, ny, spacing, c, f):
    """All frequencies of a doubly periodic lattice: for each wave vector two zeros and +-w."""
    a, b = (grid.ravel() for grid in np.meshgrid(np.arange(nx), np.arange(ny)))
    kx, ky = 2 * np.pi * a / nx, 2 * np.pi * b / (ny * np.sqrt(3) / 2)  # times spacing
    t0, t1, t2 = kx, kx / 2 + ky * np.sqrt(3) / 2, -kx / 2 + ky * np.sqrt(3) / 2
    turn = (2 * np.cos(t2 / 2) + np.cos((t0 + t1) / 2)) ** 2 + (2 * np.cos(t0 / 2) + np.cos((t1 + t2) / 2)) ** 2
    turn = (turn + (2 * np.cos(t1 / 2) + np.cos((t0 - t2) / 2)) ** 2) / 27
    gravity = 8 * c**2 / (3 * spacing**2) * (np.sin(t0 / 2) ** 2 + np.sin(t1 / 2) ** 2 + np.sin(t2 / 2) ** 2)
    w = np.sqrt(f**2 * turn + gravity)
    return np.sort(np.concatenate([w, -w, np.zeros(2 * w.size)]))


@pytest.mark.parametrize("nx, ny", [(6, 6), (5, 4), (8, 6)])
@pytest.mark.parametrize("f", [0.0, 1e-4, 2e-2])
def test_dispersion_relation_on_regular_hexagons(nx, ny, f):
    depth, spacing = 50.0, 1000.0
    mesh = with_depth(periodic_hexagons(nx, ny, spacing), np.full(nx * ny, depth))
    found = np.linalg.eigvalsh(1j * whole(water_on(mesh, FPlane(f))).matrix.toarray())
    expected = hexagon_frequencies(nx, ny, spacing, np.sqrt(GRAVITY * depth), f)
    assert np.abs(found - expected).max() < 1e-12 * expected.max()


def test_uniform_flow_on_the_f_plane_turns_at_f():
    """The mode of wave number zero: A of the f-plane block with k = 0."""
    mesh, f = flat_mesh("regular"), 1e-4
    operator = whole(water_on(mesh, FPlane(f)))
    x, y = (np.concatenate([np.zeros(mesh.n_faces), mesh.edge_normal[:, axis]]) for axis in (0, 1))
    close(operator.apply(x), -f * y, 1e-12)
    close(operator.apply(y), f * x, 1e-12)


@pytest.mark.parametrize("name", ["regular", "irregular", "rectangle", "lake", "globe", "sphere sea"])
def test_geostrophic_states_are_steady(name):
    """Any psi on nodes, constant on the coast: u = -d psi/dt, g eta = f sum R psi is steady (Thuburn et al. 2009)."""
    mesh, f = flat_mesh(name), 1e-4
    operator = whole(water_on(mesh, FPlane(f)))
    psi = np.random.default_rng(7).standard_normal(mesh.n_nodes) * 1e4
    psi[mesh.node_coast] = 0.0
    u = -(operator.water.operators.along @ psi)
    share = np.zeros(mesh.n_faces)
    here = mesh.node_faces >= 0
    np.add.at(share, mesh.node_faces[here], (mesh.kite_area * psi[:, None])[here])
    eta = f / GRAVITY * share / mesh.face_area
    rates = operator.apply(np.concatenate([eta, u[: operator.ms]]))
    assert np.abs(rates[operator.mf :]).max() < 1e-11 * f * np.abs(u).max()
    assert np.abs(rates[: operator.mf]).max() < 1e-11 * (abs(operator.water.operators.div) @ np.abs(80.0 * u)).max()


@pytest.mark.parametrize("rotation", [False, True])
@pytest.mark.parametrize("name", NAMES)
def test_radius_bounds_the_spectrum(name, rotation):
    operator = whole(water_on(rough_mesh(name)), rotation)
    true = np.linalg.norm(operator.matrix.toarray(), 2)  # skew: the radius is the norm
    assert true <= operator.radius * (1 + 1e-12)


@pytest.mark.parametrize("name", ["regular", "irregular", "rectangle", "lake", "globe", "sphere sea"])
def test_radius_of_gravity_waves_is_sharp(name):
    operator = whole(water_on(rough_mesh(name)), False)
    true = np.linalg.norm(operator.matrix.toarray(), 2)  # skew: the radius is the norm
    assert operator.radius < 1.2 * true


def test_bound_is_exact_on_regular_hexagons_and_below_the_circle_bound():
    """rho = sqrt(6) c/d on a lattice that holds the wave of shortest period (three cells)."""
    mesh = flat_mesh("regular", 50.0)
    exact = np.sqrt(6 * GRAVITY * 50.0) / 1000.0
    assert exact <= whole(water_on(mesh), False).radius < exact * (1 + 3e-8)
    for name in NAMES:
        mesh = rough_mesh(name)
        depth = water_on(mesh).operators.face_to_edge @ mesh.depth
        weight = (GRAVITY * depth * mesh.edge_length / mesh.edge_distance)[: mesh.n_inner]
        circle = np.zeros(mesh.n_faces)
        np.add.at(circle, mesh.edge_faces[: mesh.n_inner].ravel(), np.repeat(weight, 2))
        bound = GravityBound(mesh, mesh.n_faces, mesh.n_inner, GRAVITY)(depth[: mesh.n_inner])
        assert bound <= np.sqrt(2 * (circle / mesh.face_area).max()) * (1 + 1e-12)


@pytest.mark.parametrize("name", NAMES)
def test_rows_of_a_restricted_mesh_are_those_of_the_whole(name):
    mesh = rough_mesh(name)
    faces, mf = part_of(mesh)
    part = restrict(mesh, faces)
    ms = np.count_nonzero(part.edge_faces[: part.n_inner].max(axis=1) < mf)
    eta, _ = random_state(mesh)
    local = wave_operator(water_on(part), mf, ms, True, eta[part.face_id])
    places = np.concatenate([part.face_id[:mf], mesh.n_faces + part.edge_id[:ms]])
    expected = whole(water_on(mesh), True, eta).matrix.toarray()[np.ix_(places, places)]
    assert np.abs(local.matrix.toarray() - expected).max() < 1e-14 * np.abs(expected).max()
    assert abs(local.matrix + local.matrix.T).max() == 0.0
