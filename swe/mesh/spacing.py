"""The wanted spacing of face centres: rules, and the smooth field they give.

Rules say how far apart the centres shall be at a place, in m:

    Constant(h)                     h everywhere
    NearCoast(h1, h2, growth)       h = min(h2, h1 + growth s),  s distance to the coast
    ByDepth(T, h1, h2, g)           h = T sqrt(g D) between h1 and h2: a long wave crosses every face in the time T
    Within(area, h)                 h in the area, no wish elsewhere
    Smallest(rules)                 the smallest of several

The field is the largest one below the rules whose rate of change nowhere exceeds `growth`,

    h(x) = min over y of ( rule(y) + growth |x - y| )                       (Persson 2006, Eng. with Computers 22, 95)

on a raster of the chart. The minimum is taken over shifts by 1, 2, 4, ... pixels in 16 directions: each is exact for the
distance along those directions, at most 2.8 % longer than the straight one.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Protocol

import numpy as np
import shapely

from swe.errors import InputError

STEEPEST = 0.5
"""Largest growth allowed (m per m). Neighbouring faces then differ by up to a half; beyond that no good mesh exists."""

MOST_PIXELS = 2_000_000
"""Pixels of the raster at most: 16 MB an array."""

FEWEST_PIXELS = 50
"""Pixels along the longer side at least, so that the shape of the water is seen however coarse the spacing."""

DIRECTIONS = ((0, 1), (1, 0), (1, 1), (1, -1), (1, 2), (2, 1), (1, -2), (2, -1))
"""Half of the 16 directions (rows, columns); the other half are their opposites."""


@dataclass(frozen=True)
class Site:
    """Where spacing is asked for: places (n, 2) in the chart; the rest is worked out on demand.

    coast_distance()   (n,) m        depth()   (n,) m        inside(area)   (n,) bool, area in input coordinates
    """

    places: np.ndarray
    coast_distance: Callable[[], np.ndarray]
    depth: Callable[[], np.ndarray]
    inside: Callable[[shapely.Geometry], np.ndarray]


class Spacing(Protocol):
    """A rule for the spacing. finest: the smallest value (m) it can give."""

    finest: float

    def wanted(self, site: Site) -> np.ndarray:
        """Return the spacing (n,) in m, infinite where the rule has no wish. Not collective."""


@dataclass(frozen=True)
class Constant:
    """The same spacing (m) everywhere."""

    distance: float

    def __post_init__(self):
        _require_positive("spacing", self.distance)

    @property
    def finest(self) -> float:
        """Return the spacing. Not collective."""
        return self.distance

    def wanted(self, site: Site) -> np.ndarray:
        """Return the spacing at every place. Not collective."""
        return np.full(len(site.places), float(self.distance))


@dataclass(frozen=True)
class NearCoast:
    """Finest (m) at the coast, growing by `growth` m per m of distance to the coarsest (m)."""

    finest: float
    coarsest: float
    growth: float

    def __post_init__(self):
        _require_order(self.finest, self.coarsest)
        _require_growth(self.growth)

    def wanted(self, site: Site) -> np.ndarray:
        """Return min(coarsest, finest + growth * distance). Not collective."""
        return np.minimum(self.coarsest, self.finest + self.growth * site.coast_distance())


@dataclass(frozen=True)
class ByDepth:
    """Spacing that a long wave crosses in `crossing_time` s, kept between finest and coarsest (m)."""

    crossing_time: float
    finest: float
    coarsest: float
    gravity: float

    def __post_init__(self):
        _require_positive("crossing time", self.crossing_time, "s")
        _require_order(self.finest, self.coarsest)
        _require_positive("gravity", self.gravity, "m s-2")

    def wanted(self, site: Site) -> np.ndarray:
        """Return crossing_time * sqrt(gravity * depth) within its bounds. Not collective."""
        return np.clip(self.crossing_time * np.sqrt(self.gravity * site.depth()), self.finest, self.coarsest)


@dataclass(frozen=True)
class Within:
    """A spacing (m) inside an area given in input coordinates; no wish outside."""

    area: shapely.Geometry
    distance: float

    def __post_init__(self):
        _require_positive("spacing inside an area", self.distance)

    @property
    def finest(self) -> float:
        """Return the spacing. Not collective."""
        return self.distance

    def wanted(self, site: Site) -> np.ndarray:
        """Return the spacing inside, infinity outside. Not collective."""
        return np.where(site.inside(self.area), self.distance, np.inf)


@dataclass(frozen=True)
class Smallest:
    """The smallest wish of several rules."""

    rules: tuple[Spacing, ...]

    @property
    def finest(self) -> float:
        """Return the finest of all. Not collective."""
        return min(rule.finest for rule in self.rules)

    def wanted(self, site: Site) -> np.ndarray:
        """Return the least of the wishes at each place. Not collective."""
        return np.min([rule.wanted(site) for rule in self.rules], axis=0)


@dataclass(frozen=True)
class Raster:
    """Square pixels in the chart: pixel (row j, column i) stands for the place (west + i pixel, south + j pixel), m."""

    west: float
    south: float
    pixel: float
    shape: tuple[int, int]

    def places(self) -> np.ndarray:
        """Return the chart positions of all pixels, row by row, (ny * nx, 2). Not collective."""
        rows, columns = self.shape
        x, y = np.meshgrid(self.west + self.pixel * np.arange(columns), self.south + self.pixel * np.arange(rows))
        return np.column_stack([x.ravel(), y.ravel()])


def raster_over(box: tuple[float, float, float, float], margin: float, finest: float, most: int = MOST_PIXELS) -> Raster:
    """Return pixels over a box and a margin: half the finest spacing, or larger so that there are `most`. Not collective."""
    west, south = box[0] - margin, box[1] - margin
    width, height = box[2] + margin - west, box[3] + margin - south
    pixel = max(min(finest / 2, max(width, height) / FEWEST_PIXELS), float(np.sqrt(width * height / most)))
    return Raster(west, south, pixel, (int(np.ceil(height / pixel)) + 2, int(np.ceil(width / pixel)) + 2))


@dataclass(frozen=True, eq=False)
class SpacingField:
    """Spacing on a raster: values (ny, nx) in chart m."""

    raster: Raster
    values: np.ndarray

    def at(self, places: np.ndarray) -> np.ndarray:
        """Return the bilinear spacing (n,) in chart m; beyond the raster its border holds. Not collective."""
        ny, nx = self.values.shape
        x = np.clip((places[:, 0] - self.raster.west) / self.raster.pixel, 0, nx - 1)
        y = np.clip((places[:, 1] - self.raster.south) / self.raster.pixel, 0, ny - 1)
        i, j = np.minimum(x.astype(int), nx - 2), np.minimum(y.astype(int), ny - 2)
        s, t = x - i, y - j
        flat, k = self.values.ravel(), j * nx + i
        return (1 - t) * ((1 - s) * flat[k] + s * flat[k + 1]) + t * ((1 - s) * flat[k + nx] + s * flat[k + nx + 1])

    def steepness(self) -> float:
        """Return the largest change between neighbouring pixels, m per m. Not collective."""
        steps = [np.abs(np.diff(self.values, axis=axis)).max(initial=0.0) for axis in (0, 1)]
        return float(max(steps)) / self.raster.pixel


def spacing_field(raster: Raster, wanted: np.ndarray, growth: float) -> SpacingField:
    """Return the smooth field below the wanted chart spacing (ny * nx,) of a raster's pixels. Not collective.

    growth   largest rate of change, m per m
    """
    _require_growth(growth)
    if not np.isfinite(wanted).any():
        raise InputError("spacing: no rule has a wish inside the basin; add a rule that holds everywhere")
    return SpacingField(raster, limited(wanted.reshape(raster.shape), raster.pixel, growth))


def limited(values: np.ndarray, pixel: float, growth: float) -> np.ndarray:
    """Return the largest raster below `values` that changes by at most `growth` per m. Not collective."""
    low = values.copy()
    for rows, columns in DIRECTIONS:
        rise, power = growth * pixel * float(np.hypot(rows, columns)), 1
        while power * rows < low.shape[0] and power * abs(columns) < low.shape[1]:
            _lower(low, power * rows, power * columns, power * rise)
            power *= 2
    return low


def _lower(low: np.ndarray, rows: int, columns: int, rise: float) -> None:
    """Lower each pixel to its two partners, `rows` and `columns` away on either side, plus the rise; in place."""
    here = (slice(rows, None), slice(max(columns, 0), columns if columns < 0 else None))
    there = (slice(None, -rows if rows else None), slice(max(-columns, 0), -columns if columns > 0 else None))
    raised = low[there] + rise
    back = low[here] + rise
    np.minimum(low[here], raised, out=low[here])
    np.minimum(low[there], back, out=low[there])


def _require_positive(what: str, value: float, unit: str = "m") -> None:
    if not (np.isfinite(value) and value > 0):
        raise InputError(f"{what}: {value!r} {unit}; allowed are numbers above 0")


def _require_order(finest: float, coarsest: float) -> None:
    _require_positive("finest spacing", finest)
    _require_positive("coarsest spacing", coarsest)
    if finest > coarsest:
        raise InputError(f"spacing: finest {finest:g} m exceeds coarsest {coarsest:g} m; exchange them")


def _require_growth(growth: float) -> None:
    if not 0 < growth <= STEEPEST:
        raise InputError(f"growth of the spacing: {growth!r} m per m; allowed are numbers above 0 up to {STEEPEST:g}")
