"""What the rates of the water conserve, leave alone, and damp.

Sources: checks of the energy form, Thuburn et al. 2009 (J. Comput. Phys. 228, 8321) and Ringler et al. 2010 (J. Comput. Phys.
229, 3065); friction laws verified by substitution.
"""

import numpy as np
import pytest
from dynamics import slow_dynamics
from dynamics.dynamics_examples import GRAVITY, Swing, close, everything_on, flat_mesh, random_state, rough_mesh, water_on
from operators.operator_meshes import MESHES, part_of

from swe.dynamics.drag import drag
from swe.dynamics.equations import Water
from swe.dynamics.forcing.wind import ConstantWind
from swe.dynamics.physics import FPlane, NoRotation
from swe.dynamics.viscosity import viscosity, viscosity_matrix
from swe.mesh.restrict import restrict
from swe.mesh.topology import with_depth
from swe.mesh.voronoi import plane_mesh
from swe.operators import build

NAMES = list(MESHES)


@pytest.mark.parametrize("name", NAMES)
def test_rates_equal_the_slow_twin(name):
    water = everything_on(rough_mesh(name))
    eta, u = random_state(water.mesh)
    for fast, slow in zip(water.rates(eta, u, 0.0), slow_dynamics.rates(water, eta, u, 0.0), strict=True):
        close(fast, slow, 1e-13)


@pytest.mark.parametrize("name", NAMES)
def test_energy_is_conserved(name):
    """dE/dt = sum l d h_e u du/dt + sum A (K + g eta) d eta/dt = 0, whatever the state, with coast and rough bed."""
    water = water_on(rough_mesh(name))
    mesh, op = water.mesh, water.operators
    eta, u = random_state(mesh)
    level, velocity = water.rates(eta, u, 0.0)
    work = mesh.edge_length * mesh.edge_distance * water.transport(eta, u) * velocity
    head = mesh.face_area * (op.kinetic @ u**2 + GRAVITY * eta) * level
    assert abs(work.sum() + head.sum()) < 1e-14 * (np.abs(work).sum() + np.abs(head).sum())


@pytest.mark.parametrize("name", NAMES)
def test_volume_is_conserved(name):
    water = everything_on(rough_mesh(name))
    gain = water.mesh.face_area * water.rates(*random_state(water.mesh), 0.0)[0]
    assert abs(gain.sum()) < 1e-14 * np.abs(gain).sum()


@pytest.mark.parametrize("name", NAMES)
def test_uniform_potential_vorticity_stays_uniform(name):
    """With f + zeta = q0 h at all nodes, d zeta/dt = q0 dh/dt at nodes off the coast."""
    mesh, q0 = rough_mesh(name), 1e-6
    plain = water_on(mesh)
    eta, u = random_state(mesh)
    h_node, _ = plain.thickness(eta)
    water = Water(mesh, plain.operators, plain.physics, q0 * h_node - plain.operators.curl @ u)
    level, velocity = water.rates(eta, u, 0.0)
    wet = ~mesh.node_coast
    close((water.operators.curl @ velocity)[wet], q0 * (water.operators.face_to_node @ level)[wet], 2e-11)


@pytest.mark.parametrize("name", NAMES)
def test_a_lake_at_rest_stays_at_rest_exactly(name):
    water = water_on(rough_mesh(name), drag=0.0025, viscosity=50.0)
    mesh = water.mesh
    level, velocity = water.rates(np.full(mesh.n_faces, 0.3712), np.zeros(mesh.n_edges), 0.0)
    assert not level.any() and not velocity.any()


@pytest.mark.parametrize("name", NAMES)
def test_border_edges_have_no_rates(name):
    water = everything_on(rough_mesh(name))
    assert not water.rates(*random_state(water.mesh), 0.0)[1][water.mesh.n_inner :].any()


def uniform(mesh, x, y):
    return mesh.edge_normal @ [x, y, 0.0]


