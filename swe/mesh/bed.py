"""The bed from a depth grid: a netCDF file after the CF conventions, read around the basin only.

Recognised by their attributes (names only where these are silent):

    coordinates   standard_name, else units (degrees_east, degrees_north), else axis, else name; one-dimensional, in any
                  order; longitudes by either convention (0 to 360 or -180 to 180)
    variable      standard_name of a sea floor depth or of an altitude, else attribute `positive`, else name
    direction     attribute `positive` (down: depth; up: elevation), else standard_name, else name
    unit          m, km, dm, cm, ft; m where there is none

Land (depth not above 0) and missing values near the coast take the depth of the nearest wet grid point.
Source: CF Metadata Conventions 1.11, chapters 3 to 5.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import netCDF4
import numpy as np
import shapely

from swe.errors import InputError
from swe.mesh.coast import Box, box_of, box_text
from swe.mesh.depth import GridBed, filled_from_wet
from swe.mesh.surface import Surface, near_longitude

METRES = {"m": 1.0, "km": 1000.0, "dm": 0.1, "cm": 0.01, "ft": 0.3048}
METRES |= {
    "metre": 1.0,
    "metres": 1.0,
    "meter": 1.0,
    "meters": 1.0,
    "kilometre": 1000.0,
    "kilometer": 1000.0,
    "foot": 0.3048,
    "feet": 0.3048,
}

EAST = ("degrees_east", "degree_east", "degree_e", "degrees_e", "degreee", "degreese")
NORTH = ("degrees_north", "degree_north", "degree_n", "degrees_n", "degreen", "degreesn")
AXES = {
    True: (("longitude", EAST, "X", ("lon", "longitude")), ("latitude", NORTH, "Y", ("lat", "latitude"))),
    False: (("projection_x_coordinate", (), "X", ("x",)), ("projection_y_coordinate", (), "Y", ("y",))),
}
"""For a sphere or a plane, of the first and the second coordinate: standard_name, units, axis, names."""

DOWN_NAMES = ("depth", "bathymetry", "water_depth")
UP_NAMES = ("elevation", "altitude", "topography", "height")
MARGIN = 0.1
"""The grid is read this part of the basin's size beyond its box, so that the nearest wet point is found across the coast."""


@dataclass(frozen=True)
class Axis:
    """One coordinate of a file: variable, dimension, values in input coordinates."""

    name: str
    dimension: str
    values: np.ndarray


def read_grid(path: str | Path, surface: Surface, water: shapely.Geometry, variable: str | None = None) -> GridBed:
    """Read the depth grid round the water of a basin, given in input coordinates. Not collective.

    variable   name of the variable, where its attributes do not tell it
    Raises InputError, one line, naming the file: missing, not netCDF or cut short, no coordinates, no variable that looks
    like depth, direction or unit unknown, basin not covered, no water.
    """
    path = Path(path)
    if not path.is_file():
        raise InputError(f"{path}: no such file; give a netCDF file with a depth grid")
    try:
        with netCDF4.Dataset(path) as dataset:
            axes = axes_of(path, dataset, surface)
            name = _depth_variable(path, dataset, axes, variable)
            return _read_window(path, dataset, surface, axes, name, box_of(water, surface))
    except (OSError, RuntimeError) as failure:
        reason = getattr(failure, "strerror", None) or str(failure)
        raise InputError(f"{path}: not a netCDF file, or cut short ({reason}); fetch it again") from None


def axes_of(path: str | Path, dataset: netCDF4.Dataset, surface: Surface) -> tuple[Axis, Axis]:
    """Return the two coordinates of a grid file for a basin on `surface`. Not collective.

    path   names the file in messages. Raises InputError when there are none.
    """
    found = [_axis(path, dataset, *marks) for marks in AXES[surface.spherical]]
    if None not in found:
        return found[0], found[1]
    other = all(_axis(path, dataset, *marks) is not None for marks in AXES[not surface.spherical])
    wanted = " and ".join(f"{marks[0]} ({marks[3][0]})" for marks in AXES[surface.spherical])
    listed = ", ".join(dataset.variables) or "nothing"
    hint = "; it has those of the other surface: check whether the basin is on a plane or a sphere" if other else ""
    hint = hint or "; name them so, or give them the attribute standard_name"
    raise InputError(f"{path}: no one-dimensional coordinates {wanted}; found {listed}{hint}")


