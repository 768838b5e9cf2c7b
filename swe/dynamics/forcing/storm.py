"""A moving storm: the round vortex of `holland` carried along a track.

Between the points of the track all is linear in time: the centre (on the sphere along the great circle, but for the speed on it,
by less than 1e-4), pressures, radius of maximum wind and shape B; before and behind the track there is no storm. The velocity of
the centre is that of the points by central differences, linear between them, so that the wind has no jumps. At the distance r
and in the direction of the unit vectors e_r (outward) and e_t (counter-clockwise) the wind at 10 m height is

    w = k V(r) ( s cos(b) e_t - sin(b) e_r )  +  a (V(r)/V_m) c

    k   reduction from the gradient wind to 10 m                  s   +1 where f >= 0, -1 where f < 0 at the centre
    b   inflow angle                                              c   velocity of the centre, m s-1
    a   share of c that is added where the wind is greatest       V_m = V(R)

The last term is the asymmetry of a moving storm; it falls off with the wind of the vortex, so that the surroundings are at rest.
A maximum wind of the track stands for B: B = (w_m / k)^2 rho_a e / dp, that is without rotation and without the asymmetry.
Common practice (from memory): k 0.8 to 0.9, b 20 to 25 degrees, a 0.5 to 0.6 (Lin & Chavas 2012, J. Geophys. Res. 117, D09120).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Protocol

import numpy as np

from swe.constants import DEGREE, EARTH_ROTATION
from swe.dynamics.forcing.holland import gradient_wind, pressure, shape_for
from swe.errors import InputError
from swe.mesh.surface import unit_vectors
from swe.mesh.topology import Mesh
from swe.operators import axes

SHAPE = (0.3, 5.0)
"""B that a maximum wind may stand for; Holland 1980 expects 1 to 2.5."""


class Track(Protocol):
    """Points of a track, (n,) each, SI; see swe.atmosphere.track.TrackTable."""

    where: Sequence[str]
    times: np.ndarray
    places: np.ndarray
    central: np.ndarray
    ambient: np.ndarray
    radius: np.ndarray
    shape: np.ndarray | None
    strongest: np.ndarray | None


@dataclass(frozen=True)
class Surroundings:
    """What the track does not tell: k, b (degrees), a, air density (kg m-3); f on a plane (s-1), None on the sphere."""

    reduction: float
    inflow: float
    translation_share: float
    air_density: float
    coriolis: float | None


@dataclass(frozen=True, eq=False)
class Vortex:
    """A storm at one time: centre (3,), m, its velocity (3,), m s-1, in the mesh's frame; p_n, dp (Pa), R (m), B, f (s-1)."""

    centre: np.ndarray
    velocity: np.ndarray
    ambient: float
    deficit: float
    radius: float
    shape: float
    coriolis: float


class Storm:
    """The vortex at any time. sphere_radius: m, None on a plane. Raises InputError where a maximum wind makes no storm."""

    def __init__(self, track: Track, surroundings: Surroundings, sphere_radius: float | None):
        self.surroundings, self._sphere_radius = surroundings, sphere_radius
        self._times, deficit = track.times, track.ambient - track.central
        shape = _shapes(track, deficit, surroundings)
        self._rows = np.column_stack([track.ambient, deficit, track.radius, shape])
        if sphere_radius is None:
            self._centres = np.column_stack([track.places, np.zeros(len(track.times))])
        else:
            self._centres = sphere_radius * unit_vectors(track.places)
        self._velocities = np.gradient(self._centres, self._times, axis=0)

    def at(self, time: float) -> Vortex:
        """Return the vortex at a model time, s; beyond the track one without deficit. Not collective."""
        centre, velocity, (ambient, deficit, radius, shape) = (
            np.array([np.interp(time, self._times, column) for column in table.T])
            for table in (self._centres, self._velocities, self._rows)
        )
        coriolis = self.surroundings.coriolis
        if self._sphere_radius is not None:
            centre *= self._sphere_radius / np.linalg.norm(centre)
            coriolis = 2.0 * EARTH_ROTATION * centre[2] / self._sphere_radius
        deficit = deficit if self._times[0] <= time <= self._times[-1] else 0.0
        return Vortex(centre, velocity, ambient, deficit, radius, shape, coriolis)


