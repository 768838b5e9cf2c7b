"""Order in time of the localised steps against an integrator that shares nothing with them but the rates.

Nonlinear case: a hump of 2 m on a bowl 20 to 80 m deep, bottom drag, rotation, three subdomains. Reference: PETSc TS, Verner's
pair 8(7), tolerance 1e-12. Claimed orders: two-stage 2 (Cox & Matthews 2002, J. Comput. Phys. 176, 430), one-stage 2 (Hochbruck &
Ostermann 2010, Acta Numerica 19, 209), classical Runge-Kutta 4 (Kutta 1901).

Errors are energy norms over that of the reference. Order is measured where the step resolves the motion (radius of the wave
operator times step at most 2.1); beyond, a stiff problem may show less (Hochbruck & Ostermann 2005, SIAM J. Numer. Anal. 43,
1069; from memory). Tolerance 0.1 of the slope: the next power of the step still bends it by 0.03 at these steps (measured).
"""

from functools import cache

import numpy as np
import pytest
from basins import Rig, bowl, physics
from mpi4py import MPI

from swe.parallel.owned import OwnedSystem
from swe.steppers.one_stage import OneStage
from swe.steppers.reference import integrate
from swe.steppers.runge_kutta import RungeKutta4
from swe.steppers.two_stage import TwoStage

pytestmark = pytest.mark.ranks(1)
"""In a process of its own: PETSc brings a second BLAS and its own memory into the one that has run two thousand tests."""

SPAN = 4 * 3600.0
WAVE = TwoStage("wave", "lanczos", 1e-12, 200)

CASES = {
    "two-stage wave": (WAVE, {}, (24, 48, 96)),
    "two-stage wave by chebyshev": (TwoStage("wave", "chebyshev", 1e-12, 200), {}, (24, 48, 96)),
    "two-stage wave about the current depth": (WAVE, {"refresh": True}, (24, 48, 96)),
    "two-stage wave, rotation in the remainder": (WAVE, {"rotation": False}, (24, 48, 96)),
    "two-stage jacobian": (TwoStage("jacobian", "arnoldi", 1e-12, 200), {}, (24, 48, 96)),
    "one-stage jacobian": (OneStage("arnoldi", 1e-12, 200), {}, (24, 48, 96)),
    "runge-kutta-4": (RungeKutta4(), {}, (48, 72, 96)),
}
"""Stepper, how the basin is built, numbers of steps in the span."""


@cache
def mesh():
    return bowl(least=20.0, deepest=80.0)


def rig(overlap=8, height=2.0, **options):
    return Rig(mesh(), 3, overlap, physics(f=1e-4, drag=2.5e-3), height=height, on=MPI.COMM_SELF, **options)


@cache
def reference():
    """The owned unknowns at the end of the span, and the roots of their energy weights."""
    start = rig()
    system = OwnedSystem(start.basin)
    vector = system.pack(start.basin.states)
    end, _ = integrate(system, vector, 0.0, SPAN, 1e-12, np.full(vector.size, 1e-12), 60.0)
    return end, np.sqrt(system.energy)


def error(stepper, options, steps):
    end, weights = reference()
    run = rig(**options).run(stepper, SPAN / steps, steps)
    found = OwnedSystem(run.basin).pack(run.basin.states)
    return np.linalg.norm(weights * (found - end)) / np.linalg.norm(weights * end)


@pytest.mark.parametrize("name", CASES)
def test_slope_of_the_error_is_the_claimed_order(name):
    stepper, options, steps = CASES[name]
    errors = np.array([error(stepper, options, count) for count in steps])
    slopes = np.diff(np.log(errors)) / -np.diff(np.log(steps))
    print(f"{name}: errors {errors}, slopes {slopes}")
    assert np.all(np.abs(slopes - stepper.order) < 0.1), (errors, slopes)
    assert errors[-1] < 3e-4


def test_the_case_is_nonlinear():
    """Half the hump does not give half the level: what is measured above is not the exact linear part."""
    whole, half = (rig(height=height).run(WAVE, SPAN / 96, 96).eta() for height in (2.0, 1.0))
    assert np.max(np.abs(whole - 2 * half)) > 0.02 * np.max(np.abs(whole))


@pytest.mark.parametrize("name", ["two-stage wave", "two-stage jacobian", "one-stage jacobian"])
def test_second_order_reaches_to_steps_beyond_any_explicit_method(name):
    """Radius times step 8.5: the error is that of a quarter of the step times 16, within 1.5 (overlap 24: nothing of the cut)."""
    stepper, _, _ = CASES[name]
    ratio = error(stepper, {"overlap": 24}, 6) / error(stepper, {}, 24)
    print(f"{name}: error ratio {ratio}")
    assert ratio < 1.5 * 16
