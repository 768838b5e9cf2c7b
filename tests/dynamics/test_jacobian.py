"""The Jacobian of the rates about the current state."""

import numpy as np
import pytest
from dynamics import slow_dynamics
from dynamics.dynamics_examples import DENSITY, close, everything_on, flat_mesh, random_state, rough_mesh, water_on
from operators.operator_meshes import MESHES, part_of

from swe.dynamics.drag import drag, drag_derivatives
from swe.dynamics.equations import Water
from swe.dynamics.friction import Manning
from swe.dynamics.jacobian import JacobianFactory
from swe.dynamics.physics import NoRotation
from swe.dynamics.wave import wave_operator
from swe.mesh.restrict import restrict

NAMES = list(MESHES)
TERMS = {
    "flow alone": lambda mesh: water_on(mesh, NoRotation()),
    "rotation": lambda mesh: water_on(mesh),
    "drag": lambda mesh: water_on(mesh, drag=0.0025),
    "Manning": lambda mesh: water_on(mesh, drag=Manning(0.03)),
    "mapped": lambda mesh: water_on(mesh, drag=Manning(lambda part: 0.02 + 1e-7 * np.abs(part.face_xyz[:, 0]) % 0.01)),
    "wind": lambda mesh: water_on(mesh, wind=(0.3, -0.2)),
    "viscosity": lambda mesh: water_on(mesh, viscosity=500.0),
    "head": lambda mesh: water_on(mesh, head=2.0),
    "everything": everything_on,
}


def whole(water):
    return JacobianFactory(water, water.mesh.n_faces, water.mesh.n_inner)


def rates(water, x):
    mesh = water.mesh
    u = np.zeros(mesh.n_edges)
    u[: mesh.n_inner] = x[mesh.n_faces :]
    level, velocity = water.rates(x[: mesh.n_faces], u, 0.0)
    return np.concatenate([level, velocity[: mesh.n_inner]])


@pytest.mark.parametrize("term", list(TERMS))
@pytest.mark.parametrize("name", NAMES)
def test_jacobian_is_the_directional_derivative(name, term):
    water = TERMS[term](rough_mesh(name))
    eta, u = random_state(water.mesh)
    operator = whole(water).at(eta, u, 0.0)
    x = np.concatenate([eta, u[: water.mesh.n_inner]])
    for seed in range(2):
        direction = np.random.default_rng(seed).standard_normal(x.size)
        step = 1e-4
        expected = (rates(water, x + step * direction) - rates(water, x - step * direction)) / (2 * step)
        found = operator.apply(direction)
        for part in (slice(None, operator.factory.mf), slice(operator.factory.mf, None)):
            assert np.abs(found[part] - expected[part]).max() < 1e-7 * np.abs(expected[part]).max()


@pytest.mark.parametrize("term", list(TERMS))
@pytest.mark.parametrize("name", NAMES)
def test_refilled_pattern_equals_the_general_products(name, term):
    water = TERMS[term](rough_mesh(name))
    mesh = water.mesh
    factory = whole(water)
    for seed in (0, 1):  # twice: nothing of the first state may stay behind
        eta, u = random_state(mesh, seed)
        inner = np.arange(mesh.n_faces + mesh.n_inner)
        expected = slow_dynamics.jacobian(water, eta, u, 0.0)[inner][:, inner]
        error, expected = (factory.at(eta, u, 0.0).matrix - expected).toarray(), expected.toarray()
        for rows in (slice(None, mesh.n_faces), slice(mesh.n_faces, None)):
            for columns in (slice(None, mesh.n_faces), slice(mesh.n_faces, None)):
                assert np.abs(error[rows, columns]).max() < 1e-13 * np.abs(expected[rows, columns]).max()


def test_an_operator_outlives_the_next_state():
    water = everything_on(rough_mesh("lake"))
    factory = whole(water)
    first = factory.at(*random_state(water.mesh, 0), 0.0)
    before = first.matrix.data.copy(), first.weights.copy(), first.flow_edge.copy(), first.depth_edge.copy()
    second = factory.at(*random_state(water.mesh, 1), 0.0)
    for old, new in zip(before, (first.matrix.data, first.weights, first.flow_edge, first.depth_edge), strict=True):
        assert np.array_equal(old, new)
    assert not np.array_equal(first.matrix.data, second.matrix.data)


@pytest.mark.parametrize("name", NAMES)
def test_at_rest_it_is_the_wave_operator(name):
    water = water_on(rough_mesh(name))
    mesh = water.mesh
    eta, _ = random_state(mesh)
    jacobian = whole(water).at(np.zeros(mesh.n_faces), np.zeros(mesh.n_edges), 0.0)
    wave = wave_operator(water, mesh.n_faces, mesh.n_inner, True)
    x = np.random.default_rng(5).standard_normal(wave.size)
    close(jacobian.apply(x), wave.apply(x), 1e-13)
    close(jacobian.weights, wave.weights, 1e-15)
    wave.refresh(eta)
    close(whole(water).at(eta, np.zeros(mesh.n_edges), 0.0).weights, wave.weights, 1e-15)


@pytest.mark.parametrize("name", NAMES)
def test_level_rows_are_minus_the_divergence_of_the_transport(name):
    water = everything_on(rough_mesh(name))
    mesh = water.mesh
    operator = whole(water).at(*random_state(mesh), 0.0)
    x = np.random.default_rng(2).standard_normal(operator.size)
    flow = np.zeros(mesh.n_edges)
    flow[: mesh.n_inner] = operator.transport(x)
    close(operator.apply(x)[: mesh.n_faces], -water.operators.div @ flow, 1e-13)


