"""fields.nc: levels and currents of the whole mesh, record by record, after CF-1.11 and UGRID-1.0.

    level (time, face)                               above the datum, m
    east_velocity, north_velocity (time, face)       reconstructed at face centres, m s-1; x_velocity, y_velocity on a plane
    normal_velocity (time, edge)                     what the method carries, m s-1
    depth (face)                                     resting depth, m
    outer (face)                                     1 beyond an open boundary, where there is one
    highest_level, lowest_level, strongest_current (face), each with its time: extremes over all steps of `window`

The file does not depend on the number of ranks: it is written by one rank in the order of the mesh.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

import netCDF4
import numpy as np

from swe.errors import InputError
from swe.mesh.files import Places, define_mesh
from swe.mesh.topology import Mesh
from swe.output.catalogue import Quantity, mesh_quantities, velocity_names
from swe.output.durable import file_trouble
from swe.output.records import Records, create, open_again, time_attributes

CHOICES = ("level", "velocity", "normal_velocity", "extremes")
"""What a fields file may hold; "velocity" is both components at faces."""

EXTREMES = ("highest_level", "lowest_level", "strongest_current")

CHUNK = 131_072
"""Most values in one chunk, 1 MB: one record is read without touching another; arbitrary."""

PRECISION = {"double": "f8", "single": "f4"}


@dataclass(frozen=True)
class Extremes:
    """Extremes since the start of the run, each (nf,).

    highest, lowest (m), strongest (m s-1), and the times (s since the start) at which they occurred
    window   first and last time looked at, s since the start
    """

    highest: np.ndarray
    highest_time: np.ndarray
    lowest: np.ndarray
    lowest_time: np.ndarray
    strongest: np.ndarray
    strongest_time: np.ndarray
    window: tuple[float, float]


class FieldsFile:
    """An open fields file; use it as a context manager. Not collective: one rank writes."""

    def __init__(self, records: Records):
        self._records = records
        self._dataset = records.dataset
        self._series = [name for name, v in self._dataset.variables.items() if v.ndim == 2 and v.dimensions[0] == "time"]

    @classmethod
    def create(
        cls, path: str | Path, mesh: Mesh, names: Sequence[str], start: datetime, attributes: dict[str, str],
        datum: str, precision: str,
    ) -> FieldsFile:  # fmt: skip
        """Make a fields file; an old one is replaced. Not collective.

        mesh         the whole mesh
        names        of CHOICES
        attributes   global attributes, from `records.file_attributes`
        datum        of catalogue.DATUMS
        precision    "double" or "single" for the series; extremes and depth are always double
        Raises FileError, InputError for an unknown name or datum.
        """
        quantities = mesh_quantities(mesh.spherical, datum)
        series = series_named(names, mesh.spherical)
        dataset = create(path, attributes, start)
        with file_trouble(path, "making the file"):
            places = define_mesh(dataset, mesh)
            _define(dataset, quantities["depth"], places, "f8")[:] = mesh.depth
            if mesh.face_outer.any():
                _define_outer(dataset, mesh, places)
            for name in series:
                _define(dataset, quantities[name], places, PRECISION[precision])
            if "extremes" in names:
                _define_extremes(dataset, quantities, places, start)
            dataset.sync()
        return cls(Records(Path(path), dataset))

    @classmethod
    def open_for_append(cls, path: str | Path, keep_until: float) -> FieldsFile:
        """Open a fields file without its records later than `keep_until`, s since the start. Not collective.

        Raises FileError when it is missing or damaged.
        """
        return cls(open_again(path, keep_until))

    @property
    def count(self) -> int:
        """Return the number of records in the file."""
        return self._records.count

    @property
    def dropped(self) -> int:
        """Return how many records were cut off when the file was opened again."""
        return self._records.dropped

    def append(self, time: float, eta: np.ndarray, u: np.ndarray, first: np.ndarray, second: np.ndarray) -> None:
        """Write one record durably; what was not chosen at creation is not written. Not collective.

        time            s since the start, later than the last record
        eta             (nf,) level, m
        u               (ne,) velocity along the edge normal, m s-1
        first, second   (nf,) components of the current at faces: east and north, or x and y on a plane, m s-1
        Raises FileError.
        """
        given = {"level": eta, "normal_velocity": u}
        given |= {"east_velocity": first, "x_velocity": first, "north_velocity": second, "y_velocity": second}
        self._check({name: given[name] for name in self._series})
        with self._records.adding(np.array([time])) as place:
            for name in self._series:
                self._dataset[name][place.start] = given[name]

    def write_extremes(self, extremes: Extremes) -> None:
        """Write the extremes so far over those written before; a file without extremes stays as it is. Not collective.

        Raises FileError.
        """
        if "window" not in self._dataset.variables:
            return
        columns = {
            "highest_level": extremes.highest, "highest_level_time": extremes.highest_time,
            "lowest_level": extremes.lowest, "lowest_level_time": extremes.lowest_time,
            "strongest_current": extremes.strongest, "strongest_current_time": extremes.strongest_time,
        }  # fmt: skip
        self._check(columns)
        with file_trouble(self._records.path, "writing the extremes"):
            for name, column in columns.items():
                self._dataset[name][:] = column
            self._dataset["window"].assignValue(extremes.window[1])
            self._dataset["window_bounds"][:] = extremes.window
            self._dataset.sync()

    def _check(self, given: dict[str, np.ndarray]) -> None:
        for name, column in given.items():
            wanted = self._dataset[name].shape[-1:]
            if np.shape(column) != wanted:
                raise ValueError(f"{name} has shape {np.shape(column)}, the mesh of {self._records.path} wants {wanted}")

    def close(self) -> None:
        """Close the file. Not collective. Raises FileError."""
        self._records.close()

    def __enter__(self) -> FieldsFile:
        return self

    def __exit__(self, kind, failure, trace) -> None:
        self._records.close_after(failure)


def series_named(names: Sequence[str], spherical: bool) -> list[str]:
    """Return the variables of each record for the chosen names. Not collective. Raises InputError for an unknown one."""
    unknown = [name for name in names if name not in CHOICES]
    if unknown:
        raise InputError(f"fields to write: {unknown[0]!r} is not known; allowed are {', '.join(CHOICES)}")
    members = {"level": ("level",), "velocity": velocity_names(spherical), "normal_velocity": ("normal_velocity",)}
    return [variable for name, variables in members.items() if name in names for variable in variables]


def _define(dataset: netCDF4.Dataset, quantity: Quantity, places: Places, kind: str) -> netCDF4.Variable:
    moving = "time: point" in (quantity.cell_methods or "")
    dimensions = ("time", quantity.place) if moving else (quantity.place,)
    size = dataset.dimensions[quantity.place].size
    even = -(-size // -(-size // CHUNK))  # chunks of equal size, so that the last one is not padding
    variable = dataset.createVariable(quantity.name, kind, dimensions, chunksizes=(1, even) if moving else None)
    variable.setncatts(quantity.attributes() | places.attributes(quantity.place))
    if "area:" in (quantity.cell_methods or ""):
        variable.cell_measures = "area: face_area"
    return variable


def _define_outer(dataset: netCDF4.Dataset, mesh: Mesh, places: Places) -> None:
    """Mark the faces beyond an open boundary, which are not water of the basin."""
    variable = dataset.createVariable("outer", "i1", ("face",))
    flags = {"flag_values": np.array([0, 1], "i1"), "flag_meanings": "water_of_the_basin beyond_an_open_boundary"}
    variable.setncatts({"long_name": "face beyond an open boundary: its level is given"} | flags | places.attributes("face"))
    variable[:] = mesh.face_outer


def _define_extremes(dataset: netCDF4.Dataset, quantities: dict[str, Quantity], places: Places, start: datetime) -> None:
    """Define the extremes, tied to the window of time that they cover."""
    window = dataset.createVariable("window", "f8")
    words = {"standard_name": "time", "long_name": "end of the time covered by the extremes", "bounds": "window_bounds"}
    window.setncatts(words | time_attributes(start))
    window.assignValue(0.0)
    dataset.createVariable("window_bounds", "f8", ("two",))[:] = 0.0
    for name in EXTREMES:
        value = _define(dataset, quantities[name], places, "f8")
        when = _define(dataset, quantities[f"{name}_time"], places, "f8")
        when.setncatts(time_attributes(start))  # a date to the reader, seconds to us
        for variable in (value, when):
            variable.coordinates = f"window {variable.coordinates}"
