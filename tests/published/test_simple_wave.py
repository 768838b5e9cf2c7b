"""A nonlinear simple wave, exact until it breaks: with u - 2 (g h)^(1/2) the same everywhere, all values travel along

    x = x0 + (3 (g h)^(1/2) - 2 (g H)^(1/2)) t,     u = 2 (g h)^(1/2) - 2 (g H)^(1/2)

Source: Stoker 1957, Water Waves, chapter 10 (from memory; it satisfies both equations by substitution). f = 0, no drag. It tells
the fluxes h u and the gradient of u^2/2 from their linear parts: a pulse of a fifth of the depth, half way to breaking.
"""

import numpy as np
import pytest
from basins import along_normals
from scipy.optimize import brentq
from steps import EXPONENTIAL, rig

from swe.mesh.lattice import periodic_hexagons
from swe.mesh.topology import with_depth

GRAVITY, DEPTH, HEIGHT, WIDTH = 9.81, 10.0, 2.0, 10e3
C = np.sqrt(GRAVITY * DEPTH)
LENGTH, SPAN = 120e3, 2000.0


def start(x):
    """Depth at the start, a pulse at a third of the length."""
    return DEPTH + HEIGHT * np.exp(-(((x - LENGTH / 3) / WIDTH) ** 2))


def after(x, time):
    """Depth at x (n,): the foot x0 of the characteristic that arrives there."""

    def foot(place):
        return brentq(lambda x0: x0 + (3 * np.sqrt(GRAVITY * start(x0)) - 2 * C) * time - place, place - LENGTH, place + LENGTH)

    return start(np.array([foot(place) for place in x]))


def error(stepper, cells):
    """Root mean square of the error of level over the height of the pulse; a wave crosses two faces a step."""
    spacing = LENGTH / cells
    mesh = periodic_hexagons(cells, 4, spacing)
    mesh = with_depth(mesh, np.full(mesh.n_faces, DEPTH))

    def current(part):
        return along_normals(part, [1.0, 0.0]) * 2 * (np.sqrt(GRAVITY * start(part.edge_xyz[:, 0])) - C)

    steps = round(SPAN * C / (2 * spacing))
    run = rig(mesh).fill(lambda part: start(part.face_xyz[:, 0]) - DEPTH, current).run(stepper, SPAN / steps, steps)
    exact = after(mesh.face_xyz[:, 0], SPAN) - DEPTH
    return np.sqrt(np.mean((run.eta() - exact) ** 2)) / HEIGHT


@pytest.mark.parametrize("name", EXPONENTIAL)
def test_converges_with_second_order(name):
    errors = np.array([error(EXPONENTIAL[name], cells) for cells in (120, 240, 480)])
    print(f"{name}: errors {errors}")
    assert np.all(np.log2(errors[:-1] / errors[1:]) > (1.75, 1.85))
    assert errors[-1] < 6e-4


def test_the_pulse_is_half_way_to_breaking():
    x = np.linspace(0, LENGTH, 4001)
    assert 1 / np.max(-np.gradient(3 * np.sqrt(GRAVITY * start(x)), x)) == pytest.approx(2 * SPAN, rel=0.05)
