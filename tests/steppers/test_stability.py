"""What limits the length of a step, besides accuracy: the cut between subdomains, and motion that the operator leaves out."""

import numpy as np
import pytest
from basins import Rig, along_normals, bowl, physics
from mpi4py import MPI

from swe.errors import NumericalFailure
from swe.mesh.lattice import periodic_hexagons
from swe.mesh.topology import with_depth
from swe.simulation.basin import water_on
from swe.steppers.one_stage import OneStage
from swe.steppers.two_stage import TwoStage

STEPPERS = {
    "two-stage wave": TwoStage("wave", "lanczos", 1e-8, 200),
    "one-stage jacobian": OneStage("arnoldi", 1e-8, 200),
}


@pytest.mark.parametrize("name", STEPPERS)
@pytest.mark.parametrize("overlap", [1, 3])
def test_the_cut_is_stable_while_a_wave_crosses_less_than_the_overlap_in_a_step(name, overlap):
    """Three fifths of the overlap: nothing grows in 200 steps. Three halves of it: what the cut adds grows without limit.

    Information beyond overlap layers is missing, so this is the condition of Courant, Friedrichs & Lewy (1928) with the overlap
    in the place of the spacing; that it decides is measured. Water 100 to 500 m deep, c of the deepest; hump of 1 mm, no drag.
    """
    mesh = bowl(800e3, 600e3, 50e3, least=100.0, deepest=500.0)
    crossing = overlap * 50e3 / np.sqrt(9.81 * 500.0)

    def range_of_level(part):
        rig = Rig(mesh, 5, overlap, physics(1e-4), height=1e-3, radius=120e3, at=(360e3, 320e3), on=MPI.COMM_SELF)
        try:
            rig.run(STEPPERS[name], part * crossing, 200)
        except NumericalFailure:
            return np.inf
        return max(report.highest - report.lowest for report in rig.reports[-50:])

    assert range_of_level(0.6) < 4e-3
    assert range_of_level(1.5) > 40e-3


ADVECTED, SPACING, SPEED = 24, 1000.0, 1.0


def growth_and_turn(name, step, waves, steps=12):
    """Factor per step and frequency, rad s-1, of a small wave of vorticity that a uniform current carries along; f = 0."""
    mesh = periodic_hexagons(ADVECTED, ADVECTED, SPACING)
    mesh = with_depth(mesh, np.full(mesh.n_faces, 0.5))
    operators = water_on(mesh, physics(0.0)).operators
    wave = np.exp(2j * np.pi * waves / mesh.period[0] * mesh.node_xyz[:, 0])
    current = along_normals(mesh, [SPEED, 0.0])
    stepper = {"two-stage wave": TwoStage("wave", "lanczos", 1e-12, 200), "one-stage jacobian": OneStage("arnoldi", 1e-12, 200)}[
        name
    ]
    rig = Rig(mesh, 1, 1, physics(0.0), height=0.0, on=MPI.COMM_SELF)
    rig.scatter(np.zeros(mesh.n_faces), current - operators.along @ (1e-6 * SPEED * SPACING * wave.real))
    amplitudes = []
    for _ in range(steps):
        rig.run(stepper, step, 1)
        amplitudes.append(np.mean(operators.curl @ (rig.u() - current) * np.conj(wave)))
    amplitudes = np.array(amplitudes[3:])
    turn = -np.mean(np.angle(amplitudes[1:] / amplitudes[:-1])) / step
    return np.abs(amplitudes[-1] / amplitudes[0]) ** (1 / (len(amplitudes) - 1)), turn


@pytest.mark.parametrize("waves", [3, 6, 8])
@pytest.mark.parametrize("step", [300.0, 600.0])
def test_advection_outside_the_operator_grows_like_heuns_method(step, waves):
    """Vorticity has no frequency in the wave operator, so the two-stage step treats it like Heun's method (Heun 1900): a factor

        |1 + i w dt - (w dt)^2/2| = (1 + (w dt)^4/4)^(1/2)

    a step, w = U k of the mesh. With the Jacobian advection is inside the exponential and the factor is 1.
    """
    kept, omega = growth_and_turn("one-stage jacobian", step, waves)
    grown, _ = growth_and_turn("two-stage wave", step, waves)
    print(f"w dt {omega * step:.3f}: factor {grown:.9f}, Heun {np.sqrt(1 + (omega * step) ** 4 / 4):.9f}, Jacobian {kept:.9f}")
    assert kept == pytest.approx(1.0, abs=1e-9)
    assert grown == pytest.approx(np.sqrt(1 + (omega * step) ** 4 / 4), abs=1e-9)
    assert 0.6 < omega / (SPEED * 2 * np.pi * waves / (ADVECTED * SPACING)) < 1.0
