"""Motion that is the same everywhere, on a doubly periodic plane: what is left of the equations is an ordinary one.

    inertial oscillation    u + i v = U exp(-i f t)                                  exact, nonlinear terms included
    wind                    u + i v = (T/(i f)) (1 - exp(-i f t)),   T = tau/(rho H)
    turning wind            u + i v = T (exp(i s t) - exp(-i f t)) / (i (s + f))
    quadratic drag          |u| = U/(1 + C_d U t/H), the direction turning at -f

Sources: Gill 1982, section 9.2 for wind and inertial motion (from memory); the drag law is common practice. All verified by
substitution. On regular hexagons the tangential velocity of uniform flow is exact, so nothing but the error in time is left.
"""

import numpy as np
import pytest
from basins import along_normals
from channels import irregular_plane
from steps import EXPLICIT, EXPONENTIAL, STEPPERS, TWO_STAGE, rig

from swe.dynamics.forcing.wind import ConstantWind
from swe.mesh.lattice import periodic_hexagons
from swe.mesh.topology import with_depth
from swe.operators import reconstruction

DENSITY = 1025.0
HOUR = 3600.0


def lattice(depth):
    """So coarse that gravity waves move little in a step: the cut between subdomains then costs nothing."""
    mesh = periodic_hexagons(8, 8, 200e3)
    return with_depth(mesh, np.full(mesh.n_faces, depth))


def motion(mesh, start, stepper, step, steps, **options):
    """Complex velocity at every face after `steps`, starting from the uniform velocity `start` = u + i v."""
    basin = rig(mesh, count=2, overlap=6, **options)
    basin.fill(lambda part: np.zeros(part.n_faces), lambda part: along_normals(part, [start.real, start.imag]))
    basin.run(stepper, step, steps)
    east, north = (component @ basin.u() for component in reconstruction(mesh))
    return east + 1j * north


def worst(found, exact):
    return np.max(np.abs(found - exact)) / abs(exact)


@pytest.mark.parametrize("name", EXPONENTIAL)
def test_inertial_oscillation_is_exact_with_rotation_in_the_operator(name):
    """Steps of two hours, 48 h at f of 45 degrees (a period of 16.924 h): round-off and the tolerance of the action."""
    f = 2 * 7.292e-5 * np.sin(np.pi / 4)
    assert 2 * np.pi / f / HOUR == pytest.approx(16.924, abs=2e-3)
    found = motion(lattice(30.0), 0.5 + 0.2j, EXPONENTIAL[name], 2 * HOUR, 24, f=f)
    assert worst(found, (0.5 + 0.2j) * np.exp(-1j * f * 48 * HOUR)) < 1e-9


def test_inertial_oscillation_with_rotation_in_the_remainder_has_the_order_of_the_step():
    f, span = 1e-4, 12 * HOUR
    errors = [
        worst(motion(lattice(30.0), 0.5 + 0j, TWO_STAGE, span / n, n, f=f, rotation=False), 0.5 * np.exp(-1j * f * span))
        for n in (24, 48, 96)
    ]
    print(f"errors {errors}")
    assert np.all(np.abs(np.log2(np.array(errors[:-1]) / errors[1:]) - 2) < 0.1)


def test_inertial_oscillation_on_irregular_faces_is_right_to_a_few_hundredths():
    """The tangential velocity is only consistent on average there (Ringler et al. 2010): 2 % of the speed after a period."""
    mesh = irregular_plane(6000e3, 4000e3, 300, 60, 30.0)
    f, span = 1e-4, 2 * np.pi / 1e-4
    error = motion(mesh, 0.1 + 0j, TWO_STAGE, span / 48, 48, f=f) - 0.1
    mean = abs(np.average(error, weights=mesh.face_area)) / 0.1
    spread = np.sqrt(np.average(np.abs(error) ** 2, weights=mesh.face_area)) / 0.1
    print(f"mean {mean:.2e}, spread {spread:.2e}")
    assert mean < 4e-3
    assert spread < 4e-2


WIND = 0.3 - 0.1j


def blown(stepper, step, steps, f, **options):
    def forcing(part):
        return (ConstantWind.on(part, WIND.real, WIND.imag),)

    return motion(lattice(50.0), 0j, stepper, step, steps, f=f, forcing=forcing, **options)


