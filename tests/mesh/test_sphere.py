"""Spherical geometry against closed forms. Sources: elementary spherical trigonometry; Girard's theorem."""

import numpy as np
import pytest

from swe.mesh.plane import PlaneGeometry
from swe.mesh.sphere import SphereGeometry, stereographic, unit

R = 6.4e6
SPHERE = SphereGeometry(R)
X, Y, Z = R * np.eye(3)


def test_octant():
    assert SPHERE.area(X, Y, Z) == pytest.approx(np.pi * R**2 / 2, rel=1e-15)
    assert SPHERE.area(X, Z, Y) == pytest.approx(-np.pi * R**2 / 2, rel=1e-15)
    assert SPHERE.circumcentre(X, Y, Z) == pytest.approx(np.full(3, R / np.sqrt(3)), rel=1e-14)
    assert SPHERE.distance(X, Y) == pytest.approx(np.pi * R / 2, rel=1e-15)
    assert SPHERE.distance(X, -X) == pytest.approx(np.pi * R, rel=1e-15)
    assert SPHERE.midpoint(X, Y) == pytest.approx(R * np.array([np.sqrt(0.5), np.sqrt(0.5), 0]), abs=1e-9)


@pytest.mark.parametrize("size", [1.0, 100.0, 1e4])
def test_small_triangles_keep_their_digits(size):
    # An equilateral triangle of side `size` on the Earth: flat to (size/R)^2, positions good to 1e-16 R.
    turn = np.linalg.qr(np.random.default_rng(0).normal(size=(3, 3)))[0]
    ring = size / np.sqrt(3) * np.column_stack([np.zeros(3), *[f(np.arange(3) * 2 * np.pi / 3) for f in (np.cos, np.sin)]])
    a, b, c = R * unit(np.array([R, 0, 0]) + ring) @ (turn.T * np.linalg.det(turn))
    allowed = 1e-8 / size + (size / R) ** 2
    assert SPHERE.area(a, b, c) == pytest.approx(np.sqrt(3) / 4 * size**2, rel=allowed)
    assert SPHERE.distance(a, b) == pytest.approx(size, rel=allowed)
    middle = SPHERE.circumcentre(a, b, c)
    assert np.linalg.norm(middle - R * turn[:, 0] * np.linalg.det(turn)) < 1e-8 + size * (size / R) ** 2


def test_circumcentres_have_one_distance():
    a, b, c = R * unit(np.random.default_rng(1).normal(size=(3, 200, 3)))
    turned = SPHERE.area(a, b, c) < 0
    b, c = np.where(turned[:, None], c, b), np.where(turned[:, None], b, c)
    middle = SPHERE.circumcentre(a, b, c)
    reach = [SPHERE.distance(middle, p) for p in (a, b, c)]
    good = reach[0] < 1.5 * R  # within a quarter turn, as every triangle of a mesh
    assert good.sum() > 100
    assert np.ptp(reach, axis=0)[good].max() < 1e-6 * R


def test_plane_circumcentre_far_from_the_origin():
    plane, shift = PlaneGeometry(), np.array([4e6, -3e6, 0])
    a, b, c = np.array([[0, 0, 0], [3.0, 0, 0], [0, 4.0, 0]]) + shift
    assert plane.circumcentre(a, b, c) - shift == pytest.approx([1.5, 2.0, 0], abs=1e-9)
    assert plane.area(a, b, c) == pytest.approx(6.0, rel=1e-9)


def test_stereographic_keeps_circles():
    centre = unit(np.array([0.3, -0.4, 0.7]))
    side = unit(np.cross(centre, [1.0, 0, 0]))
    turn = np.linspace(0, 2 * np.pi, 40)[:, None]
    circle = unit(centre + 0.3 * (np.cos(turn) * side + np.sin(turn) * np.cross(centre, side)))
    rest = unit(centre + np.random.default_rng(2).normal(size=(40, 3)) * 0.4)
    image = stereographic(np.vstack([circle, rest]))[:40]
    # Fit x^2 + y^2 + p x + q y + r = 0.
    system = np.column_stack([image, np.ones(40)])
    fit, *_ = np.linalg.lstsq(system, -(image**2).sum(axis=1))
    assert np.abs(system @ fit + (image**2).sum(axis=1)).max() < 1e-12
