"""The coast as short segments in the chart: distance to it, and on which side of it a place lies.

Two coasts serve the generator. The true one gives distances. The smoothed one guides the rows of faces along it: each
ring is resampled at equal parts of the local spacing h and passed through a Gaussian of width SMOOTHING h, several times,
so that bays and heads below the spacing vanish while longer ones stay. Repeated smoothing and resampling is a discrete
flow by curvature (Gage & Hamilton 1986, J. Diff. Geom. 23, 69): rings below the spacing shrink away, none crosses itself.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import shapely
from scipy.ndimage import gaussian_filter1d
from scipy.spatial import cKDTree

SAMPLES = 8
"""Segments of the smoothed coast per spacing."""

SMOOTHING = 0.3
"""Width of one Gaussian pass in spacings."""

PASSES = 3
"""Smoothing passes; together they act like a width of 0.5 spacings."""

SHORTEST = 2.5
"""Rings shorter than this many spacings round guide no faces: such an island holds less than one."""

CHUNK = 100_000
"""Places looked up at a time, to bound memory."""


@dataclass(frozen=True, eq=False)
class Shoreline:
    """Segments from `start` (n, 2) to `end` (n, 2) in the chart, m, water to their left, all short against the spacing."""

    start: np.ndarray
    end: np.ndarray
    tree: cKDTree

    def nearest(self, places: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return the signed distance (n,) to the coast, positive in the water, and the nearest place on it (n, 2).

        Exact up to the length of a segment squared over eight times the distance. Not collective.
        """
        parts = [self._nearest(places[first : first + CHUNK]) for first in range(0, len(places), CHUNK)]
        return np.concatenate([d for d, _ in parts] or [[]]), np.vstack([foot for _, foot in parts] or [np.zeros((0, 2))])

    def _nearest(self, places: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        candidates = self.tree.query(places, k=min(3, len(self.start)))[1].reshape(len(places), -1)
        start, along = self.start[candidates], self.end[candidates] - self.start[candidates]
        part = ((places[:, None] - start) * along).sum(axis=2) / (along**2).sum(axis=2)
        feet = start + np.clip(part, 0, 1)[:, :, None] * along
        offsets = places[:, None] - feet
        distances = np.hypot(offsets[:, :, 0], offsets[:, :, 1])
        best = distances.argmin(axis=1)[:, None]
        left = along[:, :, 0] * offsets[:, :, 1] - along[:, :, 1] * offsets[:, :, 0]
        # At a corner two segments share the foot: their normals together decide (Baerentzen & Aanaes 2005).
        tied = distances <= np.take_along_axis(distances, best, 1) * (1 + 1e-9)
        side = np.where((left / np.hypot(along[:, :, 0], along[:, :, 1]) * tied).sum(axis=1) >= 0, 1.0, -1.0)
        foot = np.take_along_axis(feet, best[:, :, None], 1)[:, 0]
        return side * np.take_along_axis(distances, best, 1)[:, 0], foot


def true_shoreline(water: shapely.Geometry, step: float) -> Shoreline:
    """Return the coast of charted water cut into segments no longer than `step` m. Not collective."""
    return _shoreline([shapely.get_coordinates(ring) for ring in _rings(shapely.segmentize(water, step))])


def smoothed_shoreline(water: shapely.Geometry, spacing: Callable[[np.ndarray], np.ndarray], step: float) -> Shoreline | None:
    """Return the coast smoothed at the local spacing, or None where nothing is left. Not collective.

    spacing   chart spacing (m) at chart places; step: finest spacing along the coast
    """
    rings = [_smoothed(shapely.get_coordinates(ring), spacing) for ring in _rings(shapely.segmentize(water, step))]
    rings = [ring for ring in rings if ring is not None]
    return _shoreline(rings) if rings else None


def _rings(water: shapely.Geometry) -> np.ndarray:
    """Return all rings, water to the left."""
    return shapely.get_rings(shapely.get_parts(shapely.orient_polygons(water)))


def _shoreline(rings: list[np.ndarray]) -> Shoreline:
    start = np.vstack([ring[:-1] for ring in rings])
    end = np.vstack([ring[1:] for ring in rings])
    long = (start != end).any(axis=1)
    start, end = start[long], end[long]
    return Shoreline(start, end, cKDTree((start + end) / 2))


def _smoothed(ring: np.ndarray, spacing: Callable[[np.ndarray], np.ndarray]) -> np.ndarray | None:
    for _ in range(PASSES):
        ring = _resampled(ring, spacing)
        if ring is None:
            return None
        ring[:-1] = gaussian_filter1d(ring[:-1], SMOOTHING * SAMPLES, axis=0, mode="wrap")
        ring[-1] = ring[0]
    return ring


def _resampled(ring: np.ndarray, spacing: Callable[[np.ndarray], np.ndarray]) -> np.ndarray | None:
    """Return the closed ring with its corners at equal parts of the spacing, or None when it is too short to matter."""
    lengths = np.hypot(*np.diff(ring, axis=0).T)
    walked = np.concatenate([[0.0], np.cumsum(lengths / spacing((ring[1:] + ring[:-1]) / 2))])
    if walked[-1] < SHORTEST:
        return None
    at = np.linspace(0, walked[-1], int(np.ceil(walked[-1] * SAMPLES)) + 1)
    return np.column_stack([np.interp(at, walked, ring[:, axis]) for axis in (0, 1)])
