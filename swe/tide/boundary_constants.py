"""Harmonic constants along an open boundary, from a table of points to any place on the line.

CSV with a header and one row for each point and constituent:

    lon,lat,constituent,amplitude,lag          degrees, degrees, name, m, degrees on Greenwich; x,y in m on a plane

A point's place is its foot on the line; between points the complex constants H e^{-i g} are linear along the line, beyond the
first and the last they stay constant. One point serves the whole line.
"""

from __future__ import annotations

import csv
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import shapely

from swe.constants import DEGREE
from swe.errors import InputError
from swe.tide.constituents import constituents

COLUMNS = ("constituent", "amplitude", "lag")


@dataclass(frozen=True, eq=False)
class BoundaryConstants:
    """names (nc,) of constituents; points (n, 2) in input coordinates; constants (nc, n) complex H e^{-i g}, m."""

    names: tuple[str, ...]
    points: np.ndarray
    constants: np.ndarray

    def along(self, line: shapely.Geometry, places: np.ndarray, spherical: bool) -> tuple[np.ndarray, np.ndarray]:
        """Return amplitude (nc, k), m, and lag (nc, k), degrees, at places (k, 2) beside a line. Not collective.

        line   shapely LineString or MultiLineString in input coordinates
        """
        stretch = np.array([np.cos(DEGREE * self.points[:, 1].mean()) if spherical else 1.0, 1.0])
        flat = shapely.transform(
            shapely.line_merge(line) if line.geom_type == "MultiLineString" else line, lambda at: at * stretch
        )
        here = shapely.line_locate_point(flat, shapely.points(places * stretch))
        there = shapely.line_locate_point(flat, shapely.points(self.points * stretch))
        order = np.argsort(there)
        found = np.array([np.interp(here, there[order], row[order]) for row in self.constants])
        return np.abs(found), np.mod(-np.angle(found) / DEGREE, 360.0)


def read_constants(path: str | Path, axes: tuple[str, str]) -> BoundaryConstants:
    """Read a table of harmonic constants. Not collective.

    axes   names of the two position columns: ("lon", "lat") or ("x", "y")
    Raises InputError naming file and line: missing, no header, wrong column, no number, out of range, unknown constituent, a
    point without one of the constituents.
    """
    path = Path(path)
    table: dict[tuple[float, float], dict[str, complex]] = {}
    try:
        with path.open(newline="", encoding="utf-8-sig") as file:
            reader = csv.DictReader(file)
            _check_header(path, reader.fieldnames, axes)
            for row in reader:
                place, name, constant = _entry(f"{path}:{reader.line_num}", row, axes)
                if name in table.setdefault(place, {}):
                    raise InputError(f"{path}:{reader.line_num}: {name} is given twice for the point {place}; keep one")
                table[place][name] = constant
    except (OSError, UnicodeDecodeError) as trouble:
        raise InputError(f"{path}: cannot be read ({trouble}); give harmonic constants as CSV text") from None
    return _gathered(path, table)


def _check_header(path: Path, found: list[str] | None, axes: tuple[str, str]) -> None:
    wanted = (*axes, *COLUMNS)
    missing = [name for name in wanted if name not in (found or ())]
    if missing:
        raise InputError(
            f"{path}:1: column {missing[0]} is missing, found {', '.join(found or ['nothing'])}; "
            f"the header must name {','.join(wanted)}"
        )


def _entry(where: str, row: dict, axes: tuple[str, str]) -> tuple[tuple[float, float], str, complex]:
    numbers = []
    for name in (*axes, "amplitude", "lag"):
        try:
            numbers.append(float(row[name]))
        except (TypeError, ValueError):
            raise InputError(f"{where}: {name} is {row[name]!r}; a number is needed") from None
    first, second, amplitude, lag = numbers
    if not np.all(np.isfinite(numbers)) or not 0.0 <= amplitude <= 20.0 or not -360.0 <= lag <= 360.0:
        raise InputError(
            f"{where}: amplitude {amplitude:g} m, lag {lag:g} degrees; allowed are 0 to 20 m and -360 to 360 degrees"
        )
    if axes == ("lon", "lat") and not (-180.0 <= first <= 360.0 and -90.0 <= second <= 90.0):
        raise InputError(
            f"{where}: longitude {first:g}, latitude {second:g}; allowed are -180 to 360 and -90 to 90: are they swapped?"
        )
    try:
        (chosen,) = constituents([row["constituent"]])
    except InputError as unknown:
        raise InputError(f"{where}: {unknown}") from None
    return (first, second), chosen.name, amplitude * np.exp(-1j * DEGREE * lag)


def _gathered(path: Path, table: dict[tuple[float, float], dict[str, complex]]) -> BoundaryConstants:
    if not table:
        raise InputError(f"{path}: holds no constants; give at least one point with one constituent")
    names = tuple(next(iter(table.values())))
    for place, row in table.items():
        for name in {*names} ^ {*row}:
            raise InputError(
                f"{path}: constituent {name} is not given for every point, for example {place}; give the same ones everywhere"
            )
    constants = np.array([[row[name] for row in table.values()] for name in names])
    return BoundaryConstants(names, np.array(list(table)), constants)
