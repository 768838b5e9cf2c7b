"""Geometry of the plane z = 0, in the words that the mesh builder uses for any surface.

    midpoint      (a + b)/2
    distance      |b - a|
    circumcentre  the centre of the circle through a, b, c
    area          signed, positive when a, b, c run counter-clockwise seen from above

All positions are (..., 3) arrays in m with z = 0.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np


class Geometry(Protocol):
    """What a surface must answer; `radius` (m) is None on a plane. Positions (..., 3) in m."""

    radius: float | None

    def up(self, at: np.ndarray) -> np.ndarray:
        """Return the unit vector k, (..., 3). Not collective."""

    def midpoint(self, a: np.ndarray, b: np.ndarray) -> np.ndarray:
        """Return the point half-way from a to b on the surface, (..., 3). Not collective."""

    def distance(self, a: np.ndarray, b: np.ndarray) -> np.ndarray:
        """Return the distance along the surface, m. Not collective."""

    def circumcentre(self, a: np.ndarray, b: np.ndarray, c: np.ndarray) -> np.ndarray:
        """Return the point at one distance from a, b and c (counter-clockwise), (..., 3). Not collective."""

    def area(self, a: np.ndarray, b: np.ndarray, c: np.ndarray) -> np.ndarray:
        """Return the signed area of the triangle a, b, c, m2. Not collective."""


@dataclass(frozen=True)
class PlaneGeometry:
    """The plane z = 0."""

    radius = None

    def up(self, at: np.ndarray) -> np.ndarray:
        """Return (0, 0, 1) everywhere. Not collective."""
        return np.broadcast_to(np.array([0.0, 0.0, 1.0]), np.shape(at))

    def midpoint(self, a: np.ndarray, b: np.ndarray) -> np.ndarray:
        """Return (a + b)/2. Not collective."""
        return a + (b - a) / 2

    def distance(self, a: np.ndarray, b: np.ndarray) -> np.ndarray:
        """Return |b - a|. Not collective."""
        return np.hypot(b[..., 0] - a[..., 0], b[..., 1] - a[..., 1])

    def circumcentre(self, a: np.ndarray, b: np.ndarray, c: np.ndarray) -> np.ndarray:
        """Return the centre of the circle through a, b, c. Not collective.

        With e = b - a, f = c - a it is a + (|e|^2 f_perp - |f|^2 e_perp) / (2 e x f), v_perp = (v_y, -v_x). Working from
        corner a keeps the digits of small triangles far from the origin.
        """
        e, f = b - a, c - a
        twice = 2 * (e[..., 0] * f[..., 1] - e[..., 1] * f[..., 0])
        ee, ff = (e**2).sum(axis=-1), (f**2).sum(axis=-1)
        x = (ee * f[..., 1] - ff * e[..., 1]) / twice
        y = (ff * e[..., 0] - ee * f[..., 0]) / twice
        return a + np.stack([x, y, np.zeros_like(x)], axis=-1)

    def area(self, a: np.ndarray, b: np.ndarray, c: np.ndarray) -> np.ndarray:
        """Return half the cross product of two sides. Not collective."""
        e, f = b - a, c - a
        return (e[..., 0] * f[..., 1] - e[..., 1] * f[..., 0]) / 2