def test_uniform_flow_turns_and_slows_as_it_should():
    """Inertial turning at -f and d|u|/dt = -C_d |u|^2/h, exact on regular hexagons."""
    mesh, cd, f, depth = flat_mesh("regular", 10.0), 0.0025, 1e-4, 10.0
    water = water_on(mesh, FPlane(f), drag=cd)
    level, velocity = water.rates(np.zeros(mesh.n_faces), uniform(mesh, 0.6, 0.8), 0.0)
    rub = cd * 1.0 / depth
    close(velocity, uniform(mesh, f * 0.8 - rub * 0.6, -f * 0.6 - rub * 0.8), 1e-12)
    assert np.abs(level).max() < 1e-15


def test_wind_accelerates_the_layer():
    mesh = flat_mesh("regular", 20.0)
    water = water_on(mesh, NoRotation(), wind=(1.0, -0.5))
    _, velocity = water.rates(np.zeros(mesh.n_faces), np.zeros(mesh.n_edges), 0.0)
    close(velocity, uniform(mesh, 1.0, -0.5) / (1025.0 * 20.0), 1e-13)


def test_winds_add_up():
    mesh = flat_mesh("lake")
    one, two = ConstantWind.on(mesh, 0.1, 0.0), ConstantWind.on(mesh, 0.0, 0.2)
    plain = water_on(mesh)
    both = Water(mesh, plain.operators, plain.physics, plain.coriolis_node, (one, two))
    close(both.stress(0.0), ConstantWind.on(mesh, 0.1, 0.2).stress(0.0), 1e-15)


@pytest.mark.parametrize("name", NAMES)
def test_water_whose_level_answers_a_head_stays_at_rest_exactly(name):
    """g eta + Phi = 0 on a rough bed; by substitution. 500 s later the head has turned, and pushes twice as hard."""
    water = water_on(rough_mesh(name), head=2.0)
    eta = -water.heads(0.0)[0] / GRAVITY
    level, velocity = water.rates(eta, np.zeros(water.mesh.n_edges), 0.0)
    assert not level.any() and np.abs(velocity).max() < 1e-15 * np.abs(water.operators.grad @ (GRAVITY * eta)).max()
    close(water.rates(eta, 0.0 * velocity, 500.0)[1], -2.0 * water.operators.grad @ (GRAVITY * eta), 1e-14)


def test_a_forcing_may_be_stress_and_head_at_once():
    """By definition: the rates of one forcing that has both are those of two that have one each."""

    class Both(Swing):
        def stress(self, time):
            return wind.stress(time)

    mesh = rough_mesh("lake")
    plain = water_on(mesh)
    wind, swing = ConstantWind.on(mesh, 0.1, 0.2), Swing.on(mesh, 2.0)
    eta, u = random_state(mesh)
    one, two = (
        Water(mesh, plain.operators, plain.physics, plain.coriolis_node, forcing).rates(eta, u, 70.0)[1]
        for forcing in ((Both(swing.pattern),), (wind, swing))
    )
    assert np.array_equal(one, two)
    assert not np.array_equal(one, plain.rates(eta, u, 70.0)[1])


def test_wind_on_the_sphere_blows_east_and_north():
    mesh = MESHES["globe"]()
    up = mesh.edge_xyz / np.linalg.norm(mesh.edge_xyz, axis=1, keepdims=True)
    east = np.cross([0.0, 0.0, 1.0], up)
    east /= np.linalg.norm(east, axis=1, keepdims=True)
    wind = 0.3 * east - 0.2 * np.cross(up, east)
    close(ConstantWind.on(mesh, 0.3, -0.2).stress(0.0), (wind * mesh.edge_normal).sum(axis=1), 1e-14)


@pytest.mark.parametrize("name", NAMES)
def test_bottom_drag_only_takes_energy(name):
    water = water_on(rough_mesh(name))
    eta, u = random_state(water.mesh)
    _, h_edge = water.thickness(eta)
    slowing = drag(0.0025, u, water.operators.tangential @ u, h_edge)
    assert np.all(slowing * u <= 0.0) and np.any(slowing * u < 0.0)


