"""A Kelvin wave along a coast: eta = A exp(-y/a) cos(k x - w t), u = (g/H)^(1/2) eta, v = 0, w = c k, a = c/f.

Source: Gill 1982, Atmosphere-Ocean Dynamics, section 10.4 (from memory); the formulas satisfy the linear equations and v = 0 on
both coasts of a channel of any width (verified by substitution). Channel 4 a wide, wavelength 5 a, amplitude 1e-3 m on 40 m.
"""

import numpy as np
import pytest
from basins import along_normals
from channels import ROW, straight_channel, zigzag_channel
from steps import EXPONENTIAL, TWO_STAGE, rig

from swe.operators import reconstruction

F, GRAVITY, DEPTH = 1e-4, 9.81, 40.0
SPEED = np.sqrt(GRAVITY * DEPTH)
RADIUS = SPEED / F


class After:
    """The wave when it should have travelled one wavelength: speed over c, amplitude over A at the coast, |v|/|u|."""

    def __init__(self, channel, cells, stepper=TWO_STAGE):
        spacing = RADIUS / cells
        nx, ny = 5 * cells, 2 * round(2 * RADIUS / (ROW * spacing))
        mesh = channel(nx, ny, spacing, DEPTH)
        wavelength = nx * spacing
        k = 2 * np.pi / wavelength

        def level(xyz):
            return 1e-3 * np.exp(-xyz[:, 1] / RADIUS) * np.cos(k * xyz[:, 0])

        def current(part):
            return np.sqrt(GRAVITY / DEPTH) * along_normals(part, [1.0, 0.0]) * level(part.edge_xyz)

        basin = rig(mesh, F).fill(lambda part: level(part.face_xyz), current)
        steps = round(wavelength / (2 * spacing))
        basin.run(stepper, wavelength / SPEED / steps, steps)
        x, y = mesh.face_xyz[:, :2].T
        coast = y < ROW * spacing
        wave = [np.mean(eta[coast] * np.exp(-1j * k * x[coast])) for eta in (basin.eta(), level(mesh.face_xyz))]
        along, across = (component @ basin.u() for component in reconstruction(mesh))
        self.speed = 1.0 - np.angle(wave[0] / wave[1]) / (2 * np.pi)
        self.amplitude = abs(wave[0] / wave[1])
        self.across = np.linalg.norm(across) / np.linalg.norm(along)
        self.faces = mesh.n_faces


@pytest.mark.parametrize("name", EXPONENTIAL)
def test_along_a_straight_coast(name):
    """Eight cells a Rossby radius: speed within 1 %, amplitude within 1 % a wavelength, |v|/|u| below 1 %."""
    wave = After(straight_channel, 8, EXPONENTIAL[name])
    print(f"{name}: speed {wave.speed:.5f}, amplitude {wave.amplitude:.5f}, |v|/|u| {wave.across:.5f}")
    assert abs(wave.speed - 1.0) < 0.01
    assert abs(wave.amplitude - 1.0) < 0.01
    assert wave.across < 0.01


def test_speed_converges_with_second_order_along_a_straight_coast():
    coarse, fine = (abs(After(straight_channel, cells).speed - 1.0) for cells in (5, 10))
    print(f"speed error {coarse:.2e}, {fine:.2e}")
    assert np.log2(coarse / fine) > 1.7


def test_along_a_zigzag_of_hexagons_the_wave_lags_by_a_sixth_of_a_row():
    """A coast of whole hexagons: first order, with a known factor.

    Sides of the outermost hexagons that lie on the coast carry no flow. With sum_e l d n n^T / 2 = A I for closed cells, those
    sides take 1/6 of a cell's share along the coast: the water there is as wide for transport as without 1/6 of a row. The
    wave decays over a, so that c^2 falls by 2 (row/6)/a and the speed by row/(6 a). (Our own derivation.)
    """
    for cells in (8, 16):
        wave = After(zigzag_channel, cells)
        expected = ROW / (6 * cells)
        print(f"{cells} cells: lag {1 - wave.speed:.5f}, expected {expected:.5f}, amplitude {wave.amplitude:.5f}")
        assert 1 - wave.speed == pytest.approx(expected, rel=0.05)
        assert abs(wave.amplitude - 1.0) < 0.01
