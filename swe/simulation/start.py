"""The water at the beginning: at rest, with a hump, or from a file (start_file)."""

from __future__ import annotations

import numpy as np

from swe.atmosphere.places import face_points
from swe.case.case import place_of
from swe.constants import DEGREE
from swe.errors import InputError
from swe.mesh.topology import Mesh
from swe.parallel.ranks import on_root
from swe.simulation.setup import Setup
from swe.simulation.start_file import start_of
from swe.steppers.contract import State


def begin(setup: Setup, case, mesh: Mesh | None) -> None:
    """Put the water of [start] into every subdomain. Collective. `mesh` is the whole mesh on rank 0."""
    if case.start.kind != "rest":
        whole = on_root(setup.comm, "making the start", first_state, case, mesh) or (None, None)
        put(setup, *whole)
    setup.basin.settle(0.0)


def first_state(case, mesh: Mesh) -> tuple[np.ndarray, np.ndarray]:
    """Return level (nf,) and normal velocity (ne,) at the beginning. Not collective.

    Raises InputError when a start file is wrong, or where the level lies below the bed.
    """
    eta, u = np.zeros(mesh.n_faces), np.zeros(mesh.n_edges)
    if case.start.kind == "hump":
        eta = hump(mesh, case.start.height, case.start.radius, place_of(case.start))
    elif case.start.kind == "file":
        eta, u = start_of(case, mesh)
    _refuse_dry(case, mesh, eta)
    return eta, u


def _refuse_dry(case, mesh: Mesh, eta: np.ndarray) -> None:
    total = mesh.depth + eta
    face = int(np.argmin(total))
    if not total[face] > 0.0:
        first, second = face_points(mesh)[face]
        axes = ("longitude", "latitude") if mesh.spherical else ("x", "y")
        raise InputError(
            f"{case.where('start', 'kind')} = {case.start.kind}: level {eta[face]:.4g} m where the resting water is "
            f"{mesh.depth[face]:.4g} m deep (face {face} at {axes[0]} {first:.6g}, {axes[1]} {second:.6g}); the total depth must "
            "be above 0 m, because wetting and drying is not computed: raise the level or the least depth"
        )


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
