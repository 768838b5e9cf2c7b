"""The independent reference: an adaptive embedded Runge-Kutta pair of PETSc TS at a tight tolerance.

Prince & Dormand 1981 (J. Comput. Appl. Math. 7, 67) pair 8(7)-13M or another pair by PETSc's name; step size from PETSc's
basic controller. Nothing is shared with our steppers but the rates. Everything explicit: it is stable only where its own
error control makes it so, and slow on purpose.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from swe.errors import NumericalFailure


class System(Protocol):
    """A distributed system: `comm` (mpi4py), and `rates(time, x) -> dx/dt` on the local part of the vector. Collective."""

    comm: object

    def rates(self, time: float, vector: np.ndarray) -> np.ndarray: ...


@dataclass(frozen=True)
class ReferenceReport:
    """Steps taken, steps rejected."""

    steps: int
    rejected: int


def integrate(
    system: System,
    start: np.ndarray,
    begin: float,
    end: float,
    relative: float,
    absolute: np.ndarray,
    first_step: float,
    pair: str = "8vr",
) -> tuple[np.ndarray, ReferenceReport]:
    """Integrate from `begin` to `end` and return the local part of the result and a report. Collective.

    start      (n,) local part of the vector; begin, end in s
    relative   relative tolerance per step; absolute (n,) absolute tolerance of each local unknown
    first_step s
    pair       PETSc name of the pair: "8vr" (Verner), "5dp" (Dormand & Prince), ...

    Raises NumericalFailure when PETSc gives up, on all ranks.
    """
    from petsc4py import PETSc

    solution = PETSc.Vec().createMPI((start.size, None), comm=system.comm)
    solution.setArray(start)
    tolerance = solution.duplicate()
    tolerance.setArray(absolute)

    def function(ts, time, x, out) -> None:
        out.setArray(system.rates(time, x.getArray(readonly=True)))

    ts = PETSc.TS().create(comm=system.comm)
    ts.setType("rk")
    ts.setRKType(pair)
    ts.setRHSFunction(function, solution.duplicate())
    ts.setTime(begin)
    ts.setMaxTime(end)
    ts.setMaxSteps(10_000_000)
    ts.setExactFinalTime(PETSc.TS.ExactFinalTime.MATCHSTEP)
    ts.setTimeStep(first_step)
    ts.setTolerances(rtol=relative, atol=tolerance)
    ts.solve(solution)
    if ts.getConvergedReason() <= 0:
        raise NumericalFailure(
            f"reference integration stopped at {ts.getTime():.6g} s of {end:.6g} s: PETSc reason {ts.getConvergedReason()}"
        )
    report = ReferenceReport(ts.getStepNumber(), ts.getStepRejections())
    result = solution.getArray().copy()
    for item in (ts, solution, tolerance):
        item.destroy()
    return result, report
