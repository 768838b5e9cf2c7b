"""The steps under test and the basins they run on: real subdomains, narrow tolerances, one process."""

from basins import Rig, physics
from mpi4py import MPI

from swe.steppers.one_stage import OneStage
from swe.steppers.runge_kutta import RungeKutta4
from swe.steppers.two_stage import TwoStage

TWO_STAGE = TwoStage("wave", "lanczos", 1e-9, 300)
ONE_STAGE = OneStage("arnoldi", 1e-9, 300)
EXPLICIT = RungeKutta4()

STEPPERS = {"two-stage wave": TWO_STAGE, "one-stage jacobian": ONE_STAGE, "runge-kutta-4": EXPLICIT}
EXPONENTIAL = {name: STEPPERS[name] for name in ("two-stage wave", "one-stage jacobian")}


def rig(mesh, f=0.0, drag=0.0, count=4, overlap=8, law=None, **options) -> Rig:
    """Return a basin of `count` subdomains at rest; `law` other settings than f and bottom drag."""
    return Rig(mesh, count, overlap, law or physics(f, drag), height=0.0, on=MPI.COMM_SELF, **options)
