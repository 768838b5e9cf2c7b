"""Water at rest over a rough bed stays at rest; uniform potential vorticity stays uniform.

The pressure term is a difference of levels, so a level surface has no slope whatever the bed ("lake at rest": common practice, no
source). Uniform q: with q = q0 everywhere, d zeta/dt = -q0 div_v F and dh_v/dt = -div_v F at nodes, so zeta + f - q0 h_v stays
zero (Ringler et al. 2010, J. Comput. Phys. 229, 3065); it is linear in the state, and both operators of the exponential steps
keep it.
"""

import numpy as np
import pytest
from basins import physics
from channels import irregular_plane
from lakes import lake
from steps import EXPONENTIAL, STEPPERS, rig

from swe.mesh.topology import with_depth
from swe.simulation.basin import water_on
from swe.steppers.one_stage import OneStage
from swe.steppers.two_stage import TwoStage


def rough(seed):
    """The lake with its two islands; every face has a random depth between 10 and 1000 m."""
    mesh = lake()
    return with_depth(mesh, np.random.default_rng(seed).uniform(10.0, 1000.0, mesh.n_faces))


@pytest.mark.parametrize("name", EXPONENTIAL)
def test_lake_at_rest_with_a_level_of_its_own(name):
    """1,000 steps of a minute: not one digit moves."""
    run = rig(rough(1), f=1e-4, drag=2.5e-3, count=3).fill(lambda part: np.full(part.n_faces, 0.37))
    run.run(EXPONENTIAL[name], 60.0, 1000)
    assert np.max(np.abs(run.u())) == 0.0
    assert np.all(run.eta() == 0.37)


LOOSE = {"two-stage wave": TwoStage("wave", "lanczos", 1e-3, 300), "one-stage jacobian": OneStage("arnoldi", 1e-3, 300)}


@pytest.mark.parametrize("name", LOOSE)
def test_lake_at_rest_but_for_the_last_digits(name):
    """1,000 steps of 10 s from a level with noise of 1e-15 m: |u| stays below 1e-12 m/s, though every step does all its work."""
    mesh = rough(2)
    noise = np.random.default_rng(3).uniform(-1e-15, 1e-15, mesh.n_faces)
    run = rig(mesh, f=1e-4, drag=2.5e-3, count=3, overlap=6).scatter(noise, np.zeros(mesh.n_edges))
    run.run(LOOSE[name], 10.0, 1000)
    print(f"{name}: |u| {np.max(np.abs(run.u())):.2e} m/s, {run.basin.products.sum()} products")
    assert run.basin.products.min() > 1000
    assert 0 < np.max(np.abs(run.u())) < 1e-12


@pytest.mark.parametrize("name", STEPPERS)
def test_uniform_potential_vorticity_stays(name):
    """Flat bed, level 0 and u = grad phi: q = f/D everywhere, far from balance; it stays so while levels move by metres.

    On a plane of irregular faces without coast (on a coast free slip has its own vorticity, 0). 1e-8: the tolerance of the action
    and the cut; Runge-Kutta, which is neither, leaves round-off.
    """
    mesh = irregular_plane(60e3, 40e3, 400, 3, 40.0)
    water = water_on(mesh, physics(f=1e-4))
    x, y = mesh.face_xyz[:, :2].T
    phi = 8e3 * np.cos(2 * np.pi * x / 60e3) * np.cos(2 * np.pi * y / 40e3)
    basin = rig(mesh, f=1e-4, count=3, overlap=10).scatter(np.zeros(mesh.n_faces), water.operators.grad @ phi)
    basin.run(STEPPERS[name], 30.0, 60)
    h_node, _ = water.thickness(basin.eta())
    q = (water.coriolis_node + water.operators.curl @ basin.u()) / h_node
    off = np.max(np.abs(q / (1e-4 / 40.0) - 1.0))
    print(f"{name}: level {np.ptp(basin.eta()):.2f} m, q off by {off:.2e}")
    assert np.ptp(basin.eta()) > 1.0
    assert off < (1e-11 if name == "runge-kutta-4" else 1e-8)
