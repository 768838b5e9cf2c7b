"""A sea so deep that waves cross it at once answers the equilibrium tide: eta = eta_eq less its mean over the sea.

Checks of the forcing: static limit, error (w/k c)^2; common practice, no source.
"""

from datetime import datetime

import numpy as np
import pytest
from basins import Rig

from swe.constants import EARTH_RADIUS
from swe.dynamics.forcing.tide import EquilibriumHead
from swe.dynamics.physics import NoRotation, Physics
from swe.errors import InputError
from swe.mesh.lattice import hexagons_in, icosahedral
from swe.mesh.topology import with_depth
from swe.mesh.voronoi import sphere_mesh
from swe.steppers.runge_kutta import RungeKutta4
from swe.tide.equilibrium import EquilibriumTide

GRAVITY, DEPTH = 9.81, 4e7
START = datetime(2031, 3, 1)
NAMES = ["M2", "K1", "Mf"]
RAMP, STEP = 6 * 3600.0, 30.0


def globe():
    return icosahedral(2, EARTH_RADIUS, 3)


def sea():
    """The faces of the globe within 60 degrees of a place."""
    whole = icosahedral(3, EARTH_RADIUS, 3)
    middle = np.array([0.5, -0.4, np.sqrt(0.59)])
    return sphere_mesh(whole.face_xyz, whole.face_xyz @ middle > 0.5 * EARTH_RADIUS, EARTH_RADIUS)


def places(mesh):
    x, y, z = mesh.face_xyz.T / EARTH_RADIUS
    return np.degrees(np.arctan2(y, x)), np.degrees(np.arcsin(z))


@pytest.mark.parametrize("basin", [globe, sea])
def test_deep_water_follows_the_equilibrium_tide(basin):
    mesh = basin()
    mesh = with_depth(mesh, np.full(mesh.n_faces, DEPTH))

    def forcing(part):
        return (EquilibriumHead.on(part, GRAVITY, NAMES, START, RAMP),)

    law = Physics(GRAVITY, 1025.0, 0.0, 0.0, NoRotation())
    rig = Rig(mesh, 1, 4, law, height=0.0, forcing=forcing)
    steps = round(8 * 3600.0 / STEP)
    rig.run(RungeKutta4(), STEP, steps)
    still = EquilibriumTide.at(*places(mesh), NAMES, START, 0.0).level(steps * STEP)
    still -= np.average(still, weights=mesh.face_area)
    error = np.abs(rig.eta() - still).max() / np.abs(still).max()
    print(f"{mesh.n_faces} faces, largest {np.abs(still).max():.3f} m, error {error:.2e}")
    assert np.abs(still).max() > 0.05
    assert error < 1e-3


def test_the_head_is_minus_g_times_the_level():
    mesh = globe()
    head = EquilibriumHead.on(mesh, GRAVITY, NAMES, START, 0.0).head(7e5)
    assert np.allclose(head, -GRAVITY * EquilibriumTide.at(*places(mesh), NAMES, START, 0.0).level(7e5), rtol=1e-9, atol=1e-12)


def test_a_plane_has_no_equilibrium_tide():
    with pytest.raises(InputError, match="equilibrium tide: needs a basin on the sphere, found a plane"):
        EquilibriumHead.on(hexagons_in(5e4, 5e4, 1e4), GRAVITY, NAMES, START, 0.0)
