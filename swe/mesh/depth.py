"""The resting depth of the water, positive down: one number, a grid, or soundings.

A bed answers `at(points)` with the depth at points in input coordinates and says where it had to guess. The depth of a
mesh is the bed at the face centres, nowhere less than a least depth (`depth_at`): cells never fall dry.

    ConstantBed     one depth
    GridBed         bilinear on a rectilinear grid; grid points that are missing or land take the depth of the nearest wet one
    SoundingsBed    linear on the Delaunay triangles of the soundings; beyond their hull the nearest sounding
"""

from __future__ import annotations

from dataclasses import asdict, dataclass
from typing import Protocol

import numpy as np
from scipy.interpolate import LinearNDInterpolator
from scipy.ndimage import distance_transform_edt
from scipy.spatial import cKDTree

from swe.errors import InputError
from swe.mesh.surface import Chart, near_longitude


class Bed(Protocol):
    """A bed known everywhere in the basin."""

    source: str
    guess: str

    def at(self, points: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return depths (n,) in m at points (n, 2), and (n,) bool where they were guessed, as `guess` says. Not collective."""


@dataclass(frozen=True)
class DepthReport:
    """How the depth of a mesh came about."""

    source: str
    guess: str
    faces: int
    guessed: int
    least_depth: float
    deepened: int
    shallowest: float
    mean: float
    deepest: float

    def lines(self) -> list[str]:
        """Return sentences for people. Not collective."""
        share = 100 / max(self.faces, 1)
        said = [f"depth from {self.source}: {self.shallowest:.4g} to {self.deepest:.4g} m, mean {self.mean:.4g} m"]
        if self.guess:
            said.append(f"{self.guessed} of {self.faces} faces ({self.guessed * share:.1f} %) {self.guess}")
        raised = f"{self.deepened} of {self.faces} faces ({self.deepened * share:.1f} %)"
        return [*said, f"{raised} deepened to the least depth {self.least_depth:g} m"]

    def as_dict(self) -> dict:
        """Return all numbers by name. Not collective."""
        return asdict(self)


def depth_at(bed: Bed, points: np.ndarray, least_depth: float) -> tuple[np.ndarray, DepthReport]:
    """Return the depth (n,) at points (n, 2), nowhere below `least_depth` m, and how it came about. Not collective."""
    if not (np.isfinite(least_depth) and least_depth > 0):
        raise InputError(f"least depth: {least_depth!r} m; allowed are numbers above 0: cells never fall dry")
    raw, guessed = bed.at(points)
    depth = np.maximum(raw, least_depth)
    deepened = int((raw < least_depth).sum())
    if deepened == len(raw):
        raise InputError(
            f"{bed.source}: shallower than the least depth {least_depth:g} m in the whole basin (deepest {raw.max():.4g} m); "
            "check whether depth is positive down, and its unit"
        )
    report = DepthReport(
        bed.source, bed.guess, len(raw), int(guessed.sum()), float(least_depth), deepened,
        float(depth.min()), float(depth.mean()), float(depth.max()),
    )  # fmt: skip
    return depth, report


@dataclass(frozen=True)
class ConstantBed:
    """One depth (m) everywhere."""

    depth: float
    guess = ""

    def __post_init__(self):
        if not (np.isfinite(self.depth) and self.depth > 0):
            raise InputError(f"constant depth: {self.depth!r} m; allowed are numbers above 0, positive down")

    @property
    def source(self) -> str:
        """Return the name of this bed for people. Not collective."""
        return f"the constant {self.depth:g} m"

    def at(self, points: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return the constant; nothing is guessed. Not collective."""
        return np.full(len(points), float(self.depth)), np.zeros(len(points), dtype=bool)


@dataclass(frozen=True, eq=False)
class GridBed:
    """Depths on a rectilinear grid.

    x (nx,), y (ny,) ascending, in input coordinates; depth (ny, nx) in m, positive down, finite; filled (ny, nx) bool where
    the grid had no water of its own. On the sphere `centre` is the longitude about which longitudes are taken, else None.
    """

    source: str
    x: np.ndarray
    y: np.ndarray
    depth: np.ndarray
    filled: np.ndarray
    centre: float | None
    guess = "rest in part on grid points without water, filled from the nearest wet ones"

    def at(self, points: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return bilinear depths; guessed where one of the four grid points was filled. Not collective."""
        px, py = np.asarray(points, dtype=float).T
        if self.centre is not None:
            px = near_longitude(px, self.centre)
        i, s = _bracket(self.x, px)
        j, t = _bracket(self.y, py)
        depth, guessed = np.zeros(len(px)), np.zeros(len(px), dtype=bool)
        for di, weight_x in ((0, 1 - s), (1, s)):
            for dj, weight_y in ((0, 1 - t), (1, t)):
                weight = weight_x * weight_y
                depth += weight * self.depth[j + dj, i + di]
                guessed |= self.filled[j + dj, i + di] & (weight > 0)
        return depth, guessed


def _bracket(axis: np.ndarray, value: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return the lower grid index and the fraction towards the next; beyond the ends the end value holds."""
    lower = np.clip(np.searchsorted(axis, value, side="right") - 1, 0, len(axis) - 2)
    return lower, np.clip((value - axis[lower]) / (axis[lower + 1] - axis[lower]), 0, 1)


def filled_from_wet(x: np.ndarray, y: np.ndarray, depth: np.ndarray, wet: np.ndarray, aspect: float) -> np.ndarray:
    """Return depth (ny, nx) with the points that are not wet given the depth of the nearest wet point.

    aspect   length of a unit of x per length of a unit of y (cos latitude on the sphere, 1 on a plane). Distances are taken
             on the mean steps of the axes. Not collective.
    """
    steps = (abs(y[-1] - y[0]) / (len(y) - 1), aspect * abs(x[-1] - x[0]) / (len(x) - 1))
    row, column = distance_transform_edt(~wet, sampling=steps, return_distances=False, return_indices=True)
    return depth[row, column]


class SoundingsBed:
    """Depths measured at scattered points.

    points (n, 2) input coordinates; depth (n,) m, positive down; chart: where the triangles are laid.
    """

    guess = "lie outside the hull of the soundings and take the nearest one"

    def __init__(self, source: str, points: np.ndarray, depth: np.ndarray, chart: Chart):
        self.source, self._chart, self._depth = source, chart, np.asarray(depth, dtype=float)
        places = chart.to_chart(points)
        self._inside = LinearNDInterpolator(places, self._depth)
        self._tree = cKDTree(places)

    def at(self, points: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return linear depths; guessed outside the hull. Not collective."""
        places = self._chart.to_chart(points)
        depth = self._inside(places)
        outside = np.isnan(depth)
        depth[outside] = self._depth[self._tree.query(places[outside])[1]]
        return depth, outside
