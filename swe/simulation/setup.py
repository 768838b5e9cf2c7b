"""From a case and its mesh to everything that a run needs on each rank.

Sections of the case become objects: [earth], [drag] -> Physics; [wind] -> forcing; [method] -> stepper and operator;
[subdomains] -> how many, how far they overlap, when they agree. Nothing is read or computed here that a stepper does.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from mpi4py import MPI

from swe.constants import DEGREE, EARTH_ROTATION
from swe.dynamics.bounds import GravityBound
from swe.dynamics.forcing.tide import EquilibriumHead
from swe.dynamics.friction import Manning
from swe.dynamics.physics import CoriolisLaw, FPlane, NoRotation, Physics, Sphere
from swe.exponential.bounds import overlap_for
from swe.mesh.topology import Mesh
from swe.parallel.distribute import Share, distribute
from swe.parallel.ranks import on_root
from swe.parallel.reductions import Assembly
from swe.parallel.schwarz import Agreement, Basin
from swe.simulation.basin import basin_of, closed
from swe.simulation.boundary import Outsides, outsides_of
from swe.simulation.weather import barometer, refuse_bad_weather, weather_on
from swe.steppers.contract import Stepper
from swe.steppers.one_stage import OneStage
from swe.steppers.runge_kutta import RungeKutta4
from swe.steppers.two_stage import TwoStage

EXPLICIT_OVERLAP = 1
"""Layers that an explicit stepper needs: a stage reaches one ring, and every edge must have one owner."""

EXPLICIT_LIMIT = 2.0 * math.sqrt(2.0)
"""Largest z of the classical Runge-Kutta method on the imaginary axis (Hairer & Wanner 1996, section IV.2)."""


@dataclass(frozen=True)
class Plan:
    """What will run, known from the case and a few numbers of the mesh.

    count      subdomains in all; overlap   layers
    radius     upper bound of the spectral radius of the wave operator, s-1; z = radius dt
    step       s; steps   in the whole run
    """

    count: int
    overlap: int
    radius: float
    step: float
    steps: int

    @property
    def z(self) -> float:
        return self.radius * self.step


@dataclass(frozen=True, eq=False)
class Setup:
    """A rank's part of a run that is ready to begin."""

    comm: MPI.Comm
    plan: Plan
    share: Share
    basin: Basin
    stepper: Stepper
    agreement: Agreement
    faces: Assembly
    edges: Assembly

    def largest(self, values: np.ndarray) -> np.ndarray:
        """Return the elementwise largest over all ranks. Collective."""
        out = np.empty_like(values)
        self.comm.Allreduce(values, out, op=MPI.MAX)
        return out


def physics_of(case) -> Physics:
    """Return the physical settings of a case. Not collective."""
    return Physics(case.earth.gravity, case.earth.density, friction_of(case), case.drag.viscosity, coriolis_of(case))


def friction_of(case) -> float | Manning:
    """Return the bottom friction of a case: the coefficient of the quadratic law, or Manning's. Not collective."""
    return case.drag.bottom if case.drag.manning is None else Manning(case.drag.manning)


def coriolis_of(case) -> CoriolisLaw:
    """Return the law of the Coriolis parameter of a case. Not collective."""
    if case.earth.rotation == "sphere":
        return Sphere(EARTH_ROTATION, 0.0)
    if case.earth.rotation == "f-plane":
        return FPlane(2.0 * EARTH_ROTATION * math.sin(case.earth.latitude * DEGREE))
    return NoRotation()


def forcing_of(case):
    """Return the maker of a case's forcing on a restricted mesh. Not collective."""
    tide = case.tide

    def on(mesh: Mesh) -> tuple:
        air = weather_on(case, mesh)
        if not tide.equilibrium:
            return air
        return (*air, EquilibriumHead.on(mesh, case.earth.gravity, tide.equilibrium, case.time.begin, tide.ramp))

    return on


def stepper_of(case) -> Stepper:
    """Return the stepper of a case. Not collective."""
    method = case.method
    if method.stepper == "two-stage":
        return TwoStage(method.operator, method.action, method.action_tolerance, method.largest_basis)
    if method.stepper == "one-stage":
        return OneStage(method.action, method.action_tolerance, method.largest_basis)
    return RungeKutta4()


def agreement_of(case) -> Agreement:
    """Return when the subdomains of a case agree. An explicit step has nothing to agree about. Not collective."""
    if case.subdomains.mismatch_tolerance is None:
        return Agreement(math.inf, 0)
    return Agreement(case.subdomains.mismatch_tolerance, case.subdomains.repeats)


def plan_of(case, mesh: Mesh, ranks: int) -> Plan:
    """Return what would run on `ranks` ranks. Not collective; needs the whole mesh."""
    depth = mesh.depth[mesh.edge_faces[: mesh.n_inner]].mean(axis=1)
    return plan_for(case, GravityBound(mesh, mesh.n_faces, mesh.n_inner, case.earth.gravity)(depth), ranks)


def plan_for(case, radius: float, ranks: int) -> Plan:
    """Return what would run with a wave operator of this spectral radius, s-1. Not collective."""
    step = case.time.step
    count = case.subdomains.count or ranks * case.subdomains.per_rank
    return Plan(count, _overlap(case, radius * step), radius, step, round(case.time.duration / step))


def _overlap(case, z: float) -> int:
    if case.method.stepper == "runge-kutta-4":
        return EXPLICIT_OVERLAP
    if case.subdomains.overlap is not None:
        return case.subdomains.overlap
    return overlap_for(z, case.subdomains.overlap_tolerance or case.method.action_tolerance)


def prepare(comm: MPI.Comm, case, mesh: Mesh | None) -> Setup:
    """Hand out rank 0's mesh and build everything on it. Collective."""
    plan = comm.bcast(plan_of(case, mesh, comm.size) if comm.rank == 0 else None, root=0)
    on_root(comm, "reading the weather", refuse_bad_weather, case, mesh)
    outsides = comm.bcast(on_root(comm, "reading the open boundaries", outsides_of, case, mesh), root=0)
    share = distribute(comm, mesh, plan.count, plan.overlap)
    method = case.method
    basin = basin_of(
        comm,
        share,
        physics_of(case),
        forcing_of(case),
        bool(method.rotation_in_operator),
        bool(method.refresh_depth),
        _opening_of(case, outsides),
        friction=bool(method.friction_in_operator),
    )
    return Setup(
        comm,
        plan,
        share,
        basin,
        stepper_of(case),
        agreement_of(case),
        Assembly(comm, basin.parts, "face", share.n_faces),
        Assembly(comm, basin.parts, "edge", share.n_edges),
    )


def _opening_of(case, outsides: Outsides | None):
    """Return the maker of the open boundaries of a restricted mesh, under the case's air pressure."""
    if outsides is None:
        return closed
    return lambda mesh: outsides.on(mesh, barometer(case, mesh))
