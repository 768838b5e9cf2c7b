"""What stands for what in a CF file of weather: coordinates, time, and the variables of wind and air pressure.

Recognised by their attributes:

    coordinates   as those of a depth grid (swe.mesh.bed), one-dimensional; time: standard_name time, or units <unit> since <date>
    wind          standard_name eastward_wind and northward_wind, or x_wind and y_wind; at 10 m where the file tells the height
    pressure      standard_name air_pressure_at_mean_sea_level

Their dimensions may stand in any order, and others of length 1 among them. On longitude and latitude x_wind and y_wind are taken
as east and north, on a plane eastward_wind and northward_wind as x and y.
Source: CF Metadata Conventions 1.11, chapters 3 to 5, and its table of standard names.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import netCDF4
import numpy as np

from swe.atmosphere.units import PRESSURE, WIND, Kind
from swe.errors import InputError
from swe.mesh.bed import AXES, METRES
from swe.mesh.surface import Surface

STANDARD_NAMES = {
    WIND: (("eastward_wind", "northward_wind"), ("x_wind", "y_wind")),
    PRESSURE: (("air_pressure_at_mean_sea_level",), ("air_pressure_at_sea_level",)),
}
"""Standard names of the components; the last is an alias of older tables."""

HEIGHT = 10.0
"""Height of the wind above ground, m: what the drag laws are made for."""


@dataclass(frozen=True, eq=False)
class Lines:
    """The coordinates of a file: names of the dimensions, values in input coordinates, and the time variable."""

    x_dimension: str
    y_dimension: str
    time_dimension: str
    x: np.ndarray
    y: np.ndarray
    time: netCDF4.Variable


def find_lines(path: Path, dataset: netCDF4.Dataset, surface: Surface) -> Lines:
    """Return the coordinates of a file for a basin on `surface`. Not collective. Raises InputError."""
    found = [_axis(path, dataset, *marks) for marks in AXES[surface.spherical]]
    if None in found:
        wanted = " and ".join(f"{marks[0]} ({marks[3][0]})" for marks in AXES[surface.spherical])
        raise InputError(
            f"{path}: no one-dimensional coordinates {wanted}; found {', '.join(dataset.variables) or 'nothing'}"
            f"{_hint(path, dataset, surface)}"
        )
    time = _time(path, dataset)
    (x_dimension, x), (y_dimension, y) = found
    return Lines(x_dimension, y_dimension, time.dimensions[0], x, y, time)


def _hint(path: Path, dataset: netCDF4.Dataset, surface: Surface) -> str:
    if None not in [_axis(path, dataset, *marks) for marks in AXES[not surface.spherical]]:
        return "; it has those of the other surface: check whether the basin is on a plane or a sphere"
    names = [marks[0] for marks in AXES[True]]
    if any(v.ndim == 2 and _text(v, "standard_name") in names for v in dataset.variables.values()):
        return "; its longitude and latitude are two-dimensional: bring it to a grid of longitudes and latitudes first"
    return ""


def _axis(path: Path, dataset: netCDF4.Dataset, standard_name: str, units: tuple, axis: str, names: tuple):
    """Return (dimension, values in input coordinates) of the coordinate with the marks of `swe.mesh.bed.AXES`, or None."""
    lines = [v for v in dataset.variables.values() if v.ndim == 1 and v.dtype.kind in "iuf"]
    tests = (
        lambda v: _text(v, "standard_name") == standard_name,
        lambda v: _text(v, "units").lower() in units,
        lambda v: _text(v, "axis").upper() == axis and _text(v, "units").lower().startswith("deg") == bool(units),
        lambda v: v.name.lower() in names,
    )
    for variable in (v for test in tests for v in lines if test(v)):
        unit = _text(variable, "units").lower()
        if not units and unit and unit not in METRES:
            raise InputError(f"{path}: unit {unit!r} of {variable.name}; allowed are {', '.join(METRES)}")
        scale = 1.0 if units or not unit else METRES[unit]
        return variable.dimensions[0], scale * np.ma.filled(variable[:].astype(float), np.nan)
    return None


def _time(path: Path, dataset: netCDF4.Dataset) -> netCDF4.Variable:
    lines = [v for v in dataset.variables.values() if v.ndim == 1]
    tests = (lambda v: _text(v, "standard_name") == "time", lambda v: " since " in _text(v, "units") and v.name in v.dimensions)
    for test in tests:
        found = [v for v in lines if test(v)]
        if len(found) == 1:
            return found[0]
        if found:
            raise InputError(
                f"{path}: {', '.join(v.name for v in found)} all look like the time; give one the standard_name time"
            )
    raise InputError(f"{path}: no time coordinate; found {', '.join(dataset.variables)}; add one with units <unit> since <date>")


def find_variables(
    path: Path, dataset: netCDF4.Dataset, lines: Lines, kind: Kind, wanted: tuple[str, ...] | None
) -> list[netCDF4.Variable]:
    """Return the variables of a kind, by `wanted` names or by standard names. Not collective. Raises InputError."""
    grids = [v for v in dataset.variables.values() if _is_grid(v, lines)]
    listed = (
        ", ".join(f"{v.name} ({_text(v, 'standard_name') or 'no standard_name'})" for v in grids) or "nothing on time and grid"
    )
    if wanted is not None:
        found = [v for name in wanted for v in grids if v.name == name]
        if len(found) != len(wanted):
            raise InputError(f"{path}: no variables {', '.join(wanted)} on time and grid; found {listed}")
        return found
    for standard_names in STANDARD_NAMES[kind]:
        found = [[v for v in grids if _text(v, "standard_name") == name and _at_height(v, kind)] for name in standard_names]
        if any(len(several) > 1 for several in found):
            same = ", ".join(v.name for several in found for v in several)
            raise InputError(f"{path}: {same} all look like {kind.name}; name the variables to use")
        if all(found):
            return [several[0] for several in found]
    expected = " or ".join(" and ".join(group) for group in STANDARD_NAMES[kind])
    at_height = f" at {HEIGHT:g} m" if kind is WIND else ""
    raise InputError(
        f"{path}: no {kind.name}{at_height} by its standard_name ({expected}); found {listed}; name the variables to use"
    )


def _is_grid(variable: netCDF4.Variable, lines: Lines) -> bool:
    sizes = dict(zip(variable.dimensions, variable.shape, strict=True))
    there = [sizes.pop(name, None) for name in (lines.time_dimension, lines.y_dimension, lines.x_dimension)]
    return None not in there and all(size == 1 for size in sizes.values()) and variable.dtype.kind in "iuf"


def _at_height(variable: netCDF4.Variable, kind: Kind) -> bool:
    """Return whether a variable is wind at 10 m or does not tell its height, or is no wind."""
    if kind is not WIND:
        return True
    known = variable.group().variables
    beside = [known[name] for name in (*_text(variable, "coordinates").split(), *variable.dimensions) if name in known]
    heights = [float(np.ravel(v[:])[0]) for v in beside if v.size == 1 and _text(v, "standard_name") == "height"]
    return all(abs(height - HEIGHT) < 0.01 * HEIGHT for height in heights)


def _text(variable: netCDF4.Variable, attribute: str) -> str:
    return str(getattr(variable, attribute, "")).strip()
