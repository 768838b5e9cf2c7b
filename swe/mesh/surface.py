"""The two surfaces a basin may lie on, and the flat chart in which its mesh is laid out.

Inputs give positions as (x, y) in m on a plane, as (longitude, latitude) in degrees on a sphere of radius R. The chart of
a plane is itself. The chart of a basin on the sphere is the stereographic projection about the basin's centre u, with e
and n the unit vectors to the east and north there; for a unit vector p

    X = 2 R p.e / (1 + p.u),   Y = 2 R p.n / (1 + p.u),   p = ((X/R) e + (Y/R) n + (1 - q) u) / (1 + q),   q = (X^2 + Y^2)/4R^2

It keeps angles, and circles, hence Delaunay triangulations; lengths are stretched by k = 1 + q.
Source: Snyder 1987, Map Projections - A Working Manual, USGS Professional Paper 1395, chapter 21.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from swe.errors import InputError

WIDEST = 75.0
"""Largest angle (degrees) between the centre of a regional basin and its coast. Beyond it the stretch k exceeds 1.6 and
the basin is no longer regional; arbitrary."""


class Chart(Protocol):
    """A flat picture of the surface; positions (n, 2) on either side."""

    def to_chart(self, points: np.ndarray) -> np.ndarray:
        """Return chart positions (m) of points in input coordinates. Not collective."""

    def from_chart(self, places: np.ndarray) -> np.ndarray:
        """Return input coordinates of chart positions. Not collective."""

    def stretch(self, places: np.ndarray) -> np.ndarray:
        """Return chart length per true length at chart positions, (n,). Not collective."""


@dataclass(frozen=True)
class Plane:
    """A plane; positions in m."""

    spherical = False
    axes = ("x", "y")
    unit = "m"

    def chart_about(self, points: np.ndarray) -> Chart:
        """Return the identity. Not collective."""
        return FlatChart()


@dataclass(frozen=True)
class Sphere:
    """A sphere; positions as longitude and latitude in degrees. radius in m."""

    radius: float
    spherical = True
    axes = ("longitude", "latitude")
    unit = "degrees"

    def chart_about(self, points: np.ndarray) -> StereographicChart:
        """Return the stereographic chart centred amid the given longitudes and latitudes. Not collective."""
        xyz = unit_vectors(points)
        middle = (xyz.min(axis=0) + xyz.max(axis=0)) / 2
        chart = StereographicChart(self.radius, tuple(middle / max(np.linalg.norm(middle), 1e-300)))
        reach = np.degrees(np.arccos(np.clip(xyz @ np.array(chart.centre), -1, 1).min()))
        if reach > WIDEST:
            raise InputError(
                f"the basin reaches {reach:.0f} degrees from its centre; a regional basin may reach {WIDEST:.0f}: "
                "give a smaller polygon, or check that its longitudes do not jump by 360"
            )
        return chart


Surface = Plane | Sphere


@dataclass(frozen=True)
class FlatChart:
    """The chart of a plane."""

    def to_chart(self, points: np.ndarray) -> np.ndarray:
        """Return the points themselves. Not collective."""
        return np.asarray(points, dtype=float)

    def from_chart(self, places: np.ndarray) -> np.ndarray:
        """Return the places themselves. Not collective."""
        return np.asarray(places, dtype=float)

    def stretch(self, places: np.ndarray) -> np.ndarray:
        """Return 1 everywhere. Not collective."""
        return np.ones(len(places))


@dataclass(frozen=True)
class StereographicChart:
    """The stereographic chart of a sphere of the given radius (m) about the unit vector `centre`."""

    radius: float
    centre: tuple[float, float, float]

    def to_chart(self, points: np.ndarray) -> np.ndarray:
        """Return chart positions (m) of longitudes and latitudes (degrees). Not collective."""
        along = unit_vectors(points) @ self._frame().T
        return 2 * self.radius * along[:, :2] / (1 + along[:, 2:])

    def to_sphere(self, places: np.ndarray) -> np.ndarray:
        """Return unit vectors (n, 3) of chart positions. Not collective."""
        scaled = np.asarray(places, dtype=float) / self.radius
        q = (scaled**2).sum(axis=1, keepdims=True) / 4
        return np.hstack([scaled, 1 - q]) @ self._frame() / (1 + q)

    def from_chart(self, places: np.ndarray) -> np.ndarray:
        """Return longitudes (-180 to 180) and latitudes of chart positions, in degrees. Not collective."""
        p = self.to_sphere(places)
        return np.degrees(np.column_stack([np.arctan2(p[:, 1], p[:, 0]), np.arctan2(p[:, 2], np.hypot(p[:, 0], p[:, 1]))]))

    def stretch(self, places: np.ndarray) -> np.ndarray:
        """Return k = 1 + q. Not collective."""
        return 1 + (np.asarray(places) ** 2).sum(axis=1) / (4 * self.radius**2)

    def _frame(self) -> np.ndarray:
        """Return the unit vectors e, n, u as rows."""
        up = np.array(self.centre)
        pole = np.array([0.0, 0.0, 1.0]) if abs(up[2]) < 0.999999 else np.array([-1.0, 0.0, 0.0])
        east = np.cross(pole, up)
        east /= np.linalg.norm(east)
        return np.array([east, np.cross(up, east), up])


def unit_vectors(points: np.ndarray) -> np.ndarray:
    """Return unit vectors (n, 3) of longitudes and latitudes (n, 2) in degrees. Not collective."""
    lon, lat = np.radians(np.asarray(points, dtype=float)).T
    return np.column_stack([np.cos(lat) * np.cos(lon), np.cos(lat) * np.sin(lon), np.sin(lat)])


def near_longitude(longitude: np.ndarray, centre: float) -> np.ndarray:
    """Return longitudes shifted by whole turns into [centre - 180, centre + 180). Not collective."""
    return centre - 180 + np.mod(np.asarray(longitude, dtype=float) - centre + 180, 360)