def _axis(path: str | Path, dataset: netCDF4.Dataset, standard_name: str, units: tuple, axis: str, names: tuple) -> Axis | None:
    lines = [v for v in dataset.variables.values() if v.ndim == 1 and v.dtype.kind in "iuf" and v.shape[0] > 1]
    tests = (
        lambda v: _text(v, "standard_name") == standard_name,
        lambda v: _text(v, "units").lower() in units,
        lambda v: _text(v, "axis").upper() == axis and _text(v, "units").lower().startswith("deg") == bool(units),
        lambda v: v.name.lower() in names,
    )
    for test in tests:
        for variable in filter(test, lines):
            values = np.ma.filled(variable[:].astype(float), np.nan)
            if not units:
                values = values * _metres(path, variable)
            return Axis(variable.name, variable.dimensions[0], values)
    return None


def _text(variable: netCDF4.Variable, attribute: str) -> str:
    return str(getattr(variable, attribute, "")).strip()


def _metres(path: str | Path, variable: netCDF4.Variable) -> float:
    unit = _text(variable, "units")
    if unit and unit.lower() not in METRES:
        raise InputError(f"{path}: unit {unit!r} of {variable.name}; allowed are {', '.join(METRES)}")
    return METRES[unit.lower()] if unit else 1.0


def _depth_variable(path: Path, dataset: netCDF4.Dataset, axes: tuple[Axis, Axis], wanted: str | None) -> str:
    grids = [v for v in dataset.variables.values() if _is_grid(v, axes)]
    listed = ", ".join(v.name for v in grids) or "no variable on both coordinates"
    if wanted is not None:
        if wanted not in [v.name for v in grids]:
            raise InputError(f"{path}: no variable {wanted!r} on {axes[0].name} and {axes[1].name}; found {listed}")
        return wanted
    for sign in (_sign_by_standard_name, _sign_by_attribute, _sign_by_name):
        found = [v.name for v in grids if sign(v)]
        if len(found) > 1:
            raise InputError(f"{path}: {', '.join(found)} all look like depth; name the variable to use")
        if found:
            return found[0]
    raise InputError(f"{path}: no variable looks like depth; found {listed}; name the variable, or add standard_name or positive")


def _is_grid(variable: netCDF4.Variable, axes: tuple[Axis, Axis]) -> bool:
    sizes = dict(zip(variable.dimensions, variable.shape, strict=True))
    lines = [sizes.pop(axis.dimension, None) for axis in axes]
    return None not in lines and all(size == 1 for size in sizes.values()) and variable.dtype.kind in "iuf"


def _sign_by_standard_name(variable: netCDF4.Variable) -> int:
    name = _text(variable, "standard_name")
    if name.startswith("sea_floor_depth"):
        return 1
    altitudes = (
        "altitude",
        "surface_altitude",
        "bedrock_altitude",
        "ground_level_altitude",
        "height_above_mean_sea_level",
        "height",
    )
    return -1 if name in altitudes else 0


def _sign_by_attribute(variable: netCDF4.Variable) -> int:
    return {"down": 1, "up": -1}.get(_text(variable, "positive").lower(), 0)


def _sign_by_name(variable: netCDF4.Variable) -> int:
    name = variable.name.lower()
    return 1 if name in DOWN_NAMES else -1 if name in UP_NAMES else 0


def _direction(path: Path, variable: netCDF4.Variable) -> int:
    """Return 1 where the variable is positive down, -1 where it is positive up."""
    sign = _sign_by_attribute(variable) or _sign_by_standard_name(variable) or _sign_by_name(variable)
    if not sign:
        raise InputError(
            f"{path}: {variable.name} does not tell up from down; add the attribute positive = down (depth) or up (elevation)"
        )
    return sign


def _read_window(path: Path, dataset: netCDF4.Dataset, surface: Surface, axes: tuple[Axis, Axis], name: str, box: Box) -> GridBed:
    variable = dataset.variables[name]
    scale = _direction(path, variable) * _metres(path, variable)
    west, south, east, north = box
    centre = (west + east) / 2 if surface.spherical else None
    columns, x = _ascending(path, axes[0], centre)
    rows, y = _ascending(path, axes[1], None)
    _refuse_uncovered(path, surface, axes, x, y, box)
    columns, x = _window(path, axes[0].name, columns, x, west, east)
    rows, y = _window(path, axes[1].name, rows, y, south, north)
    values = _block(variable, axes, rows, columns)
    _refuse_undeclared_fill(path, name, values)
    depth = scale * values
    wet = np.isfinite(depth) & (depth > 0)
    if not wet.any():
        highest = f"greatest depth {np.nanmax(depth):.4g} m" if np.isfinite(depth).any() else "all values are missing"
        raise InputError(
            f"{path}: {name} has no water in the basin ({highest}); check its direction: attribute positive = down or up"
        )
    aspect = float(np.cos(np.radians((south + north) / 2))) if surface.spherical else 1.0
    return GridBed(f"{path.name} ({name})", x, y, filled_from_wet(x, y, np.where(wet, depth, 0.0), wet, aspect), ~wet, centre)


