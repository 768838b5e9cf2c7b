"""Wind set-up of a closed channel of constant depth: the steady state of g h dh/dx = tau/rho.

    h^2 = A + B x,   B = 2 tau/(rho g),   2/(3 B) ( (A + B L)^(3/2) - A^(3/2) ) = H L       (volume)

Verified by substitution; the linear form, +- tau L/(2 rho g H), is common practice. tau = 1 Pa, rho = 1000 kg m-3, H = 10 m,
L = 100 km: h - H = -0.518808732457 m and +0.501445028597 m at the ends, linear +-0.509683996 m. In the discrete equations
(h_2 - h_1) times the mean of h_1 and h_2 is half the difference of the squares, so the profile is steady to round-off on any
mesh.
"""

import numpy as np
import pytest
from lakes import lake
from scipy.optimize import brentq
from steps import EXPONENTIAL, TWO_STAGE, rig

from swe.dynamics.forcing.wind import ConstantWind
from swe.dynamics.physics import NoRotation, Physics
from swe.mesh.lattice import ROW, hexagons_in
from swe.mesh.topology import with_depth

TAU, DENSITY, GRAVITY, DEPTH, LENGTH = 1.0, 1000.0, 9.81, 10.0, 100e3
SLOPE = 2 * TAU / (DENSITY * GRAVITY)


def law(drag=0.0):
    return Physics(GRAVITY, DENSITY, drag, 0.0, NoRotation())


def constant(volume):
    """A of the profile whose volume per width is `volume`, m2."""
    return brentq(lambda a: 2 / (3 * SLOPE) * ((a + SLOPE * LENGTH) ** 1.5 - a**1.5) - volume, 50.0, 100.0, xtol=1e-12)


def wind(part):
    return (ConstantWind.on(part, TAU, 0.0),)


def channel():
    mesh = hexagons_in(LENGTH, 4 * 5e3 * ROW, 5e3)
    return with_depth(mesh, np.full(mesh.n_faces, DEPTH))


def profile(x):
    return np.sqrt(constant(DEPTH * LENGTH) + SLOPE * x) - DEPTH


def test_levels_at_the_ends():
    assert profile(0.0) == pytest.approx(-0.518808732457, abs=1e-11)
    assert profile(LENGTH) == pytest.approx(0.501445028597, abs=1e-11)


@pytest.mark.parametrize("name", EXPONENTIAL)
@pytest.mark.parametrize("basin", ["channel", "lake"])
def test_the_profile_stays(name, basin):
    """Started there, 30 steps of 20 min (channel) or 2 min (lake with islands): |u| < 1e-12 m/s, level within 1e-12 m."""
    mesh, step = (channel(), 1200.0) if basin == "channel" else (with_depth(lake(), np.full(lake().n_faces, DEPTH)), 120.0)

    def level(part):
        return profile(part.face_xyz[:, 0])

    run = rig(mesh, law=law(), forcing=wind).fill(level)
    run.run(EXPONENTIAL[name], step, 30)
    print(f"{name}: |u| {np.max(np.abs(run.u())):.2e}, level {np.max(np.abs(run.eta() - level(mesh))):.2e}")
    assert np.max(np.abs(run.u())) < 1e-12
    assert np.max(np.abs(run.eta() - level(mesh))) < 1e-12


def test_a_channel_at_rest_settles_there():
    """Strong bottom drag, C_d = 0.03, four days; the last of the seiche is averaged out: within 0.3 % of the set-up.

    That tells the nonlinear profile from the linear one, which is off by 1.7 %.
    """
    mesh, step, period = channel(), 1200.0, 2 * LENGTH / np.sqrt(GRAVITY * DEPTH)
    run = rig(mesh, law=law(drag=0.03), forcing=wind).run(TWO_STAGE, step, 288)
    mean = sum(run.run(TWO_STAGE, step, 1).eta() for _ in range(round(period / step))) / round(period / step)
    x = mesh.face_xyz[:, 0]
    error, linear = (
        np.max(np.abs(mean - level)) / 0.51 for level in (profile(x), TAU / (DENSITY * GRAVITY * DEPTH) * (x - LENGTH / 2))
    )
    print(f"from the profile {error:.2e}, from the linear one {linear:.2e}")
    assert error < 0.003
    assert linear > 0.01
    assert np.max(np.abs(run.u())) < 0.02
