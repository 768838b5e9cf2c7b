"""Inertia-gravity waves on regular hexagons, doubly periodic, through the whole localised step.

Discrete dispersion, theta_j = d k . n_j at 0, 60 and 120 degrees (derived for these tests and verified against the 4 by 4
symbol; the published analysis is Thuburn 2008, J. Comput. Phys. 227; from memory):

    w^2 = f^2 F + 8 c^2/(3 d^2) [ sin^2(theta_0/2) + sin^2(theta_1/2) + sin^2(theta_2/2) ]
    F = ( [2 cos(theta_2/2) + cos((theta_0 + theta_1)/2)]^2 + [2 cos(theta_0/2) + cos((theta_1 + theta_2)/2)]^2
        + [2 cos(theta_1/2) + cos((theta_0 - theta_2)/2)]^2 ) / 27

and w^2 = f^2 + c^2 k^2 as d vanishes (Gill 1982, section 8.2; from memory). Amplitude 1e-7 m on 100 m: the steps are
nonlinear, and what they add is of the order of the amplitude over the depth.
"""

import numpy as np
import pytest
from basins import physics
from steps import EXPONENTIAL, rig

from swe.mesh.lattice import ROW, periodic_hexagons
from swe.mesh.topology import with_depth
from swe.simulation.basin import water_on
from swe.steppers.one_stage import OneStage
from swe.steppers.two_stage import TwoStage

F, GRAVITY, DEPTH = 1e-4, 9.81, 100.0
C = np.sqrt(GRAVITY * DEPTH)
LENGTH = 100e3

TIGHT = {"two-stage wave": TwoStage("wave", "lanczos", 1e-12, 300), "one-stage jacobian": OneStage("arnoldi", 1e-12, 300)}


def lattice(cells):
    """`cells` along a wavelength of 100 km in x, `cells` rows."""
    mesh = periodic_hexagons(cells, cells, LENGTH / cells)
    return with_depth(mesh, np.full(mesh.n_faces, DEPTH))


def wave_vector(mesh, mx, my):
    return 2 * np.pi * np.array([mx, my]) / mesh.period


def discrete_frequency(mesh, k):
    spacing = mesh.edge_distance[0]
    t0, t1, t2 = (spacing * (k @ [np.cos(a), np.sin(a)]) for a in np.pi / 3 * np.arange(3))
    turn = (2 * np.cos(t2 / 2) + np.cos((t0 + t1) / 2)) ** 2 + (2 * np.cos(t0 / 2) + np.cos((t1 + t2) / 2)) ** 2
    turn = (turn + (2 * np.cos(t1 / 2) + np.cos((t0 - t2) / 2)) ** 2) / 27
    gravity = 8 * C**2 / (3 * spacing**2) * sum(np.sin(t / 2) ** 2 for t in (t0, t1, t2))
    return np.sqrt(F**2 * turn + gravity)


def linear_rates(water, eta, u):
    """Rates of complex fields, linear about rest: a central difference, exact for terms of first and second degree."""

    def real(level, velocity):
        plus, minus = (np.concatenate(water.rates(sign * level, sign * velocity, 0.0)) for sign in (1e-6, -1e-6))
        return (plus - minus) / 2e-6

    return real(eta.real, u.real) + 1j * real(eta.imag, u.imag)


def discrete_mode(mesh, k):
    """Complex (eta (nf,), u (ne,)) of the wave that moves along k, eta = exp(i k . x), from the program's own rates.

    A plane wave on the faces, and one on the edges of each of the three directions, span a space that the linear rates map into
    itself: a matrix of 4 by 4, whose eigenvector for -i w is the mode.
    """
    water = water_on(mesh, physics(F))
    sector = np.round(np.degrees(np.arctan2(mesh.edge_normal[:, 1], mesh.edge_normal[:, 0])) / 60).astype(int) % 6
    on_faces, on_edges = (np.exp(1j * xyz[:, :2] @ k) for xyz in (mesh.face_xyz, mesh.edge_xyz))
    basis = [(on_faces, np.zeros(mesh.n_edges, dtype=complex))]
    for direction in range(3):
        sign = np.select([sector == direction, sector == direction + 3], [1.0, -1.0])
        basis.append((np.zeros(mesh.n_faces, dtype=complex), sign * on_edges))
    vectors = np.array([np.concatenate(pair) for pair in basis]).T
    images = np.array([linear_rates(water, *pair) for pair in basis]).T
    values, modes = np.linalg.eig(np.linalg.lstsq(vectors, images)[0])
    mode = vectors @ modes[:, np.argmin(values.imag)]
    mode *= on_faces[0] / mode[0]
    return mode[: mesh.n_faces], mode[mesh.n_faces :]