FILLS = (9999.0, 99999.0, 32767.0, 32768.0, 999.25, 1e20)
"""Magnitudes that common practice uses for "no value" (no source). A depth or height of exactly one of them is none."""


def _refuse_undeclared_fill(path: Path, name: str, values: np.ndarray) -> None:
    """Raise InputError where a usual mark for "no value" stands as a number: it would become a deep hole or a peak."""
    for fill in FILLS:
        count = int(np.count_nonzero(np.abs(values) == fill))
        if count:
            raise InputError(
                f"{path}: {name} is exactly {fill:g} or -{fill:g} at {count} grid points, an undeclared mark for "
                "no value by its looks; declare it with the attribute _FillValue or missing_value"
            )


def _ascending(path: Path, axis: Axis, centre: float | None) -> tuple[np.ndarray, np.ndarray]:
    """Return file indices and values of an axis in ascending order, longitudes brought near `centre`."""
    step = np.diff(axis.values)
    if not (np.isfinite(axis.values).all() and ((step > 0).all() or (step < 0).all())):
        raise InputError(f"{path}: the coordinate {axis.name} is neither rising nor falling throughout; give a rectilinear grid")
    values = axis.values if centre is None else near_longitude(axis.values, centre)
    values, index = np.unique(values, return_index=True)  # a full turn may hold its seam twice
    return index, values


def _refuse_uncovered(path: Path, surface: Surface, axes: tuple[Axis, Axis], x: np.ndarray, y: np.ndarray, box: Box) -> None:
    """Refuse a grid that ends more than half a step inside the basin."""
    missing = _missing_sides(x, y, box)
    if not missing:
        return
    extent = (x[0], y[0], x[-1], y[-1])
    boxes = f"grid {box_text(extent, surface)}; basin {box_text(box, surface)}"
    turned = (box[1], box[0], box[3], box[2])
    if not _missing_sides(np.sort(axes[0].values), y, turned):
        raise InputError(
            f"{path}: does not cover the basin, but would after swapping: {' and '.join(surface.axes)} look swapped ({boxes})"
        )
    raise InputError(f"{path}: does not cover the basin in the {' and '.join(missing)}: {boxes}; give a larger grid")


def _missing_sides(x: np.ndarray, y: np.ndarray, box: Box) -> list[str]:
    """Return the sides on which a box ends more than half a step, and a little for rounding, beyond ascending axes."""
    missing = []
    for axis, low, high, sides in ((x, box[0], box[2], ("west", "east")), (y, box[1], box[3], ("south", "north"))):
        missing += [sides[0]] if low < axis[0] - 0.51 * (axis[1] - axis[0]) else []
        missing += [sides[1]] if high > axis[-1] + 0.51 * (axis[-1] - axis[-2]) else []
    return [side for side in ("west", "south", "east", "north") if side in missing]


def _window(
    path: Path, name: str, index: np.ndarray, values: np.ndarray, low: float, high: float
) -> tuple[np.ndarray, np.ndarray]:
    """Return the part of an axis that holds the basin and a margin."""
    margin = MARGIN * (high - low)
    first = max(np.searchsorted(values, low - margin) - 2, 0)
    last = min(np.searchsorted(values, high + margin) + 2, len(values))
    index, values = index[first:last], values[first:last]
    step = np.diff(values)
    widest = step.argmax()
    if step[widest] > 10 * np.median(step):
        raise InputError(
            f"{path}: {name} leaves a gap from {values[widest]:.6g} to {values[widest + 1]:.6g} in the basin; give a full grid"
        )
    return index, values


def _block(variable: netCDF4.Variable, axes: tuple[Axis, Axis], rows: np.ndarray, columns: np.ndarray) -> np.ndarray:
    """Return the values (rows, columns) as floats, NaN where missing; only the stretches needed are read."""
    x, y = axes
    parts = []
    for run in np.split(columns, np.flatnonzero(np.abs(np.diff(columns)) != 1) + 1):
        where = {
            x.dimension: slice(run.min(), run.max() + 1),
            y.dimension: slice(rows.min(), rows.max() + 1),
        }
        values = variable[tuple(where.get(dimension, 0) for dimension in variable.dimensions)]
        block = np.ma.filled(np.ma.asarray(values, dtype=float), np.nan)
        kept = [dimension for dimension in variable.dimensions if dimension in where]
        block = block if kept == [y.dimension, x.dimension] else block.T
        parts.append(block[:, run - run.min()])
    return np.hstack(parts)[rows - rows.min()]
