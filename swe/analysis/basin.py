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
        """Return the middle of the strait worth a closer look; without islands, of the smallest face. Not collective.

        Of all islands the one whose gap to another coast is smallest against the length of shore along which it stays below
        twice that: a long narrow strait counts more than a rock near a cape.
        """
        shores = self._shores()
        if len(shores) < 2:
            return tuple(self.centres[np.argmin(self.area)])
        found = [self._gap(shores, k) for k in range(1, len(shores))]
        return tuple(min(found, key=lambda gap: gap[0])[1])

    def _gap(self, shores: list[np.ndarray], island: int) -> tuple[float, np.ndarray]:
        """Return the smallest gap of an island to any other coast over the nodes along it, and the middle of the gap."""
        own = self.nodes[shores[island]]
        other = self.nodes[np.concatenate(shores[:island] + shores[island + 1 :])]
        distance, partner = cKDTree(other * self.metres).query(own * self.metres)
        here = int(np.argmin(distance))
        along = np.count_nonzero(distance < 2.0 * distance[here])
        return distance[here] / along, 0.5 * (own[here] + other[partner[here]])

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
