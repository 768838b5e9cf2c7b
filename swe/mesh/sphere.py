"""Geometry of a sphere of radius R about the origin: lines are great circles, areas are spherical.

    midpoint      R (a + b)/|a + b|
    distance      2 R asin( |a - b| / 2R )                     keeps its digits for near points, unlike acos(a.b)
    circumcentre  R (b - a) x (c - a) / |(b - a) x (c - a)|    the pole of the plane through a, b, c, on their side
    area          2 R^2 atan2( a.(b x c), 1 + a.b + b.c + c.a )   for unit vectors; signed, counter-clockwise positive

a.(b x c) is evaluated as a.((b - a) x (c - a)): the differences of near points are exact in floating point, so the area
of a 100 m triangle on the Earth keeps as many digits as its corners allow.
Source: Van Oosterom & Strackee 1983, IEEE Trans. Biomed. Eng. 30, 125.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class SphereGeometry:
    """A sphere of the given radius (m) about the origin. Positions (..., 3) in m, |x| = radius."""

    radius: float

    def up(self, at: np.ndarray) -> np.ndarray:
        """Return x/R. Not collective."""
        return at / self.radius

    def midpoint(self, a: np.ndarray, b: np.ndarray) -> np.ndarray:
        """Return the point half-way along the great circle. Not collective."""
        return self.radius * unit(a + b)

    def distance(self, a: np.ndarray, b: np.ndarray) -> np.ndarray:
        """Return the great-circle distance. Not collective."""
        chord = np.linalg.norm(b - a, axis=-1) / (2 * self.radius)
        return 2 * self.radius * np.arcsin(np.minimum(chord, 1.0))

    def circumcentre(self, a: np.ndarray, b: np.ndarray, c: np.ndarray) -> np.ndarray:
        """Return the pole of the plane through a, b, c (counter-clockwise seen from outside). Not collective."""
        return self.radius * unit(np.cross(b - a, c - a))

    def area(self, a: np.ndarray, b: np.ndarray, c: np.ndarray) -> np.ndarray:
        """Return the signed area of the spherical triangle. Not collective."""
        p, q, r = a / self.radius, b / self.radius, c / self.radius
        triple = dot(p, np.cross(q - p, r - p))
        return 2 * self.radius**2 * np.arctan2(triple, 1 + dot(p, q) + dot(q, r) + dot(r, p))


def unit(v: np.ndarray) -> np.ndarray:
    """Return v/|v| along the last axis. Not collective."""
    return v / np.linalg.norm(v, axis=-1, keepdims=True)


def dot(a: np.ndarray, b: np.ndarray) -> np.ndarray:
    """Return the scalar product along the last axis. Not collective."""
    return np.einsum("...i,...i->...", a, b)


def stereographic(xyz: np.ndarray) -> np.ndarray:
    """Return (n, 2) stereographic images of unit vectors about the middle of their directions. Not collective.

    The projection keeps circles, hence Delaunay triangulations; seen from outside it also keeps the sense of rotation.
    Source: Snyder 1987, USGS Professional Paper 1395, chapter 21.
    """
    centre = unit(xyz.mean(axis=0))
    axis = np.eye(3)[np.argmin(np.abs(centre))]
    east = unit(np.cross(axis, centre))
    north = np.cross(centre, east)
    return 2 * np.column_stack([xyz @ east, xyz @ north]) / (1 + xyz @ centre)[:, None]
