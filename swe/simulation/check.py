"""What a case would run, said before it runs: faces, steps, overlap, memory, disk. Opens every input.

Where the mesh is already there (a mesh file, or one kept in the result folder) the numbers are those of the run; else the
faces are the area over the wanted area of a face, and z is that of hexagons of the wanted spacing, sqrt(6) dt / (shortest
crossing time) (checks of the regular hexagon: rho = sqrt(6) c / d).
"""

from __future__ import annotations

import math
from pathlib import Path

from swe.errors import InputError, MeshError
from swe.mesh.coast import box_of
from swe.mesh.layout import MOST
from swe.mesh.topology import Mesh
from swe.parallel.partition import LEAST_FACES
from swe.simulation.inputs import open_inputs, outlook
from swe.simulation.meshing import kept_mesh
from swe.simulation.recorder import fields_of
from swe.simulation.run import stations_on
from swe.simulation.setup import EXPLICIT_LIMIT, Plan, plan_for, plan_of
from swe.simulation.start import first_state
from swe.simulation.start_file import level_before_mesh

BASE_BYTES = 130e6
"""Resident memory of a rank before it holds a face: interpreter and libraries. Measured on Debian 12."""

HELD_BYTES = {"wave": 6.5e3, "jacobian": 23.5e3, None: 4.5e3}
"""Memory of a held face, bytes, by operator. Measured on 104,000 faces and on the demo (scripts/figures_of.py)."""

RECORD_BYTES = 8.0 * (3 + 3)
"""Bytes of one record of the usual fields per face: level, two components, and about three edges."""


def check(case, ranks: int) -> list[str]:
    """Return what there is to say about a case on `ranks` ranks. Not collective.

    Raises InputError or CaseError as the run itself would.
    """
    fields_of(case)
    mesh = kept_mesh(case, Path("results") / case.name)
    if mesh is not None:
        return [*_settled(case, mesh, ranks), *_costs(case, plan_of(case, mesh, ranks), mesh.n_faces, ranks)]
    inputs = open_inputs(case)
    if case.start.kind == "file":
        level_before_mesh(case, inputs.surface, box_of(inputs.water, inputs.surface))
    seen = outlook(case, inputs)
    _refuse_too_many_faces(case, seen.faces)
    plan = plan_for(case, math.sqrt(6.0) / seen.crossing_time, ranks)
    faces = round(seen.faces)
    _refuse_count(plan, faces, ranks)
    return [
        f"water {seen.shallowest:.4g} to {seen.deepest:.4g} m deep, about {faces} faces (the mesh is not made yet: swe mesh)",
        *_costs(case, plan, faces, ranks),
    ]


def _refuse_too_many_faces(case, faces: float) -> None:
    """Raise MeshError for a spacing that the making of the mesh would refuse. Not collective."""
    if faces > MOST:
        key = "spacing" if case.mesh.spacing is not None else "finest"
        raise MeshError(
            f"{case.where('mesh', key)}: the spacing gives about {faces:.3g} faces in the basin; allowed are {MOST}: "
            "choose a coarser spacing, or check its unit"
        )


def _settled(case, mesh: Mesh, ranks: int) -> list[str]:
    """Check what needs the mesh and describe it."""
    sampling = stations_on(case, mesh)
    first_state(case, mesh)
    _refuse_count(plan_of(case, mesh, ranks), mesh.n_faces, ranks)
    lines = [f"mesh of {mesh.n_faces} faces, {mesh.depth.min():.4g} to {mesh.depth.max():.4g} m deep"]
    for station, distance, face in zip(sampling.stations, sampling.distance, sampling.face, strict=True):
        lines.append(f"station {station.name}: face {face}, {distance:.0f} m from its centre, {mesh.depth[face]:.4g} m deep")
    return lines


def _refuse_count(plan: Plan, faces: int, ranks: int) -> None:
    """Refuse too many subdomains for the faces, and too few for the ranks, as the run itself would."""
    if plan.count < ranks:
        raise InputError(
            f"{plan.count} subdomains for {ranks} ranks: every rank needs at least one; use fewer ranks or more subdomains"
        )
    if plan.count > max(1, faces // LEAST_FACES):
        raise InputError(
            f"{plan.count} subdomains for about {faces} faces: allowed are 1 to {max(1, faces // LEAST_FACES)} (at least "
            f"{LEAST_FACES} faces each); use fewer ranks or subdomains, or a finer mesh"
        )


def _costs(case, plan: Plan, faces: int, ranks: int) -> list[str]:
    held = _held(faces, plan)
    memory = BASE_BYTES + held * math.ceil(plan.count / ranks) * HELD_BYTES[case.method.operator]
    records = case.time.duration / case.output.fields_every + 1
    lines = [
        f"{plan.steps} steps of {plan.step:g} s, z = {plan.z:.1f} ({case.method.stepper})",
        f"{plan.count} subdomains on {ranks} ranks, overlap {plan.overlap} layers: about {held:.0f} faces held by each, "
        f"{held * plan.count / faces:.2f} times the mesh in all",
        f"about {memory / 1e6:.0f} MB a rank, {records * faces * RECORD_BYTES / 1e6:.0f} MB of fields in {records:.0f} records",
    ]
    if case.method.stepper == "runge-kutta-4" and plan.z > EXPLICIT_LIMIT:
        lines.append(
            f"unstable: z must stay below {EXPLICIT_LIMIT:.2f} with runge-kutta-4; use a step of at most "
            f"{EXPLICIT_LIMIT / plan.radius:.3g} s"
        )
    return lines


def _held(faces: int, plan: Plan) -> float:
    """Faces of a subdomain with overlap and ring, a hexagon of hexagons: k layers round 3 r^2 faces add 6 r k + 3 k^2."""
    if plan.count == 1:
        return faces
    own = faces / plan.count
    r, k = math.sqrt(own / 3.0), plan.overlap + 1
    return min(faces, own + 6.0 * r * k + 3.0 * k * k)