def test_transport_is_the_derivative_of_the_transport():
    water = everything_on(rough_mesh("lake"))
    mesh = water.mesh
    eta, u = random_state(mesh)
    d_eta, d_u = random_state(mesh, 1)
    operator = whole(water).at(eta, u, 0.0)
    step = 1e-4
    ahead, behind = (water.transport(eta + way * d_eta, u + way * d_u) for way in (step, -step))
    expected = (ahead - behind)[: mesh.n_inner] / (2 * step)
    close(operator.transport(np.concatenate([d_eta, d_u[: mesh.n_inner]])), expected, 1e-9)


def test_product_is_the_scaled_matrix():
    water = everything_on(rough_mesh("lake"))
    operator = whole(water).at(*random_state(water.mesh), 0.0)
    x = np.random.default_rng(2).standard_normal(operator.size)
    close(operator.product(operator.weights * x), operator.weights * operator.apply(x), 1e-14)
    assert operator.skew is False and operator.size == operator.weights.size


@pytest.mark.parametrize("name", NAMES)
def test_radius_bounds_the_spectrum(name):
    water = everything_on(rough_mesh(name))
    operator = whole(water).at(*random_state(water.mesh), 0.0)
    assert np.abs(np.linalg.eigvals(operator.matrix.toarray())).max() <= operator.radius
    scaled = operator.weights[:, None] * operator.matrix.toarray() / operator.weights
    assert np.linalg.norm(scaled, 2) <= operator.radius


@pytest.mark.parametrize("name", ["regular", "irregular", "rectangle", "lake"])
def test_radius_is_near_the_spectrum_where_gravity_waves_lead(name):
    water = everything_on(rough_mesh(name))
    operator = whole(water).at(*random_state(water.mesh), 0.0)
    assert operator.radius < 1.25 * np.abs(np.linalg.eigvals(operator.matrix.toarray())).max()


@pytest.mark.parametrize("name", NAMES)
def test_rows_of_a_restricted_mesh_are_those_of_the_whole(name):
    """All rows but one entry: on the rim the transport through edges beyond the solve part counts as given."""
    mesh = rough_mesh(name)
    faces, mf = part_of(mesh)
    part = restrict(mesh, faces)
    ms = np.count_nonzero(part.edge_faces[: part.n_inner].max(axis=1) < mf)
    eta, u = random_state(mesh)
    local = JacobianFactory(everything_on(part), mf, ms).at(eta[part.face_id], u[part.edge_id], 0.0)
    places = np.concatenate([part.face_id[:mf], mesh.n_faces + part.edge_id[:ms]])
    expected = whole(everything_on(mesh)).at(eta, u, 0.0).matrix.toarray()[np.ix_(places, places)]
    outside = np.zeros(part.n_edges)
    outside[ms:] = u[part.edge_id[ms:]]
    outside[part.n_inner :] = 0.0
    given = -0.5 * (everything_on(part).operators.div @ outside)[:mf]
    expected[np.arange(mf), np.arange(mf)] -= given
    found = local.matrix.toarray()
    for block in (slice(None, mf), slice(mf, None)):
        assert np.abs(found[block] - expected[block]).max() < 1e-13 * np.abs(expected[block]).max()
    assert np.abs(given).max() > 0.0


def test_drag_has_a_derivative_at_rest():
    """|u| u has the derivative 0 at u = 0, and no division by zero on the way."""
    zero = np.zeros(3)
    for part in drag_derivatives(0.0025, 0.0, zero, zero, np.ones(3)):
        assert np.array_equal(part, zero)
    tiny = np.array([1e-300, -1e-160, 0.0])
    assert all(np.isfinite(part).all() for part in drag_derivatives(0.0025, 1 / 3, tiny, tiny[::-1], np.ones(3)))


@pytest.mark.parametrize("power", [0.0, 1 / 3])
def test_drag_derivatives_are_differences(power):
    def drag_of(u, u_t, h):
        return drag(0.0025 * h**-power, u, u_t, h)

    rng = np.random.default_rng(0)
    u, u_t, h = rng.standard_normal(50), rng.standard_normal(50), 5.0 + rng.random(50)
    step, arguments = 1e-6, (u, u_t, h)
    for index, found in enumerate(drag_derivatives(0.0025 * h**-power, power, u, u_t, h)):
        up = [a + step * (k == index) for k, a in enumerate(arguments)]
        down = [a - step * (k == index) for k, a in enumerate(arguments)]
        close(found, (drag_of(*up) - drag_of(*down)) / (2 * step), 1e-7)


def test_wind_that_changes_is_taken_at_the_time_asked_for():
    class Gust:
        def __init__(self, pattern):
            self.pattern = pattern

        def stress(self, time):
            return self.pattern * time

    mesh = flat_mesh("lake", 10.0)
    plain = water_on(mesh)
    pattern = mesh.edge_normal[:, 0].copy()
    pattern[mesh.n_inner :] = 0.0
    water = Water(mesh, plain.operators, plain.physics, plain.coriolis_node, (Gust(pattern),))
    eta, u = np.zeros(mesh.n_faces), np.zeros(mesh.n_edges)
    factory = whole(water)
    rise = np.append(np.ones(mesh.n_faces), np.zeros(mesh.n_inner))
    change = (factory.at(eta, u, 3.0).matrix - factory.at(eta, u, 1.0).matrix) @ rise
    close(change[mesh.n_faces :], -2.0 * pattern[: mesh.n_inner] / (DENSITY * 10.0**2), 1e-10)
