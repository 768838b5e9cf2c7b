"""Face centres for a basin, from coarse to fine.

    1.  scatter centres at 2^L times the wanted spacing
    2.  sweep; halve the spacing; again, L times: sweeps even out what is as long as a few spacings, so coarse sweeps are
        what gives each part of the basin its number of centres, at little cost
    3.  repair angles

Centres cover the water and a band of land BAND spacings wide; those in its outer part (beyond FREE) stay where they are
and hold the others together. On land the wanted spacing is that of the nearest coast.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import shapely

from swe.errors import MeshError
from swe.mesh.relax import relaxed, row_offset
from swe.mesh.repair import RepairReport, repaired
from swe.mesh.seeds import expected, halved, scattered
from swe.mesh.shoreline import Shoreline, smoothed_shoreline
from swe.mesh.spacing import SpacingField

BAND, FREE = 4.0, 2.6
"""Width in spacings of the dry band, and of its part that moves."""

FEWEST = 250
"""Expected wet centres on the coarsest level, at least. Fewer say nothing of the basin's shape."""

STEEPEST = 0.7
"""Growth of the spacing on the coarsest level, at most: a level 2^L coarser changes 2^L times as fast from cell to cell."""

COARSE = 3
"""Sweeps on a coarser level for each on the final one; all coarser levels together then cost as much as the final one."""

MOST = 5_000_000
"""Faces, at most; beyond it a spacing given in the wrong unit is likelier than a wish. Arbitrary."""


@dataclass(frozen=True, eq=False)
class Basin:
    """The water in the chart, prepared for many questions, and its coast."""

    water: shapely.Geometry
    coast: Shoreline

    def wet(self, places: np.ndarray) -> np.ndarray:
        """Return (n,) bool: the place lies in the water. Not collective."""
        return shapely.contains_xy(self.water, places)

    def distance(self, places: np.ndarray) -> np.ndarray:
        """Return the distance to the coast (n,), m, negative on land. Not collective."""
        return np.where(self.wet(places), 1, -1) * np.abs(self.coast.nearest(places)[0])


@dataclass(frozen=True)
class Layout:
    """Centres (n, 2) in the chart; wet (n,) bool; expected: number (1) of seeds.py in the water; levels above the final one."""

    centres: np.ndarray
    wet: np.ndarray
    expected: float
    levels: int
    repair: RepairReport


def lay_out(basin: Basin, field: SpacingField, distance: np.ndarray, levels: int, sweeps: int, seed: int) -> Layout:
    """Return the centres for a basin. Not collective.

    field      wanted spacing in the chart, reaching BAND * 2^levels spacings beyond the water
    distance   (ny * nx,) of the field's pixels to the coast, m, negative on land
    sweeps     on the final level; seed: of the first positions
    Raises MeshError when the spacing gives no or far too many faces.
    """
    number = expected_faces(field, distance > 0, basin.water.area)
    finest = float(field.at(basin.coast.start).min())
    for level in range(levels, -1, -1):
        spacing = _times(2**level, field)
        if level == levels:  # 1.
            band = distance.reshape(field.values.shape) > -BAND * 2**level * field.values
            centres = scattered(field, band, 2**level, seed)
        else:
            centres = halved(centres, 2 * spacing(centres), seed)
        inland = -basin.distance(centres) / spacing(centres)
        centres, free = centres[inland < BAND], (inland < FREE)[inland < BAND]
        shoreline = smoothed_shoreline(basin.water, spacing, finest)
        centres = relaxed(centres, free, spacing, sweeps * (COARSE if level else 1), shoreline, row_offset(level))  # 2.
    centres, repair = repaired(centres, free, field.at, basin.wet)  # 3.
    return Layout(centres, basin.wet(centres), number, levels, repair)


def coarse_levels(number: float, steepness: float) -> int:
    """Return how many coarser levels to go through for an expected number of faces. Not collective."""
    by_number = np.log(max(number / FEWEST, 1)) / np.log(4)
    by_growth = np.log(max(STEEPEST / max(steepness, 1e-12), 1)) / np.log(2)
    return int(min(by_number, by_growth))


def expected_faces(field: SpacingField, wet: np.ndarray, area: float) -> float:
    """Return the expected number of faces, or raise MeshError when no mesh can have it. Not collective.

    wet (ny * nx,) bool of the field's pixels; area of the water in the chart, m2: pixels may miss narrow water
    """
    wet = wet.reshape(field.values.shape)
    wet = wet if wet.any() else np.ones_like(wet)
    number = expected(field, wet) * area / (np.count_nonzero(wet) * field.raster.pixel**2)
    found = f"the spacing ({field.values.min():.6g} to {field.values.max():.6g} m) gives about {number:.3g} faces in the basin"
    if number < 3:
        raise MeshError(f"{found}; at least 3 are needed: choose a finer spacing, or check the unit of the coastline")
    if number > MOST:
        raise MeshError(f"{found}; allowed are {MOST}: choose a coarser spacing, or check its unit")
    return number


def _times(factor: int, field: SpacingField) -> Callable[[np.ndarray], np.ndarray]:
    return lambda places: factor * field.at(places)
