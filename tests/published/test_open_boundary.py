"""Open boundaries: what goes out stays out, what is given comes in, and water is accounted for."""

import numpy as np
import pytest
from basins import AGREE, Rig, physics
from mpi4py import MPI

from swe.dynamics import diagnostics
from swe.dynamics.opening import opening_of
from swe.mesh.lattice import hexagons_in
from swe.mesh.topology import Mesh, with_depth, with_outer
from swe.steppers.one_stage import OneStage
from swe.steppers.runge_kutta import RungeKutta4
from swe.steppers.two_stage import TwoStage

GRAVITY = 9.81
TIGHT = 1e-10
STEPPERS = {
    "two-stage": TwoStage("wave", "lanczos", TIGHT, 300),
    "two-stage jacobian": TwoStage("jacobian", "arnoldi", TIGHT, 300),
    "one-stage": OneStage("arnoldi", TIGHT, 300),
    "runge-kutta-4": RungeKutta4(),
}


def channel(length: float, width: float, spacing: float, depth: float) -> Mesh:
    """A rectangle that is open at x = 0: its westernmost row of faces lies outside."""
    mesh = hexagons_in(length + spacing, width, spacing)
    outer = mesh.face_xyz[:, 0] < 0.8 * spacing
    return with_outer(with_depth(mesh, np.full(mesh.n_faces, depth)), outer)


def boundary_x(mesh: Mesh) -> float:
    """Mean place of the boundary line."""
    from swe.mesh.topology import open_edges

    return float(np.average(mesh.edge_xyz[open_edges(mesh)[0], 0], weights=mesh.edge_length[open_edges(mesh)[0]]))


def opened(radiating: bool, level=lambda time: 0.0):
    return lambda mesh: opening_of(mesh, lambda time: np.full(np.count_nonzero(mesh.face_outer), level(time)), GRAVITY, radiating)


def energy(rig: Rig) -> float:
    """Energy of the inner faces and of all edges, J."""
    out = 0.0
    for part, patch, state in zip(rig.basin.parts, rig.basin.patches, rig.basin.states, strict=True):
        inner = np.flatnonzero(~part.mesh.face_outer[: part.n_owned])
        out += diagnostics.potential_energy(patch.water, state.eta, inner)
        out += diagnostics.kinetic_energy(patch.water, state.eta, state.u, part.owned_edges)
    return out


@pytest.mark.parametrize("name", ["two-stage", "one-stage"])
def test_a_pulse_leaves_with_less_than_one_percent_of_its_energy_reflected(name):
    """Flather 1976 at normal incidence; pulse of 20 faces' width, the wave that runs west leaves once, the other after the wall."""
    mesh = channel(200e3, 10e3, 2e3, 50.0)
    c = np.sqrt(GRAVITY * 50.0)
    rig = Rig(mesh, 3, 6, physics(f=0.0), height=0.01, radius=14e3, at=(100e3, 5e3), on=MPI.COMM_SELF, opening=opened(True))
    for part, state in zip(rig.basin.parts, rig.basin.states, strict=True):
        state.eta[:] = 0.01 * np.exp(-(((part.mesh.face_xyz[:, 0] - 100e3) / 20e3) ** 2))
        state.eta[part.mesh.face_outer] = 0.0
    start = energy(rig)
    step = 150.0
    rig.run(STEPPERS[name], step, round(460e3 / c / step))
    assert energy(rig) < 0.01 * start


@pytest.mark.parametrize("name", STEPPERS)
@pytest.mark.parametrize("radiating", [False, True])
def test_water_that_is_there_equals_water_that_came(name, radiating):
    """Change of volume = time integral of the transport through the boundary, at round-off."""
    mesh = channel(60e3, 20e3, 2e3, 30.0)

    def tide(time):
        return 0.5 * np.sin(2 * np.pi * time / 7200.0)

    rig = Rig(mesh, 4, 3, physics(drag=2.5e-3), height=0.2, radius=10e3, at=(30e3, 10e3), on=MPI.COMM_SELF, opening=opened(radiating, tide))

    def volume():
        parts = zip(rig.basin.parts, rig.basin.patches, rig.basin.states, strict=True)
        return sum(diagnostics.volume_anomaly(q.water, s.eta, np.flatnonzero(~p.mesh.face_outer[: p.n_owned])) for p, q, s in parts)

    before = volume()
    rig.run(STEPPERS[name], 30.0 if name == "runge-kutta-4" else 120.0, 40)
    came = -sum(rig.basin.outflow)
    assert abs(came) > 1e-4 * rig.volume
    assert abs(volume() - before - came) < 1e-14 * rig.volume


@pytest.mark.parametrize("radiating", [False, True])
@pytest.mark.parametrize("name", ["two-stage", "one-stage"])
def test_localised_equals_one_domain_with_open_boundary_and_forcing(name, radiating):
    mesh = channel(60e3, 40e3, 2e3, 30.0)

    def tide(time):
        return 0.5 * np.sin(2 * np.pi * time / 7200.0)

    options = dict(height=0.2, radius=10e3, at=(30e3, 10e3), on=MPI.COMM_SELF, opening=opened(radiating, tide))
    whole = Rig(mesh, 1, 1, physics(drag=2.5e-3), **options).run(STEPPERS[name], 120.0, 10)
    cut = Rig(mesh, 5, 8, physics(drag=2.5e-3), **options).run(STEPPERS[name], 120.0, 10)
    assert np.max(np.abs(whole.eta() - cut.eta())) < 1e-8
    assert np.max(np.abs(whole.eta())) > 0.1