def wind_driven(f, time):
    return WIND / (DENSITY * 50.0) / (1j * f) * (1 - np.exp(-1j * f * time))


@pytest.mark.parametrize("name", EXPONENTIAL)
def test_wind_driven_inertial_motion_is_exact_with_rotation_in_the_operator(name):
    f = 1e-4
    assert worst(blown(EXPONENTIAL[name], 2 * HOUR, 5, f), wind_driven(f, 10 * HOUR)) < 1e-9


@pytest.mark.parametrize(
    "stepper, options", [(TWO_STAGE, {"rotation": False}), (EXPLICIT, {})], ids=["remainder", "runge-kutta-4"]
)
def test_wind_driven_inertial_motion_has_the_order_of_the_step(stepper, options):
    f, span = 1e-3, 4000.0
    errors = [worst(blown(stepper, span / n, n, f, **options), wind_driven(f, span)) for n in (40, 80, 160)]
    print(f"errors {errors}")
    assert np.all(np.abs(np.log2(np.array(errors[:-1]) / errors[1:]) - stepper.order) < 0.1)


class TurningWind:
    """Stress WIND exp(i s t) along the normals of a mesh."""

    turn = 3e-4

    def __init__(self, part):
        self.normal = part.edge_normal[:, 0] - 1j * part.edge_normal[:, 1]

    def stress(self, time):
        return (WIND * np.exp(1j * self.turn * time) * self.normal).real


@pytest.mark.parametrize("name", STEPPERS)
def test_a_wind_that_changes_in_time_enters_at_the_right_times(name):
    """u' = -i f u + T exp(i s t): u = T (exp(i s t) - exp(-i f t)) / (i (s + f)); each step keeps its order."""
    f, span = 1e-4, 6 * HOUR
    push = WIND / (DENSITY * 50.0)
    exact = push * (np.exp(1j * TurningWind.turn * span) - np.exp(-1j * f * span)) / (1j * (TurningWind.turn + f))
    errors = [
        worst(motion(lattice(50.0), 0j, STEPPERS[name], span / n, n, f=f, forcing=lambda part: (TurningWind(part),)), exact)
        for n in (12, 24, 48)
    ]
    print(f"{name}: errors {errors}")
    assert np.all(np.abs(np.log2(np.array(errors[:-1]) / errors[1:]) - STEPPERS[name].order) < 0.15)


DRAG, DEPTH = 2.5e-3, 10.0


@pytest.mark.parametrize("f", [0.0, 1e-4])
@pytest.mark.parametrize("name", STEPPERS)
def test_quadratic_drag_halves_the_speed_after_4000_s(name, f):
    """H/(C_d U) = 4000 s; 1e-6 at a step of 10 s, and the claimed order from longer ones."""

    def error(step):
        found = motion(lattice(DEPTH), 1 + 0j, STEPPERS[name], step, round(4000 / step), drag=DRAG, f=f)
        return worst(found, 0.5 * np.exp(-1j * f * 4000))

    errors = np.array([error(200), error(100), error(10)])
    print(f"{name}, f = {f}: errors {errors}")
    assert np.log2(errors[0] / errors[1]) == pytest.approx(STEPPERS[name].order, abs=0.1)
    assert errors[2] < 1e-6


@pytest.mark.parametrize("name", EXPONENTIAL)
def test_wind_against_drag_ends_at_the_balance(name):
    """tau = rho C_d |u| u, f = 0: |u| = (tau/(rho C_d))^(1/2) tanh(...), verified by substitution."""
    wind, span = 0.4, 6000.0
    limit = np.sqrt(wind / (DENSITY * DRAG))
    exact = limit * np.tanh(np.sqrt(wind * DRAG / DENSITY) / DEPTH * span)

    def forcing(part):
        return (ConstantWind.on(part, 0.0, wind),)

    errors = [
        worst(motion(lattice(DEPTH), 0j, EXPONENTIAL[name], span / n, n, drag=DRAG, forcing=forcing), 1j * exact)
        for n in (30, 60)
    ]
    print(f"{name}: speed {exact:.4f} of {limit:.4f} m/s, errors {errors}")
    assert np.log2(errors[0] / errors[1]) == pytest.approx(2, abs=0.1)
    assert errors[1] < 3e-5
