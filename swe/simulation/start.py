"""The water at the beginning: at rest, with a hump, or as an earlier run left it."""

from __future__ import annotations

from pathlib import Path

import netCDF4
import numpy as np

from swe.case.case import place_of
from swe.constants import DEGREE
from swe.errors import InputError
from swe.mesh.topology import Mesh
from swe.output.durable import file_trouble
from swe.parallel.ranks import on_root
from swe.simulation.setup import Setup
from swe.steppers.contract import State


def begin(setup: Setup, case, mesh: Mesh | None) -> None:
    """Put the water of [start] into every subdomain. Collective. `mesh` is the whole mesh on rank 0."""
    if case.start.kind == "hump":
        for part, state in zip(setup.basin.parts, setup.basin.states, strict=True):
            state.eta[:] = hump(part.mesh, case.start.height, case.start.radius, place_of(case.start))
    elif case.start.kind == "file":
        whole = on_root(setup.comm, "reading the start", lambda: last_record(case, mesh)) or (None, None)
        put(setup, *whole)


def put(setup: Setup, eta: np.ndarray | None, u: np.ndarray | None) -> None:
    """Hand rank 0's whole-mesh level (nf,) and normal velocity (ne,) to every subdomain. Collective."""
    levels, velocities = setup.faces.scatter(eta), setup.edges.scatter(u)
    setup.basin.states = [State(level, velocity) for level, velocity in zip(levels, velocities, strict=True)]


def hump(mesh: Mesh, height: float, radius: float, middle: tuple[float, float]) -> np.ndarray:
    """Return H exp(-(r/radius)^2) on faces, (nf,), m; r the distance from `middle` along the surface. Not collective.

    middle   (x, y) in m, or (longitude, latitude) in degrees
    """
    if mesh.spherical:
        lon, lat = np.multiply(middle, DEGREE)
        towards = np.array([np.cos(lat) * np.cos(lon), np.cos(lat) * np.sin(lon), np.sin(lat)])
        chord = np.linalg.norm(mesh.face_xyz / mesh.radius - towards, axis=1)
        distance = 2.0 * mesh.radius * np.arcsin(np.minimum(1.0, chord / 2.0))
    else:
        distance = np.hypot(mesh.face_xyz[:, 0] - middle[0], mesh.face_xyz[:, 1] - middle[1])
    return height * np.exp(-((distance / radius) ** 2))


def last_record(case, mesh: Mesh) -> tuple[np.ndarray, np.ndarray]:
    """Return level (nf,) and normal velocity (ne,) of the last record of the case's start file. Not collective.

    Raises InputError when the file is not the fields of a run on this mesh, FileError when it cannot be read.
    """
    path: Path = case.start.file
    where = case.where("start", "file")
    with file_trouble(path, "reading the start"), netCDF4.Dataset(path) as data:
        data.set_auto_mask(False)
        missing = [name for name in ("level", "normal_velocity") if name not in data.variables]
        if missing:
            found = ", ".join(sorted(data.variables)[:8]) or "nothing"
            raise InputError(
                f"{where} = {path.name}: no variable {missing[0]}, found {found}; needed are the fields level and normal_velocity "
                "of an earlier run: write them with [output] fields"
            )
        if getattr(data, "mesh_checksum", None) != mesh.checksum():
            raise InputError(
                f"{where} = {path.name}: fields of another mesh ({data['level'].shape[-1]} faces, this one has {mesh.n_faces}); "
                "use the mesh of that run with [mesh] file"
            )
        if data["level"].shape[0] == 0:
            raise InputError(f"{where} = {path.name}: no record yet; let that run write at least one")
        return np.asarray(data["level"][-1], dtype=float), np.asarray(data["normal_velocity"][-1], dtype=float)
