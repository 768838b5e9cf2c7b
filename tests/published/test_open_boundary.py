"""Open boundaries: what goes out stays out, what is given comes in, and water is accounted for."""

from dataclasses import replace

import numpy as np
import pytest
from basins import Rig, physics
from channels import straight_channel
from mpi4py import MPI
from scipy import sparse
from scipy.sparse.linalg import spsolve

from swe.dynamics import diagnostics
from swe.dynamics.opening import facing, opening_of
from swe.mesh.lattice import ROW, hexagons_in
from swe.mesh.topology import Mesh, open_edges, still_edges, with_depth, with_outer
from swe.steppers.one_stage import OneStage
from swe.steppers.runge_kutta import RungeKutta4
from swe.steppers.two_stage import TwoStage

GRAVITY = 9.81
TIGHT = 1e-10

M2 = 1.405189e-4
"""rad s-1: checks 5.1."""

STEPPERS = {
    "two-stage": TwoStage("wave", "lanczos", TIGHT, 300),
    "two-stage jacobian": TwoStage("jacobian", "arnoldi", TIGHT, 300),
    "one-stage": OneStage("arnoldi", TIGHT, 300),
    "runge-kutta-4": RungeKutta4(),
}


def channel(length: float, spacing: float, depth: float, across: int = 4) -> Mesh:
    """A channel along y, periodic across: open at y = 0, where its first row of faces lies outside, a straight wall at the head.

    The boundary line is the mean line of the zigzag between the first two rows; y counts from there.
    """
    row = ROW * spacing
    mesh = straight_channel(across, 2 * (round(length / row) // 2) + 2, spacing, depth)
    moved = replace(mesh, face_xyz=mesh.face_xyz - [0.0, row, 0.0])
    return with_outer(moved, moved.face_xyz[:, 1] < 0.0)


def square(spacing: float = 2e3, depth: float = 30.0) -> Mesh:
    """A basin with coast on three sides, open to the west."""
    mesh = hexagons_in(60e3, 40e3, spacing)
    return with_outer(with_depth(mesh, np.full(mesh.n_faces, depth)), mesh.face_xyz[:, 0] < 0.8 * spacing)


def opened(whole: Mesh, radiating: bool, level=lambda time: 0.0):
    """The maker of the open boundary of any part of `whole`, with one level all along it."""
    table = dict(zip(whole.edge_id[open_edges(whole)[0]], facing(whole), strict=True))

    def on(mesh: Mesh):
        fit = np.array([table[edge] for edge in mesh.edge_id[open_edges(mesh)[0]]])
        return opening_of(mesh, lambda time: np.full(np.count_nonzero(mesh.face_outer), level(time)), GRAVITY, radiating, fit)

    return on


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
    """Flather 1976 at normal incidence; a pulse of 20 faces: half of it leaves at once, the other half after the wall."""
    length, middle, depth = 200e3, 100e3, 50.0
    mesh = channel(length, 2e3, depth)
    c = np.sqrt(GRAVITY * depth)
    rig = Rig(mesh, 3, 8, physics(f=0.0), height=0.0, on=MPI.COMM_SELF, opening=opened(mesh, True))
    for part, state in zip(rig.basin.parts, rig.basin.states, strict=True):
        state.eta[:] = 0.01 * np.exp(-(((part.mesh.face_xyz[:, 1] - middle) / 20e3) ** 2))
    start = energy(rig)
    step = 150.0
    rig.run(STEPPERS[name], step, round(1.5 * (length + middle) / c / step))
    assert energy(rig) < 0.01 * start


@pytest.mark.parametrize("name", STEPPERS)
@pytest.mark.parametrize("radiating", [False, True])
def test_water_that_is_there_equals_water_that_came(name, radiating):
    """Change of volume = time integral of the transport through the boundary, at round-off."""
    mesh = square()

    def tide(time):
        return 0.5 * np.sin(2 * np.pi * time / 7200.0)

    rig = Rig(
        mesh,
        4,
        3,
        physics(drag=2.5e-3),
        height=0.2,
        radius=10e3,
        at=(30e3, 10e3),
        on=MPI.COMM_SELF,
        opening=opened(mesh, radiating, tide),
    )

    def volume():
        parts = zip(rig.basin.parts, rig.basin.patches, rig.basin.states, strict=True)
        return sum(
            diagnostics.volume_anomaly(q.water, s.eta, np.flatnonzero(~p.mesh.face_outer[: p.n_owned])) for p, q, s in parts
        )

    before = volume()
    rig.run(STEPPERS[name], 30.0 if name == "runge-kutta-4" else 120.0, 40)
    came = -sum(rig.basin.outflow)
    assert abs(came) > 1e-4 * rig.volume
    assert abs(volume() - before - came) < 1e-14 * rig.volume


@pytest.mark.parametrize("radiating", [False, True])
@pytest.mark.parametrize("name", ["two-stage", "one-stage"])
def test_localised_equals_one_domain_with_open_boundary_and_forcing(name, radiating):
    mesh = square()

    def tide(time):
        return 0.5 * np.sin(2 * np.pi * time / 7200.0)

    options = dict(height=0.2, radius=10e3, at=(30e3, 10e3), on=MPI.COMM_SELF, opening=opened(mesh, radiating, tide))
    whole = Rig(mesh, 1, 1, physics(drag=2.5e-3), **options).run(STEPPERS[name], 120.0, 10)
    cut = Rig(mesh, 5, 8, physics(drag=2.5e-3), **options).run(STEPPERS[name], 120.0, 10)
    assert np.max(np.abs(whole.eta() - cut.eta())) < 1e-8
    assert np.max(np.abs(whole.eta())) > 0.1


def test_clamped_boundary_holds_its_tide():
    mesh = square()
    rig = Rig(
        mesh, 3, 4, physics(), height=0.0, on=MPI.COMM_SELF, opening=opened(mesh, False, lambda time: 0.4 * np.cos(time / 1e4))
    )
    rig.run(STEPPERS["two-stage"], 120.0, 20)
    assert np.max(np.abs(rig.eta()[mesh.face_outer] - 0.4 * np.cos(20 * 120.0 / 1e4))) < 1e-12


def response(mesh: Mesh, frequency: float) -> np.ndarray:
    """Complex level of the faces with cos(frequency t) on the boundary: (i w - L) x = b, L and b as the steppers see them."""
    rig = Rig(mesh, 1, 1, physics(f=0.0), height=0.0, on=MPI.COMM_SELF, opening=opened(mesh, False, lambda time: 1.0))
    (patch,), (state,) = rig.basin.patches, rig.basin.states
    wave = patch.linear_operator("wave", state, 0.0)
    weights = sparse.diags_array(wave.weights)
    matrix = sparse.diags_array(1.0 / wave.weights) @ wave.matrix @ weights
    system = (1j * frequency * sparse.eye_array(wave.size) - matrix).tocsc()
    return spsolve(system, patch.rates(state, 0.0).astype(complex))[: patch.mf]


@pytest.mark.parametrize("length, tolerance", [(150e3, 2e-3), (200e3, 5e-3), (235e3, 1e-2)])
def test_co_oscillating_tide_in_a_channel(length, tolerance):
    """eta = cos(k (L - y)) / cos(k L) between the open end y = 0 and the head y = L; M2, 50 m: checks 5.4 without drag.

    The longest is near resonance: a quarter wave is 247.6 km long and the head has 12 times the boundary's amplitude.
    """
    mesh = channel(length, 5e3, 50.0)
    inside, y = ~mesh.face_outer, mesh.face_xyz[:, 1]
    head = (round(length / (ROW * 5e3)) // 2 * 2 + 1) * ROW * 5e3
    k = M2 / np.sqrt(GRAVITY * 50.0)
    exact = np.cos(k * (head - y)) / np.cos(k * head)
    found = response(mesh, M2)
    assert np.max(np.abs(found - exact)[inside]) < tolerance * np.max(np.abs(exact[inside]))


@pytest.mark.parametrize("radiating", [False, True])
@pytest.mark.parametrize("name", ["two-stage", "two-stage jacobian", "one-stage"])
def test_steps_keep_order_two_with_an_open_boundary_that_moves(name, radiating):
    mesh = square(4e3)
    options = dict(
        height=0.3,
        radius=10e3,
        at=(20e3, 8e3),
        on=MPI.COMM_SELF,
        opening=opened(mesh, radiating, lambda t: 0.3 * np.sin(t / 900.0)),
    )
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
    mesh = square(5e3)
    (patch,) = Rig(mesh, 1, 1, physics(), height=0.0, on=MPI.COMM_SELF, opening=opened(mesh, radiating)).basin.patches
    (state,) = Rig(
        mesh, 1, 1, physics(), height=0.1, at=(15e3, 7e3), radius=8e3, on=MPI.COMM_SELF, opening=opened(mesh, radiating)
    ).basin.states
    wave = patch.linear_operator("wave", state, 0.0)
    symmetric = (wave.matrix + wave.matrix.T).toarray()
    assert wave.skew == (not radiating)
    assert np.array_equal(symmetric, np.diag(-2 * np.concatenate([np.zeros(patch.mf), patch.water.opening.damping(patch.ms)])))
    rng = np.random.default_rng(3)
    state.u[: patch.ms] = 0.1 * rng.standard_normal(patch.ms)
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