class Waves:
    """Waves of amplitude 1e-7 m along several k at once, stepped: what became of each, and what else there is."""

    def __init__(self, mesh, ks, stepper, step, steps, **options):
        modes = [discrete_mode(mesh, k) for k in ks]
        basin = rig(mesh, F, **options)
        basin.scatter(*(1e-7 * sum(field.real for field in fields) for fields in zip(*modes, strict=True)))
        basin.run(stepper, step, steps)
        found = basin.eta() / 1e-7
        self.ratios = np.array([2 * np.mean(found * np.conj(eta)) for eta, _ in modes])
        rest = found - sum((ratio * eta).real for ratio, (eta, _) in zip(self.ratios, modes, strict=True))
        self.rest = np.max(np.abs(rest))

    def error(self, phases):
        """Largest deviation of a complex amplitude from exp(-i phase)."""
        return np.max(np.abs(self.ratios - np.exp(-1j * np.array(phases))))


@pytest.mark.parametrize("name", TIGHT)
def test_one_long_step_turns_waves_by_their_exact_phases(name):
    """Exactness in time of a linear problem: one step of four periods of the longest wave, radius times step 168, one domain.

    Waves of amplitude a over depth H add other waves of the order of a/H = 1e-9 a radian: the rest.
    """
    mesh = lattice(16)
    ks = [wave_vector(mesh, *waves) for waves in ((1, 0), (2, 3), (-5, 2))]
    omega = np.array([discrete_frequency(mesh, k) for k in ks])
    step = 8 * np.pi / omega[0] * 1.07
    waves = Waves(mesh, ks, TIGHT[name], step, 1, count=1, overlap=1)
    reach = np.sqrt(6) * C / mesh.edge_distance[0] * step
    print(f"{name}: radius * step {reach:.0f}, error {waves.error(omega * step):.2e}, rest {waves.rest:.2e}")
    assert waves.error(omega * step) < 1e-9
    assert waves.rest < 1e-7


@pytest.mark.parametrize("name", TIGHT)
def test_subdomains_keep_phases_and_amplitudes(name):
    """The same in four subdomains, radius times step 6, two periods of the longest: the cut costs below 1e-6 at overlap 8."""
    mesh = lattice(24)
    ks = [wave_vector(mesh, *waves) for waves in ((1, 0), (2, 3), (-5, 2))]
    omega = np.array([discrete_frequency(mesh, k) for k in ks])
    step = 6 / (np.sqrt(6) * C / mesh.edge_distance[0])
    steps = round(4 * np.pi / omega[0] / step)
    waves = Waves(mesh, ks, TIGHT[name], step, steps)
    print(f"{name}: {steps} steps, error {waves.error(omega * step * steps):.2e}, rest {waves.rest:.2e}")
    assert waves.error(omega * step * steps) < 1e-6
    assert waves.rest < 1e-6


@pytest.mark.parametrize("name", EXPONENTIAL)
def test_period_converges_with_second_order(name):
    """Five periods at 8, 16, 32 cells a wavelength of 100 km: T = 0.885733405867 h (f = 1e-4 s-1, 100 m)."""
    errors = []
    for cells in (8, 16, 32):
        mesh = lattice(cells)
        k = wave_vector(mesh, 1, 0)
        exact = np.sqrt(F**2 + C**2 * (k @ k))
        assert 2 * np.pi / exact / 3600 == pytest.approx(0.885733405867, rel=1e-11)
        step = 2 * np.pi / exact / 8
        (ratio,) = Waves(mesh, [k], EXPONENTIAL[name], step, 40, overlap=10).ratios
        errors.append(-np.angle(ratio * np.exp(1j * exact * 40 * step)) / (exact * 40 * step))
    errors = np.array(errors)
    print(f"{name}: frequency errors {errors}")
    assert np.all(np.log2(errors[:-1] / errors[1:]) > 1.9)
    assert abs(errors[1]) < 0.006


def test_sixty_degrees_apart_nothing_differs():
    """The lattice has the symmetry of the hexagon: waves along x and at 60 degrees have one frequency."""
    spacing = 1000.0
    k = 2 * np.pi / (8 * spacing) * np.array([1.0, 0.0])
    turned = k[0] * np.array([0.5, ROW])
    mesh = with_depth(periodic_hexagons(8, 8, spacing), np.full(64, DEPTH))
    assert discrete_frequency(mesh, k) == pytest.approx(discrete_frequency(mesh, turned), rel=1e-14)