@pytest.mark.parametrize("name", NAMES)
def test_viscous_work_has_no_part_at_the_coast(name):
    """Free slip: sum l d u du/dt = -nu (sum A delta^2 + sum A_v zeta^2), without a boundary term."""
    mesh = MESHES[name]()
    op, nu = build(mesh), 30.0
    _, u = random_state(mesh)
    zeta, delta = op.curl @ u, op.div @ u
    work = (mesh.edge_length * mesh.edge_distance * u * viscosity(op, nu, u, zeta)).sum()
    assert work == pytest.approx(-nu * ((mesh.face_area * delta**2).sum() + (mesh.node_area * zeta**2).sum()), rel=1e-12)
    close(viscosity_matrix(op, nu) @ u, viscosity(op, nu, u, zeta), 1e-12)


def channel(nx=8, rows=6, spacing=1000.0):
    """Regular hexagons between two zigzag coasts along x, periodic in x."""
    i, j = np.meshgrid(np.arange(nx), np.arange(rows + 2))
    points = np.column_stack([((i + (j % 2) / 2) * spacing).ravel(), (j * spacing * np.sqrt(3) / 2).ravel()])
    wet = (j.ravel() > 0) & (j.ravel() <= rows)
    mesh = plane_mesh(points, wet, (nx * spacing, (rows + 2) * spacing * np.sqrt(3) / 2))
    return with_depth(mesh, np.full(mesh.n_faces, 30.0))


def test_plug_flow_along_a_straight_coast_is_not_damped():
    mesh = channel()
    op, u = build(mesh), uniform(mesh, 1.0, 0.0)
    u[mesh.n_inner :] = 0.0
    assert np.abs(viscosity(op, 100.0, u, op.curl @ u)).max() < 1e-15
    assert not op.curl[mesh.node_coast].nnz and mesh.node_coast.any()


def test_a_straight_coast_exerts_no_stress_on_shear_flow():
    """Viscosity moves momentum along the coast about but takes none out; inside a uniform shear it does nothing."""
    mesh = channel()
    op = build(mesh)
    u = mesh.edge_normal[:, 0] * mesh.edge_xyz[:, 1] * 1e-4  # speed s y along x: zeta = -s
    u[mesh.n_inner :] = 0.0
    push = viscosity(op, 100.0, u, op.curl @ u)
    momentum = mesh.edge_length * mesh.edge_distance * mesh.edge_normal[:, 0] * push
    assert np.abs(push).max() > 1e-6
    assert abs(momentum.sum()) < 1e-12 * np.abs(momentum).sum()
    inside = ~mesh.node_coast[mesh.edge_nodes].any(axis=1)
    assert inside.any() and np.abs(push[inside]).max() < 1e-12 * np.abs(push).max()


def test_shear_flow_along_a_straight_coast_keeps_its_energy_without_viscosity():
    mesh = channel()
    water = water_on(mesh)
    u = mesh.edge_normal[:, 0] * mesh.edge_xyz[:, 1] * 1e-4
    u[mesh.n_inner :] = 0.0
    eta = np.zeros(mesh.n_faces)
    level, velocity = water.rates(eta, u, 0.0)
    work = mesh.edge_length * mesh.edge_distance * water.transport(eta, u) * velocity
    head = mesh.face_area * (water.operators.kinetic @ u**2) * level
    assert abs(work.sum() + head.sum()) < 1e-14 * np.abs(work).sum()


@pytest.mark.parametrize("name", NAMES)
def test_rates_of_a_restricted_mesh_are_those_of_the_whole(name):
    mesh = rough_mesh(name)
    faces, mf = part_of(mesh)
    part = restrict(mesh, faces)
    ms = np.count_nonzero(part.edge_faces[: part.n_inner].max(axis=1) < mf)
    whole, local = everything_on(mesh), everything_on(part)
    eta, u = random_state(mesh)
    level, velocity = whole.rates(eta, u, 0.0)
    found_level, found_velocity = local.rates(eta[part.face_id], u[part.edge_id], 0.0)
    assert np.abs(found_level[:mf] - level[part.face_id[:mf]]).max() < 1e-14 * np.abs(level).max()
    assert np.abs(found_velocity[:ms] - velocity[part.edge_id[:ms]]).max() < 1e-14 * np.abs(velocity).max()
