"""Open boundaries and tides of a case: read once on rank 0, handed to all ranks as small tables, cut to every subdomain."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from datetime import datetime

import numpy as np
import shapely

from swe.constants import DEGREE
from swe.dynamics.opening import Opening, facing, opening_of
from swe.errors import InputError
from swe.mesh.opening_line import OpenLine, read_line
from swe.mesh.topology import Mesh, open_edges
from swe.tide.boundary_constants import read_constants
from swe.tide.prediction import Prediction


@dataclass(frozen=True, eq=False)
class Outside:
    """The sea beyond one open boundary.

    faces, edges   whole-mesh numbers of its outer faces (k,) and of the edges across it (m,)
    facing         (m,) n . N of the edges
    radiating      its law: what a case can ask for radiates
    level          mean level, m
    names          constituents; amplitude, lag (nc, k) at the outer faces, m and degrees
    """

    faces: np.ndarray
    edges: np.ndarray
    facing: np.ndarray
    radiating: bool
    level: float
    names: tuple[str, ...]
    amplitude: np.ndarray
    lag: np.ndarray


@dataclass(frozen=True, eq=False)
class Outsides:
    """All open boundaries of a case; `begin` model time 0 (UTC), `ramp` of the tides, s."""

    parts: tuple[Outside, ...]
    gravity: float
    begin: datetime
    ramp: float

    def on(self, mesh: Mesh, barometer: Callable[[float], np.ndarray] | None = None) -> Opening | None:
        """Return the open boundaries of a restricted mesh, None where it has none. Not collective.

        barometer   time -> level (k,), m, that the air pressure adds beyond the outer faces of `mesh`
        """
        edges = mesh.edge_id[open_edges(mesh)[0]]
        outer = mesh.face_id[mesh.face_outer]
        if not outer.size:
            return None
        fit, radiating = np.ones(edges.size), np.zeros(edges.size, dtype=bool)
        mean, tides = np.zeros(outer.size), []
        for part in self.parts:
            here, there = _match(edges, part.edges)
            fit[here], radiating[here] = part.facing[there], part.radiating
            here, there = _match(outer, part.faces)
            mean[here] = part.level
            if here.size and part.names:
                tides.append(
                    (here, Prediction.of(part.names, part.amplitude[:, there], part.lag[:, there], self.begin, self.ramp))
                )

        def level(time: float) -> np.ndarray:
            eta = mean.copy()
            for where, tide in tides:
                eta[where] += tide.level(time)
            if barometer is not None:
                eta += barometer(time)
            return eta

        return opening_of(mesh, level, self.gravity, radiating, fit)


def lines_of(case) -> tuple[OpenLine, ...]:
    """Return the lines of the open boundaries of a case. Not collective. Raises InputError naming the file."""
    return tuple(read_line(item.line, item.name) for item in case.openings)


def outsides_of(case, mesh: Mesh) -> Outsides | None:
    """Return the open boundaries of a case on its whole mesh, None for a closed basin. Not collective.

    Raises InputError when the mesh has no outer faces along a line, or outer faces that no line speaks of.
    """
    edges, _, outer, _ = open_edges(mesh)
    if not case.openings:
        if edges.size:
            raise InputError(
                f"{case.path}: the mesh is open along {edges.size} edges, but the case has no [[open]]; say what lies beyond"
            )
        return None
    if not edges.size:
        raise InputError(
            f"{case.path}: the case has [[open]] {case.openings[0].name!r}, but its mesh is closed; make it from the coastline"
        )
    places = positions(mesh, mesh.edge_xyz[edges])
    stretch = np.array([np.cos(DEGREE * places[:, 1].mean()) if mesh.spherical else 1.0, 1.0])
    points = shapely.points(places * stretch)
    lines = lines_of(case)
    away = np.array([shapely.distance(shapely.transform(item.line, lambda at: at * stretch), points) for item in lines])
    owner = away.argmin(axis=0)
    fit = facing(mesh)
    parts = []
    for number, (item, line) in enumerate(zip(case.openings, lines, strict=True)):
        mine = owner == number
        if not mine.any():
            raise InputError(
                f"{case.path}: open boundary {item.name!r}: no outer face of the mesh lies along its line; check its coordinates"
            )
        faces = np.unique(outer[mine])
        parts.append(_outside(item, line, mesh, faces, edges[mine], fit[mine]))
    return Outsides(tuple(parts), case.earth.gravity, case.time.begin, case.tide.ramp)


def _outside(item, line: OpenLine, mesh: Mesh, faces: np.ndarray, edges: np.ndarray, fit: np.ndarray) -> Outside:
    names, amplitude, lag = (), np.zeros((0, faces.size)), np.zeros((0, faces.size))
    if item.constants is not None:
        constants = read_constants(item.constants, ("lon", "lat") if mesh.spherical else ("x", "y"))
        names = constants.names
        amplitude, lag = constants.along(line.line, positions(mesh, mesh.face_xyz[faces]), mesh.spherical)
    return Outside(
        mesh.face_id[faces], mesh.edge_id[edges], fit, True, item.level, names, amplitude, lag
    )  # fmt: skip


def positions(mesh: Mesh, xyz: np.ndarray) -> np.ndarray:
    """Return longitude and latitude (degrees), or x and y (m), of points of a mesh, (n, 2). Not collective."""
    x, y, z = xyz.T
    if not mesh.spherical:
        return np.column_stack([x, y])
    return np.column_stack([np.arctan2(y, x), np.arctan2(z, np.hypot(x, y))]) / DEGREE


def _match(wanted: np.ndarray, known: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return places in `wanted` and in `known` of the numbers that both have."""
    order = np.argsort(known)
    at = np.searchsorted(known, wanted, sorter=order)
    at = order[np.minimum(at, known.size - 1)] if known.size else np.zeros(wanted.size, dtype=int)
    here = np.flatnonzero(known[at] == wanted) if known.size else np.zeros(0, dtype=int)
    return here, at[here]
