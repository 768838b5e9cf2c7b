"""The water of a start file: the fields of an earlier run on the same mesh, or a level on a grid, at rest.

    earlier run   level (time, face) and normal_velocity (time, edge) of a mesh with the same checksum
    grid          a level above the datum of the case, known by its standard_name, in m, cm or mm, on one-dimensional
                  coordinates as those of a depth grid (swe.mesh.bed), with times or without; bilinear at the face
                  centres; where the grid has no value, on land, the nearest one holds; the current is zero

Of several times the last is taken.
Source: CF Metadata Conventions 1.11, chapters 3 to 5, and its table of standard names.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass

import netCDF4
import numpy as np
import shapely

from swe.atmosphere.grid import Window, window
from swe.atmosphere.places import face_points
from swe.errors import InputError
from swe.mesh.bed import Axis, axes_of
from swe.mesh.coast import Box, box_of
from swe.mesh.depth import filled_from_wet
from swe.mesh.surface import Plane, Sphere, Surface
from swe.mesh.topology import Mesh
from swe.output.catalogue import DATUMS

METRES = {"m": 1.0, "metre": 1.0, "metres": 1.0, "meter": 1.0, "meters": 1.0, "cm": 0.01, "mm": 0.001}
RUN = ("level", "normal_velocity")


@dataclass(frozen=True, eq=False)
class GridLevel:
    """A level, m, on the part of a grid that holds the basin: values (rows, columns), finite."""

    grid: Window
    values: np.ndarray

    def at(self, points: np.ndarray) -> np.ndarray:
        """Return the level (n,) at points (n, 2) in input coordinates. Not collective."""
        return self.grid.weights(points) @ self.values.ravel()


def start_of(case, mesh: Mesh) -> tuple[np.ndarray, np.ndarray]:
    """Return level (nf,) and normal velocity (ne,) of the case's start file. Not collective.

    Raises InputError, one line, naming the file: not netCDF, neither fields of a run on this mesh nor a level on a grid.
    """
    with _opened(case) as data:
        if _of_a_run(data):
            return _last_record(case, data, mesh)
        surface, centres = Sphere(mesh.radius) if mesh.spherical else Plane(), face_points(mesh)
        level = _level(case, data, surface, box_of(shapely.MultiPoint(centres), surface))
        return level.at(centres), np.zeros(mesh.n_edges)


def level_before_mesh(case, surface: Surface, box: Box) -> GridLevel | None:
    """Check the case's start file before there is a mesh; return its level where it is a grid. Not collective.

    box   of the water. Raises InputError as `start_of`, but for what only the mesh can tell.
    """
    with _opened(case) as data:
        if _of_a_run(data):
            _records(case, data)
            return None
        return _level(case, data, surface, box)


@contextmanager
def _opened(case) -> Iterator[netCDF4.Dataset]:
    try:
        with netCDF4.Dataset(case.start.file) as data:
            yield data
    except (OSError, RuntimeError) as failure:
        reason = getattr(failure, "strerror", None) or str(failure)
        raise InputError(f"{_name(case)}: not a netCDF file, or cut short ({reason}); give a sound one") from None


def _name(case) -> str:
    return f"{case.where('start', 'file')} = {case.start.file.name}"


def _of_a_run(data: netCDF4.Dataset) -> bool:
    return "mesh_checksum" in data.ncattrs()


# ------------------------------------------------------------------------------------------ fields of an earlier run


def _records(case, data: netCDF4.Dataset) -> None:
    missing = [name for name in RUN if name not in data.variables]
    if missing:
        raise InputError(
            f"{_name(case)}: no variable {missing[0]}; needed are {' and '.join(RUN)}: let that run write them ([output] fields)"
        )
    if data["level"].shape[0] == 0:
        raise InputError(f"{_name(case)}: no record yet; let that run write at least one")


def _last_record(case, data: netCDF4.Dataset, mesh: Mesh) -> tuple[np.ndarray, np.ndarray]:
    _records(case, data)
    if data.mesh_checksum != mesh.checksum():
        raise InputError(
            f"{_name(case)}: fields of another mesh ({data['level'].shape[-1]} faces, this one has {mesh.n_faces}); "
            "use the mesh of that run with [mesh] file"
        )
    data.set_auto_mask(False)
    return tuple(np.asarray(data[name][-1], dtype=float) for name in RUN)


# ------------------------------------------------------------------------------------------ level on a grid


def _level(case, data: netCDF4.Dataset, surface: Surface, box: Box) -> GridLevel:
    axes = axes_of(_name(case), data, surface)
    variable = _variable(case, data, axes)
    grid = window(_name(case), axes[0].values, axes[1].values, surface, box)
    values = _factor(case, variable) * _last_time(variable, axes)[np.ix_(grid.rows.index, grid.columns.index)]
    there = np.isfinite(values)
    if not there.any():
        raise InputError(f"{_name(case)}: {variable.name} has no value in the basin at its last time; give a level that has")
    x, y = grid.columns.values, grid.rows.values
    aspect = float(np.cos(np.radians((y[0] + y[-1]) / 2))) if surface.spherical else 1.0
    return GridLevel(grid, filled_from_wet(x, y, np.where(there, values, 0.0), there, aspect))


def _variable(case, data: netCDF4.Dataset, axes: tuple[Axis, Axis]) -> netCDF4.Variable:
    wanted, others = DATUMS[case.depth.datum].level, {datum.level: datum.words for datum in DATUMS.values()}
    grids = {v.name: str(getattr(v, "standard_name", "")) for v in data.variables.values() if _is_grid(v, axes)}
    found = [name for name, standard_name in grids.items() if standard_name == wanted]
    if len(found) == 1:
        return data[found[0]]
    if found:
        raise InputError(f"{_name(case)}: {', '.join(found)} all have the standard_name {wanted}; leave one in the file")
    for name, standard_name in grids.items():
        if standard_name in others:
            raise InputError(
                f"{_name(case)}: {name} is a level above {others[standard_name]}, but the case has [depth] datum = "
                f'"{case.depth.datum}"; give a level above the same datum'
            )
    listed = ", ".join(f"{name} ({words or 'no standard_name'})" for name, words in grids.items())
    listed = listed or "nothing on both coordinates"
    raise InputError(
        f"{_name(case)}: no variable with the standard_name {wanted}, found {listed}; give a grid of levels, or fields.nc of an "
        "earlier run on the same mesh"
    )


def _is_grid(variable: netCDF4.Variable, axes: tuple[Axis, Axis]) -> bool:
    """Return whether a variable has both coordinates and, besides dimensions of length 1, at most a time."""
    sizes = dict(zip(variable.dimensions, variable.shape, strict=True))
    there = [sizes.pop(axis.dimension, None) for axis in axes]
    long = [name for name, size in sizes.items() if size != 1]
    return None not in there and variable.dtype.kind in "iuf" and (not long or long == [_time(variable)])


def _time(variable: netCDF4.Variable) -> str | None:
    """Return the name of the time dimension of a variable, or None."""
    known = variable.group().variables
    for name in variable.dimensions:
        if name in known and " since " in str(getattr(known[name], "units", "")):
            return name
    return None


def _last_time(variable: netCDF4.Variable, axes: tuple[Axis, Axis]) -> np.ndarray:
    """Return the values (y, x) at the last time, NaN where missing."""
    columns, rows = (axis.dimension for axis in axes)
    if 0 in variable.shape:
        return np.full((axes[1].values.size, axes[0].values.size), np.nan)
    values = variable[tuple(slice(None) if name in (columns, rows) else -1 for name in variable.dimensions)]
    values = np.ma.filled(np.ma.asarray(values, dtype=float), np.nan)
    return values if variable.dimensions.index(rows) < variable.dimensions.index(columns) else values.T


def _factor(case, variable: netCDF4.Variable) -> float:
    unit = str(getattr(variable, "units", "")).strip()
    if unit not in METRES:
        raise InputError(f"{_name(case)}: unit {unit!r} of {variable.name}; allowed are m, cm, mm; write it into units")
    return METRES[unit]