def test_clamped_boundary_holds_its_tide():
    mesh = channel(60e3, 20e3, 2e3, 30.0)
    rig = Rig(mesh, 3, 4, physics(), height=0.0, on=MPI.COMM_SELF, opening=opened(False, lambda time: 0.4 * np.cos(time / 1e4)))
    rig.run(STEPPERS["two-stage"], 120.0, 20)
    assert np.max(np.abs(rig.eta()[mesh.face_outer] - 0.4 * np.cos(20 * 120.0 / 1e4))) < 1e-12


@pytest.mark.parametrize("name", ["two-stage", "one-stage"])
@pytest.mark.parametrize("length", [150e3, 230e3])
def test_co_oscillating_tide_in_a_channel(name, length):
    """eta = a cos(k (L - x)) / cos(k L), from the open end x = 0 to the head x = L (Defant 1961, vol. 2, from memory).

    Started from the standing wave itself; amplitude and phase after two periods within 1 %. M2, 50 m; the longer channel is
    near resonance, c T / 4 = 248 km.
    """
    spacing, depth, period, a = 5e3, 50.0, 2 * np.pi / 1.405189e-4, 0.01
    mesh = channel(length, 25e3, spacing, depth)
    k = 2 * np.pi / period / np.sqrt(GRAVITY * depth)
    x0 = boundary_x(mesh)
    long = mesh.face_xyz[:, 0].max() + 0.5 * spacing - x0
    long = length + spacing - x0

    def shape(x):
        return a * np.cos(k * (long - (x - x0))) / np.cos(k * long)

    def tide(time):
        return a * np.cos(2 * np.pi * time / period)

    rig = Rig(mesh, 2, 6, physics(f=0.0), height=0.0, on=MPI.COMM_SELF, opening=opened(False, tide))
    for part, state in zip(rig.basin.parts, rig.basin.states, strict=True):
        state.eta[:] = shape(part.mesh.face_xyz[:, 0])
    steps = 2 * round(period / 360.0)
    rig.run(STEPPERS[name], 2 * period / steps, steps, AGREE)
    inside = ~mesh.face_outer
    expected = shape(mesh.face_xyz[:, 0])
    assert np.max(np.abs(rig.eta() - expected)[inside]) < 0.01 * np.max(np.abs(expected))


@pytest.mark.parametrize("radiating", [False, True])
@pytest.mark.parametrize("name", ["two-stage", "two-stage jacobian", "one-stage"])
def test_steps_keep_order_two_with_an_open_boundary_that_moves(name, radiating):
    mesh = channel(40e3, 15e3, 2.5e3, 30.0)
    options = dict(height=0.3, radius=10e3, at=(20e3, 8e3), on=MPI.COMM_SELF, opening=opened(radiating, lambda t: 0.3 * np.sin(t / 900.0)))
    end = 1800.0
    reference = Rig(mesh, 1, 1, physics(drag=2.5e-3), **options).run(RungeKutta4(), end / 720, 720).eta()
    errors = []
    for steps in (30, 60, 120):
        eta = Rig(mesh, 1, 1, physics(drag=2.5e-3), **options).run(STEPPERS[name], end / steps, steps).eta()
        errors.append(np.max(np.abs(eta - reference)[~mesh.face_outer]))
    slopes = np.log2(np.array(errors[:-1]) / errors[1:])
    assert np.all(np.abs(slopes - 2.0) < 0.25), (errors, slopes)


@pytest.mark.parametrize("radiating", [False, True])
def test_operators_with_an_open_boundary(radiating):
    """Clamped: S is skew bit by bit. Radiating: its symmetric part is minus the damping, on boundary edges only."""
    mesh = channel(30e3, 15e3, 3e3, 40.0)
    (patch,) = Rig(mesh, 1, 1, physics(), height=0.0, on=MPI.COMM_SELF, opening=opened(radiating)).basin.patches
    (state,) = Rig(mesh, 1, 1, physics(), height=0.1, at=(15e3, 7e3), radius=8e3, on=MPI.COMM_SELF, opening=opened(radiating)).basin.states
    wave = patch.linear_operator("wave", state, 0.0)
    symmetric = (wave.matrix + wave.matrix.T).toarray()
    assert wave.skew == (not radiating)
    assert np.array_equal(symmetric, np.diag(-2 * np.concatenate([np.zeros(patch.mf), patch.water.opening.damping(patch.ms)])))
    rng = np.random.default_rng(3)
    state.u[: patch.ms] = 0.1 * rng.standard_normal(patch.ms)
    from swe.mesh.topology import still_edges

    state.u[still_edges(mesh)] = 0.0
    jacobian = patch.linear_operator("jacobian", state, 0.0)
    direction = rng.standard_normal(patch.mf + patch.ms)
    direction[: patch.mf][mesh.face_outer] = 0.0
    direction[patch.mf :][still_edges(mesh)[: patch.ms]] = 0.0
    h = 1e-5
    forward, backward = state.copy(), state.copy()
    for moved, sign in ((forward, h), (backward, -h)):
        moved.eta[: patch.mf] += sign * direction[: patch.mf]
        moved.u[: patch.ms] += sign * direction[patch.mf :]
    difference = (patch.rates(forward, 0.0) - patch.rates(backward, 0.0)) / (2 * h)
    found = jacobian.apply(direction)
    moving = np.concatenate([~mesh.face_outer, ~still_edges(mesh)[: patch.ms]])
    np.testing.assert_allclose(found[moving], difference[moving], atol=1e-6 * np.max(np.abs(difference)))
