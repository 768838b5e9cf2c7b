"""Geometry of a sphere of radius R about the origin: lines are great circles, areas are spherical.

    midpoint      R (a + b)/|a + b|
    distance      2 R asin( |a - b| / 2R )                     keeps its digits for near points, unlike acos(a.b)
    circumcentre  the pole of the plane through a, b, c, on their side (see `circumcentre`)
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
        """Return the pole of the plane through a, b, c (counter-clockwise seen from outside). Not collective.

        It is unit(a + y) for the y in the tangent plane at a with y.e = |b - a|^2/2 and y.f = |c - a|^2/2, where e and f are
        the tangential parts of b - a and c - a; as on the plane, y = (|b - a|^2 f x k - |c - a|^2 e x k) / (2 k.(e x f)), k = a.
        The plain cross product (b - a) x (c - a) would turn the last digit of |b| into an error R/|b - a| times larger:
        0.1 mm for triangles of 100 m on the Earth.
        """
        k, e, f = a / self.radius, (b - a) / self.radius, (c - a) / self.radius
        ee, ff = dot(e, e)[..., None], dot(f, f)[..., None]
        e, f = tangential(e, k), tangential(f, k)
        y = (ee * np.cross(f, k) - ff * np.cross(e, k)) / (2 * dot(k, np.cross(e, f))[..., None])
        return self.radius * unit(k + y)

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


def tangential(v: np.ndarray, k: np.ndarray) -> np.ndarray:
    """Return v without its part along the unit vector k. Not collective."""
    return v - dot(v, k)[..., None] * k


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
