"""Rates of smooth fields approach those of the differential equations as the mesh is refined.

Manufactured fields: Roache 2002, J. Fluids Eng. 124, 4 (from memory). Steady zonal flow: Williamson et al. 1992, J. Comput. Phys.
102, 211, test case 2; that the rates shrink more slowly than the square of the spacing on the sphere is published (Ringler et
al. 2010, J. Comput. Phys. 229, 3065; Peixoto 2016, J. Comput. Phys. 310, 127).
"""

import numpy as np
import pytest
from dynamics.dynamics_examples import DENSITY, GRAVITY, water_on

from swe.constants import EARTH_RADIUS, EARTH_ROTATION
from swe.dynamics.equations import Water
from swe.dynamics.physics import FPlane, Physics, Sphere, coriolis_at_nodes
from swe.dynamics.viscosity import viscosity
from swe.mesh.lattice import icosahedral, periodic_hexagons
from swe.mesh.topology import with_depth
from swe.operators import build, reconstruction

F, DRAG, WIND = 1e-4, 0.0025, (0.2, -0.1)


class Manufactured:
    """eta = e cos kx cos ly, u = U sin kx cos ly, v = V cos kx sin ly, D = b0 + b1 cos 2kx cos 2ly, periodic."""

    def __init__(self, period):
        self.k, self.l = 2 * np.pi / period[0], 2 * np.pi / period[1]
        self.e, self.u0, self.v0, self.b0, self.b1 = 0.8, 0.7, -0.4, 40.0, 9.0

    def depth(self, x, y):
        return self.b0 + self.b1 * np.cos(2 * self.k * x) * np.cos(2 * self.l * y)

    def level(self, x, y):
        return self.e * np.cos(self.k * x) * np.cos(self.l * y)

    def flow(self, x, y):
        kx, ly = self.k * x, self.l * y
        return self.u0 * np.sin(kx) * np.cos(ly), self.v0 * np.cos(kx) * np.sin(ly)

    def rates(self, x, y):
        """Exact (d eta/dt, du/dt, dv/dt) with rotation, wind and bottom drag."""
        k, m, kx, ly = self.k, self.l, self.k * x, self.l * y
        (u, v), h = self.flow(x, y), self.depth(x, y) + self.level(x, y)
        u_x, u_y = k * self.u0 * np.cos(kx) * np.cos(ly), -m * self.u0 * np.sin(kx) * np.sin(ly)
        v_x, v_y = -k * self.v0 * np.sin(kx) * np.sin(ly), m * self.v0 * np.cos(kx) * np.cos(ly)
        eta_x, eta_y = -k * self.e * np.sin(kx) * np.cos(ly), -m * self.e * np.cos(kx) * np.sin(ly)
        h_x = eta_x - 2 * k * self.b1 * np.sin(2 * kx) * np.cos(2 * ly)
        h_y = eta_y - 2 * m * self.b1 * np.cos(2 * kx) * np.sin(2 * ly)
        rub = DRAG * np.hypot(u, v) / h
        level = -(u * h_x + v * h_y + h * (u_x + v_y))
        along_x = F * v - u * u_x - v * u_y - GRAVITY * eta_x + WIND[0] / (DENSITY * h) - rub * u
        along_y = -F * u - u * v_x - v * v_y - GRAVITY * eta_y + WIND[1] / (DENSITY * h) - rub * v
        return level, along_x, along_y


def rms(error, exact):
    return np.sqrt((error**2).mean() / (exact**2).mean())


def lattice(n):
    return periodic_hexagons(12 * n, 14 * n, 2000.0 / n)


def manufactured_errors(n):
    mesh = lattice(n)
    fields = Manufactured(mesh.period)
    face, edge = mesh.face_xyz[:, :2].T, mesh.edge_xyz[:, :2].T
    mesh = with_depth(mesh, fields.depth(*face))
    water = water_on(mesh, FPlane(F), drag=DRAG, wind=WIND)
    normal_x, normal_y = mesh.edge_normal[:, :2].T
    u, v = fields.flow(*edge)
    level, velocity = water.rates(fields.level(*face), u * normal_x + v * normal_y, 0.0)
    exact_level = fields.rates(*face)[0]
    _, along_x, along_y = fields.rates(*edge)
    exact_velocity = along_x * normal_x + along_y * normal_y
    return np.array([rms(level - exact_level, exact_level), rms(velocity - exact_velocity, exact_velocity)])


def test_manufactured_rates_converge_with_second_order():
    coarse, middle, fine = (manufactured_errors(n) for n in (1, 2, 4))
    assert np.all(np.log2(middle / fine) > 1.95), (coarse, middle, fine)
    assert np.all(np.log2(coarse / middle) > 1.85)
    assert np.all(fine < 1e-2)


def viscous_errors(n):
    """Of the vectors at face centres, and of the damping rate of a flow with divergence and vorticity."""
    mesh = lattice(n)
    op, k, m = build(mesh), 2 * np.pi / mesh.period[0], 2 * np.pi / mesh.period[1]
    x, y = mesh.edge_xyz[:, :2].T
    u = np.sin(k * x) * np.cos(m * y) * mesh.edge_normal[:, 0] + np.cos(k * x) * np.sin(m * y) * mesh.edge_normal[:, 1]
    exact = -(k**2 + m**2)
    push = viscosity(op, 1.0, u, op.curl @ u)
    vectors = [rms(r @ (push - exact * u), exact * (r @ u)) for r in reconstruction(mesh)]
    return np.array([*vectors, abs((u @ push) / (u @ u) / exact - 1.0)])


def test_viscosity_converges_at_face_centres_and_in_its_damping():
    """Edge by edge it does not (swe.dynamics.viscosity)."""
    coarse, fine = viscous_errors(1), viscous_errors(2)
    assert np.all(np.log2(coarse / fine) > 1.9) and np.all(fine < 0.02)


def zonal_rates(level, tilt):
    """Rates of the steady zonal flow, which should vanish: (d eta/dt over u0 H/a, du/dt over f u0), root mean square."""
    mesh = icosahedral(level, EARTH_RADIUS, 20)
    u0, gravity, top = 2 * np.pi * EARTH_RADIUS / (12 * 86400.0), 9.80616, 2.94e4
    axis = np.array([-np.sin(tilt), 0.0, np.cos(tilt)])
    height = (top - (EARTH_RADIUS * EARTH_ROTATION * u0 + u0**2 / 2) * (mesh.face_xyz @ axis / EARTH_RADIUS) ** 2) / gravity
    mesh = with_depth(mesh, np.full(mesh.n_faces, 2400.0))
    law = Sphere(EARTH_ROTATION, tilt)
    water = Water(mesh, build(mesh), Physics(gravity, 1000.0, 0.0, 0.0, law), coriolis_at_nodes(mesh, law))
    u = (np.cross(axis, mesh.edge_xyz) * mesh.edge_normal).sum(axis=1) * u0 / EARTH_RADIUS
    rates = water.rates(height - mesh.depth, u, 0.0)
    scaled = rates[0] / (u0 * 2400.0 / EARTH_RADIUS), rates[1] / (2 * EARTH_ROTATION * u0)
    return np.array([np.sqrt((rate**2).mean()) for rate in scaled])


@pytest.mark.parametrize("tilt", [0.0, np.pi / 4])
def test_steady_zonal_flow_comes_to_rest_with_refinement(tilt):
    errors = np.array([zonal_rates(level, tilt) for level in (2, 3, 4)])
    assert np.all(errors[:-1] / errors[1:] > 1.4)
    assert np.all(errors[-1] < 0.02)
