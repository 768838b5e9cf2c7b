"""The basin as a map needs it: polygons of the faces, coast lines, depths, and the passage worth a closer look.

Coordinates are (longitude, latitude) in degrees on the sphere, unwrapped round the middle of the basin so that it does not
fall apart at the date line, or (x, y) in m on a plane.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components
from scipy.spatial import cKDTree

from swe.constants import DEGREE, EARTH_RADIUS


@dataclass(frozen=True, eq=False)
class Basin:
    """Faces of a mesh on the map.

    spherical    coordinates in degrees, else in m
    nodes        (nn, 2) corners
    centres      (nf, 2)
    face_nodes   (nf, m) counter-clockwise, -1 behind the last
    area         (nf,) m2
    depth        (nf,) below the datum, m
    """

    spherical: bool
    nodes: np.ndarray
    centres: np.ndarray
    face_nodes: np.ndarray
    area: np.ndarray
    depth: np.ndarray

    @property
    def box(self) -> tuple[float, float, float, float]:
        """Return west, south, east, north. Not collective."""
        return (*self.nodes.min(axis=0), *self.nodes.max(axis=0))

    @cached_property
    def polygons(self) -> np.ndarray:
        """Return the corners (nf, m, 2) of each face; short faces repeat their last corner. Not collective."""
        last = self.face_nodes[np.arange(len(self.face_nodes)), (self.face_nodes >= 0).sum(axis=1) - 1]
        return self.nodes[np.where(self.face_nodes >= 0, self.face_nodes, last[:, None])]

    @cached_property
    def coast(self) -> np.ndarray:
        """Return the edges that belong to one face only, (n, 2) node indices. Not collective."""
        closed = np.column_stack([self.face_nodes, np.full(len(self.face_nodes), -1)])
        count = (self.face_nodes >= 0).sum(axis=1)
        closed[np.arange(len(closed)), count] = self.face_nodes[:, 0]
        start, end = closed[:, :-1].ravel(), closed[:, 1:].ravel()
        sides = np.column_stack([start, end])[(start >= 0) & (end >= 0)]
        _, first, times = np.unique(np.sort(sides, axis=1), axis=0, return_index=True, return_counts=True)
        return sides[first[times == 1]]

    @cached_property
    def spacing(self) -> np.ndarray:
        """Return the distance (nf,) between centres that a regular hexagon of the face's area would have, m. Not collective."""
        return np.sqrt(2.0 / np.sqrt(3.0) * self.area)

    @property
    def metres(self) -> np.ndarray:
        """Return the factors (2,) from map units to metres in the middle of the basin. Not collective."""
        if not self.spherical:
            return np.ones(2)
        _, south, _, north = self.box
        return EARTH_RADIUS * DEGREE * np.array([np.cos(0.5 * (south + north) * DEGREE), 1.0])

    def nearest(self, places: np.ndarray) -> np.ndarray:
        """Return the face (n,) whose centre is nearest each place (n, 2). Not collective."""
        return cKDTree(self.centres * self.metres).query(np.asarray(places) * self.metres)[1]

    def passage(self) -> tuple[float, float]:
        """Return where the longest island comes nearest to another coast; without islands, the smallest face. Not collective."""
        shores = self._shores()
        if len(shores) < 2:
            return tuple(self.centres[np.argmin(self.area)])
        island = shores[1]
        others = np.concatenate(shores[:1] + shores[2:])
        distance, other = cKDTree(self.nodes[others] * self.metres).query(self.nodes[island] * self.metres)
        here = np.argmin(distance)
        return tuple(0.5 * (self.nodes[island[here]] + self.nodes[others[other[here]]]))

    def _shores(self) -> list[np.ndarray]:
        """Return the node indices of each connected coast, longest first."""
        nodes, ends = np.unique(self.coast, return_inverse=True)
        ends = ends.reshape(-1, 2)
        links = coo_array((np.ones(len(ends)), (ends[:, 0], ends[:, 1])), shape=(len(nodes), len(nodes)))
        number, shore = connected_components(links, directed=False)
        return sorted((nodes[shore == k] for k in range(number)), key=len, reverse=True)


def unwrapped(longitude: np.ndarray, middle: float) -> np.ndarray:
    """Return longitudes within half a turn of the middle. Not collective."""
    return middle + (np.asarray(longitude) - middle + 180.0) % 360.0 - 180.0
