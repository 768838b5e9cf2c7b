"""Soundings from a CSV file: a header and one sounding a line, depth in m, positive down.

    x,y,depth            on a plane, m
    lon,lat,depth        on a sphere, degrees (also longitude, latitude)

Columns may stand in any order and others may stand beside them; lines that are empty or start with # are passed over.
"""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import shapely
from scipy.spatial import QhullError

from swe.errors import InputError
from swe.mesh.coast import Box, box_of, box_text, chart_of
from swe.mesh.depth import SoundingsBed
from swe.mesh.surface import Surface, near_longitude

NAMES = {True: (("lon", "longitude"), ("lat", "latitude"), ("depth",)), False: (("x",), ("y",), ("depth",))}
"""Column names allowed for the first and second coordinate and the depth, by whether the surface is a sphere."""


def read_soundings(path: str | Path, surface: Surface, water: shapely.Geometry) -> SoundingsBed:
    """Read soundings for the water of a basin, given in input coordinates. Not collective.

    Raises InputError naming file and line: missing, no header, wrong columns, no number, out of range, too few, none near
    the basin, longitude and latitude swapped.
    """
    path = Path(path)
    table = np.array(list(_rows(path, surface)), dtype=float).reshape(-1, 3)
    if len(table) < 3:
        raise InputError(f"{path}: holds {len(table)} soundings; at least 3 that do not lie on one line are needed")
    points, depth = table[:, :2], table[:, 2]
    if not (depth > 0).any():
        raise InputError(f"{path}: no depth is above 0 (deepest {depth.max():g}); depth is positive down: change the signs")
    _refuse_elsewhere(path, points, surface, box_of(water, surface))
    try:
        return SoundingsBed(path.name, points, depth, chart_of(water, surface))
    except QhullError:
        raise InputError(f"{path}: all soundings lie on one line; give soundings that enclose an area") from None


def _rows(path: Path, surface: Surface):
    """Yield (first coordinate, second coordinate, depth) of each line."""
    try:
        with open(path, newline="", encoding="utf-8-sig") as file:
            lines = ((n, row) for n, row in enumerate(csv.reader(file), start=1) if any(row) and not row[0].startswith("#"))
            _, header = next(lines, (0, None))
            if header is None:
                raise InputError(f"{path}: empty; give a header line {_example(surface)} and one sounding a line")
            columns = _columns(path, [name.strip().lower() for name in header], surface)
            for number, row in lines:
                yield _row(path, number, row, header, columns, surface)
    except FileNotFoundError:
        raise InputError(f"{path}: no such file; give a CSV file of soundings") from None
    except (OSError, UnicodeDecodeError, csv.Error) as failure:
        raise InputError(f"{path}: cannot be read as CSV text ({failure})") from None


def _example(surface: Surface) -> str:
    return "lon,lat,depth" if surface.spherical else "x,y,depth"


def _columns(path: Path, header: list[str], surface: Surface) -> list[int]:
    columns = [next((header.index(name) for name in names if name in header), None) for names in NAMES[surface.spherical]]
    if None in columns:
        raise InputError(f"{path}, line 1: header {','.join(header)}; needed are the columns {_example(surface)}")
    return columns


def _row(path: Path, number: int, row: list[str], header: list[str], columns: list[int], surface: Surface) -> tuple[float, ...]:
    if len(row) != len(header):
        raise InputError(f"{path}, line {number}: {len(row)} fields where the header has {len(header)}; correct the line")
    values = []
    for column in columns:
        try:
            value = float(row[column])
        except ValueError:
            value = np.nan
        if not np.isfinite(value):
            raise InputError(f"{path}, line {number}: {header[column].strip()} is {row[column]!r}; a finite number is needed")
        values.append(value)
    if surface.spherical and (abs(values[1]) > 90 or abs(values[0]) > 360):
        swapped = abs(values[0]) <= 90 and abs(values[1]) <= 360
        hint = "longitude and latitude look swapped" if swapped else "longitudes are -360 to 360, latitudes -90 to 90"
        raise InputError(f"{path}, line {number}: longitude {values[0]:g}, latitude {values[1]:g} is no place: {hint}")
    return tuple(values)


def _refuse_elsewhere(path: Path, points: np.ndarray, surface: Surface, box: Box) -> None:
    def near(candidates: np.ndarray) -> np.ndarray:
        if not surface.spherical:
            return candidates
        return np.column_stack([near_longitude(candidates[:, 0], (box[0] + box[2]) / 2), candidates[:, 1]])

    if _meet(near(points), box):
        return
    swapped = points[:, ::-1]
    if (not surface.spherical or np.abs(swapped[:, 1]).max() <= 90) and _meet(near(swapped), box):
        names = " and ".join(surface.axes)
        raise InputError(f"{path}: no sounding lies near the basin, but all would after swapping: {names} look swapped")
    extent = (*near(points).min(axis=0), *near(points).max(axis=0))
    raise InputError(
        f"{path}: the soundings ({box_text(extent, surface)}) lie apart from the basin ({box_text(box, surface)}); "
        "give soundings in the basin"
    )


def _meet(points: np.ndarray, box: Box) -> bool:
    extent = (*points.min(axis=0), *points.max(axis=0))
    return shapely.box(*extent).intersects(shapely.box(*box))
