"""Free modes of closed basins of constant depth.

Across a channel and in a rectangle, f = 0: T = 2 / c / ((m/Lx)^2 + (n/Ly)^2)^(1/2) (Merian 1828; Lamb 1932, Hydrodynamics,
sections 190 and 257; citations from memory). In a disc of radius R on the f-plane eta = J_s(kap r) cos(s theta - w t) with
kap^2 = (w^2 - f^2)/c^2 and w kap R J_s'(kap R) = s f J_s(kap R) (Lamb 1932, sections 209-210; from memory; the equation is
verified by substitution).
"""

import numpy as np
import pytest
from basins import along_normals, physics
from channels import ROW, disc, frequency, straight_channel
from scipy.optimize import brentq
from scipy.sparse.linalg import eigsh
from scipy.special import jv, jvp
from steps import EXPONENTIAL, TWO_STAGE, rig

from swe.dynamics.wave import wave_operator
from swe.mesh.lattice import hexagons_in
from swe.mesh.topology import with_depth
from swe.simulation.basin import water_on

GRAVITY = 9.81


def record(basin, mesh, place, stepper, step, steps):
    """Level at the face nearest `place` at the start and after each step."""
    station = np.argmin(np.hypot(*(mesh.face_xyz[:, :2] - place).T))
    levels = [basin.eta()[station]]
    for _ in range(steps):
        levels.append(basin.run(stepper, step, 1).eta()[station])
    return step * np.arange(steps + 1), np.array(levels)


def seiche(mesh, lx, ly, m, n, stepper=TWO_STAGE):
    """Period over Merian's, from four periods of the record of a station in the corner, 24 steps a period."""
    depth = mesh.depth[0]
    exact = np.pi * np.sqrt(GRAVITY * depth) * np.hypot(m / lx, n / ly)

    def level(part):
        x, y = part.face_xyz[:, :2].T
        return 1e-4 * np.cos(m * np.pi * x / lx) * np.cos(n * np.pi * y / ly)

    times, levels = record(rig(mesh).fill(level), mesh, (0.0, 0.0), stepper, 2 * np.pi / exact / 24, 96)
    return exact / frequency(times, levels, exact)


@pytest.mark.parametrize("name", EXPONENTIAL)
def test_seiche_between_straight_coasts_is_merians_with_second_order(name):
    """50 km across, 20 m deep: 0.1 % of the period at 20 rows, falling like the square of the spacing."""
    width, errors = 50e3, []
    for rows in (10, 20, 40):
        mesh = straight_channel(8, rows, width / rows / ROW, 20.0)
        errors.append(abs(seiche(mesh, 1.0, width, 0, 1, EXPONENTIAL[name]) - 1.0))
    print(f"{name}: period errors {errors}")
    assert errors[1] < 0.002
    assert np.all(np.log2(np.array(errors[:-1]) / errors[1:]) > 1.9)


def test_seiches_of_a_rectangle_of_hexagons():
    """100 km by 43 km, 20 m deep: T = 3.9662 h of mode (1, 0) within 1 % at 40 cells a length.

    The coast is a zigzag, so the error is of first order: along a coast the water is as wide as without 1/6 of a row
    (test_kelvin_wave.py), which makes 1/(6 ny) of the period of mode (1, 0).
    """
    for m, n in ((1, 0), (0, 1), (1, 1)):
        errors = []
        for nx in (20, 40):
            mesh = hexagons_in(100e3, 43e3, 100e3 / nx)
            errors.append(seiche(with_depth(mesh, np.full(mesh.n_faces, 20.0)), 100e3, 43e3, m, n) - 1.0)
        print(f"mode ({m}, {n}): period errors {errors}")
        assert abs(errors[1]) < (0.01 if m + n == 1 else 0.015)
        assert 1.8 < errors[0] / errors[1] < 2.5
        if (m, n) == (1, 0):
            assert errors[1] == pytest.approx(1 / (6 * 20), rel=0.1)


DISC, DISC_DEPTH, F = 100e3, 40.0, 1e-4
MODES = {  # s > 0 turns anticlockwise; rad s-1
    1: 3.273076645e-4,
    -1: 4.110711018e-4,
    2: 5.704573893e-4,
    -2: 6.45601205e-4,
    0: 7.655850887e-4,
}