class StormWind:
    """The 10 m wind of a storm at the edges of a mesh; what `wind.WindStress` asks for."""

    def __init__(self, storm: Storm, mesh: Mesh):
        self._storm, self._places = storm, Places(mesh, mesh.edge_xyz)

    def __call__(self, time: float) -> np.ndarray:
        """Return the wind, (2, ne), m s-1, east and north or x and y. Not collective."""
        vortex, around = self._storm.at(time), self._storm.surroundings
        if vortex.deficit <= 0.0:
            return np.zeros((2, self._places.count))
        distance, outward = self._places.about(vortex.centre)
        settings = vortex.deficit, vortex.radius, vortex.shape, vortex.coriolis, around.air_density
        speed = gradient_wind(distance, *settings)
        greatest = gradient_wind(np.array([vortex.radius]), *settings)[0]
        inflow = around.inflow * DEGREE
        along = around.reduction * np.cos(inflow) * (1.0 if vortex.coriolis >= 0.0 else -1.0)
        inward = around.reduction * np.sin(inflow)
        carried = around.translation_share / greatest * self._places.components(vortex.velocity)
        first = -along * outward[1] - inward * outward[0] + carried[0]
        second = along * outward[0] - inward * outward[1] + carried[1]
        return np.stack([speed * first, speed * second])


class StormPressure:
    """The air pressure of a storm on the faces of a mesh; what `pressure.AirPressure` asks for."""

    def __init__(self, storm: Storm, mesh: Mesh):
        self._storm, self._places = storm, Places(mesh, mesh.face_xyz)

    def __call__(self, time: float) -> np.ndarray:
        """Return the pressure, (1, nf), Pa. Not collective."""
        vortex = self._storm.at(time)
        distance, _ = self._places.about(vortex.centre)
        return pressure(distance, vortex.ambient, vortex.deficit, vortex.radius, vortex.shape)[None]


class Places:
    """Points of a mesh as seen from the centre of a storm: with e, n, k the unit vectors east (x), north (y) and up at each

        plane    (X, Y) = (x - x_c, y - y_c)       r = (X^2 + Y^2)^(1/2)
        sphere   (X, Y) = -(e . c, n . c)          r = R atan2( (X^2 + Y^2)^(1/2), k . c )      along the great circle

    and e_r = (X, Y) / (X^2 + Y^2)^(1/2), e_t = k x e_r. In the centre and opposite to it there is no direction: e_r = 0.
    """

    def __init__(self, mesh: Mesh, where: np.ndarray):
        self.count, self._radius = len(where), mesh.radius
        self._east, self._north = (np.ascontiguousarray(axis) for axis in axes(mesh, where))
        if mesh.radius is None:
            self._home = where[:, :2].T
        else:
            self._home, self._up = np.zeros((2, 1)), where / np.linalg.norm(where, axis=1, keepdims=True)

    def components(self, vector: np.ndarray) -> np.ndarray:
        """Return the two components of a vector (3,) at the points, (2, n). Not collective."""
        return np.stack([self._east @ vector, self._north @ vector])

    def about(self, centre: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return the distances (n,), m, from a centre (3,), and e_r by components, (2, n). Not collective."""
        arm = self._home - self.components(centre)
        size = np.hypot(arm[0], arm[1])
        distance = size if self._radius is None else self._radius * np.arctan2(size, self._up @ centre)
        return distance, arm / np.maximum(size, np.finfo(float).tiny)


def _shapes(track: Track, deficit: np.ndarray, surroundings: Surroundings) -> np.ndarray:
    """Return B of every point; where there is no deficit, that of the nearest point in time that has one."""
    if track.shape is not None:
        return track.shape
    storms = np.flatnonzero(deficit > 0.0)
    if not storms.size:
        return np.ones(len(deficit))
    shape = shape_for(track.strongest[storms] / surroundings.reduction, deficit[storms], surroundings.air_density)
    wrong = (shape < SHAPE[0]) | (shape > SHAPE[1])
    if wrong.any():
        at, found = storms[wrong.argmax()], shape[wrong.argmax()]
        raise InputError(
            f"{track.where[at]}: a maximum wind of {track.strongest[at]:g} m s-1 and a deficit of {deficit[at] / 100:g} hPa make "
            f"the shape {found:.2g}; believed are {SHAPE[0]:g} to {SHAPE[1]:g}: correct one of them, or give the shape"
        )
    nearest = np.abs(track.times[:, None] - track.times[storms]).argmin(axis=1)
    return shape[nearest]