def wave_number(omega):
    return np.sqrt((omega**2 - F**2) / (GRAVITY * DISC_DEPTH))


@pytest.mark.parametrize("s", MODES)
def test_the_frequencies_of_the_disc_solve_the_equation(s):
    def wall(omega):
        x = wave_number(omega) * DISC
        return omega * x * jvp(s, x) - s * F * jv(s, x)

    assert brentq(wall, 0.98 * MODES[s], 1.02 * MODES[s], rtol=1e-14) == pytest.approx(MODES[s], rel=1e-9)


def disc_frequency(mesh, s):
    """Frequency of the eigenvector of the wave operator that is most like exp(i s theta), near MODES[s]."""
    operator = wave_operator(water_on(mesh, physics(F)), mesh.n_faces, mesh.n_inner, rotation=True)
    omega, vectors = eigsh((1j * operator.matrix).tocsc(), k=3, sigma=MODES[s])
    x, y = mesh.face_xyz[:, :2].T
    shape = mesh.face_area * jv(s, wave_number(MODES[s]) * np.hypot(x, y)) * np.exp(-1j * s * np.arctan2(y, x))
    levels = vectors[: mesh.n_faces] / operator.weights[: mesh.n_faces, None]
    return omega[np.argmax(np.abs(shape @ levels) / np.linalg.norm(levels, axis=0))]


@pytest.mark.parametrize("s", MODES)
def test_modes_of_the_disc_with_rotation(s):
    """Within 0.2 % at R/d = 20, and at least halved from R/d = 10: between first and second order on irregular faces."""
    coarse, fine = (disc_frequency(disc(DISC, rings, DISC_DEPTH), s) / MODES[s] - 1.0 for rings in (10, 20))
    print(f"s = {s}: frequency errors {coarse:.2e}, {fine:.2e}")
    assert abs(fine) < 0.002
    assert abs(coarse) > 2 * abs(fine)


@pytest.mark.parametrize("s", [1, -1])
@pytest.mark.parametrize("name", EXPONENTIAL)
def test_modes_of_the_disc_turn_at_their_frequency(name, s):
    """The first mode of either sense in subdomains, four turns: what a station sees is the eigenvalue, within 0.1 %."""
    mesh, omega = disc(DISC, 10, DISC_DEPTH), MODES[s]
    kappa = wave_number(omega)

    def polar(xyz):
        return np.hypot(xyz[:, 0], xyz[:, 1]), np.arctan2(xyz[:, 1], xyz[:, 0])

    def level(part):
        r, theta = polar(part.face_xyz)
        return 1e-3 * jv(s, kappa * r) * np.cos(s * theta)

    def current(part):
        """-i w u_r - f u_t = -g eta_r,  -i w u_t + f u_r = -g i s eta / r."""
        r, theta = polar(part.edge_xyz)
        turn = 1e-3 * GRAVITY / (F**2 - omega**2) * np.exp(1j * s * theta)
        slope, around = kappa * jvp(s, kappa * r), 1j * s * jv(s, kappa * r) / r
        radial = turn * (1j * omega * slope - F * around)
        tangential = turn * (F * slope + 1j * omega * around)
        vector = np.column_stack(
            [radial * np.cos(theta) - tangential * np.sin(theta), radial * np.sin(theta) + tangential * np.cos(theta)]
        )
        return along_normals(part, vector.real)

    basin = rig(mesh, F).fill(level, current)
    times, levels = record(basin, mesh, (0.8 * DISC, 0.0), EXPONENTIAL[name], 2 * np.pi / omega / 24, 96)
    found = frequency(times, levels, omega)
    amplitude = np.ptp(levels) / 2 / abs(levels[0])
    print(f"{name}, s = {s}: frequency error {found / omega - 1:.2e}, amplitude {amplitude:.4f}")
    assert found == pytest.approx(disc_frequency(mesh, s), rel=1e-3)
    assert found == pytest.approx(omega, rel=0.005)
    assert amplitude == pytest.approx(1.0, abs=0.03)
