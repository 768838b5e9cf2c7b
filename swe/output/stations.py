"""stations.nc: series of level and current at named points, a discrete sampling geometry of CF-1.11.

    station_name (station)                            the identifier of each series
    lon, lat or x, y (station)                        where the station was asked for
    face_lon, face_lat or face_x, face_y (station)    centre of the sampled face
    distance (station)                                from one to the other along the surface, m
    depth (station)                                   resting depth of the sampled face, m
    level, velocity components (station, time)

A station is sampled at the face whose centre is nearest; by the property of Voronoi cells that is the face in which it
lies, or, for a station on land, the wet face nearest to it.

Source: CF-1.11, chapter 9 and appendix H.2.1, orthogonal multidimensional array representation of time series.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

import netCDF4
import numpy as np
from scipy.spatial import cKDTree

from swe.constants import DEGREE
from swe.errors import InputError
from swe.mesh.topology import Mesh
from swe.output.catalogue import station_quantities, velocity_names
from swe.output.durable import file_trouble
from swe.output.records import TIME_CHUNK, Records, create, open_again


@dataclass(frozen=True)
class Station:
    """A named point. first, second: longitude and latitude in degrees, or x and y in m on a plane."""

    name: str
    first: float
    second: float


@dataclass(frozen=True)
class Sampling:
    """Where stations are sampled: face (ns,) whole-mesh index, distance (ns,) m from station to face centre."""

    stations: tuple[Station, ...]
    face: np.ndarray
    distance: np.ndarray


def sample(mesh: Mesh, stations: Sequence[Station], furthest: float) -> Sampling:
    """Find the face at which each station is sampled. Not collective.

    mesh       the whole mesh
    furthest   largest distance allowed between station and face centre, m
    Raises InputError when two stations share a name or one lies further from the water.
    """
    _refuse_twins(stations)
    if not stations:
        return Sampling((), np.zeros(0, dtype=np.int64), np.zeros(0))
    chord, face = cKDTree(mesh.face_xyz).query(_positions(mesh, stations))
    distance = 2 * mesh.radius * np.arcsin(np.minimum(1, chord / (2 * mesh.radius))) if mesh.spherical else chord
    worst = int(np.argmax(distance))
    if distance[worst] > furthest:
        station = stations[worst]
        raise InputError(
            f"station {station.name!r} at ({station.first:g}, {station.second:g}): {distance[worst]:.4g} m from the nearest "
            f"water; allowed is {furthest:.4g} m: correct its coordinates (longitude before latitude) or leave it out"
        )
    return Sampling(tuple(stations), face.astype(np.int64), distance)


def _refuse_twins(stations: Sequence[Station]) -> None:
    names = [station.name for station in stations]
    twins = sorted({name for name in names if names.count(name) > 1})
    if twins:
        raise InputError(f"stations: the name {twins[0]!r} is given {names.count(twins[0])} times; names must differ: rename one")


def _positions(mesh: Mesh, stations: Sequence[Station]) -> np.ndarray:
    first, second = np.array([(s.first, s.second) for s in stations], dtype=float).T
    if not mesh.spherical:
        return np.stack((first, second, np.zeros(first.size)), axis=1)
    lon, lat = first * DEGREE, second * DEGREE
    return mesh.radius * np.stack((np.cos(lat) * np.cos(lon), np.cos(lat) * np.sin(lon), np.sin(lat)), axis=1)


def _face_coordinates(mesh: Mesh, face: np.ndarray) -> np.ndarray:
    """Return longitude and latitude (degrees) or x and y (m) of face centres, (2, n)."""
    x, y, z = mesh.face_xyz[face].T
    return np.stack((np.arctan2(y, x), np.arctan2(z, np.hypot(x, y)))) / DEGREE if mesh.spherical else np.stack((x, y))


class StationsFile:
    """An open stations file; use it as a context manager. Not collective: one rank writes."""

    def __init__(self, records: Records):
        self._records = records
        self._dataset = records.dataset
        self._series = [name for name, v in self._dataset.variables.items() if v.dimensions == ("station", "time")]

    @classmethod
    def create(
        cls, path: str | Path, mesh: Mesh, sampling: Sampling, start: datetime, attributes: dict[str, str], datum: str
    ) -> StationsFile:  # fmt: skip
        """Make a stations file; an old one is replaced. Not collective.

        sampling     of at least one station
        attributes   global attributes, from `records.file_attributes`
        datum        of catalogue.DATUMS
        Raises FileError, InputError for an unknown datum.
        """
        if not sampling.stations:
            raise ValueError("a stations file wants at least one station")
        quantities = station_quantities(mesh.spherical, datum)
        dataset = create(path, attributes | {"featureType": "timeSeries"}, start)
        with file_trouble(path, "making the file"):
            dataset.createDimension("station", len(sampling.stations))
            coordinates = _define_places(dataset, mesh, sampling)
            depth = dataset.createVariable("depth", "f8", ("station",))
            depth.setncatts(quantities["depth"].attributes() | {"coordinates": coordinates})
            depth[:] = mesh.depth[sampling.face]
            chunks = (max(1, len(sampling.stations)), TIME_CHUNK)
            for name in ("level", *velocity_names(mesh.spherical)):
                variable = dataset.createVariable(name, "f8", ("station", "time"), chunksizes=chunks)
                variable.setncatts(quantities[name].attributes() | {"coordinates": coordinates})
            dataset.sync()
        return cls(Records(Path(path), dataset))

    @classmethod
    def open_for_append(cls, path: str | Path, keep_until: float) -> StationsFile:
        """Open a stations file without its records later than `keep_until`, s since the start. Not collective.

        Raises FileError when it is missing or damaged.
        """
        return cls(open_again(path, keep_until))

    @property
    def count(self) -> int:
        """Return the number of times in the file."""
        return self._records.count

    @property
    def dropped(self) -> int:
        """Return how many times were cut off when the file was opened again."""
        return self._records.dropped

    def append(self, times: np.ndarray, level: np.ndarray, first: np.ndarray, second: np.ndarray) -> None:
        """Write a block of times durably. Not collective.

        times                  (nt,) s since the start, increasing and later than all in the file
        level, first, second   (nt, ns) level, m, and components of the current, m s-1
        Raises FileError.
        """
        wanted = (len(times), self._dataset.dimensions["station"].size)
        columns = dict(zip(self._series, (level, first, second), strict=True))
        for name, column in columns.items():
            if np.shape(column) != wanted:
                raise ValueError(f"{name} has shape {np.shape(column)}, (times, stations) is {wanted}")
        with self._records.adding(times) as place:
            for name, column in columns.items():
                self._dataset[name][:, place] = np.asarray(column).T

    def close(self) -> None:
        """Close the file. Not collective. Raises FileError."""
        self._records.close()

    def __enter__(self) -> StationsFile:
        return self

    def __exit__(self, kind, failure, trace) -> None:
        self._records.close_after(failure)


def _define_places(dataset: netCDF4.Dataset, mesh: Mesh, sampling: Sampling) -> str:
    """Write where the stations are and where they are sampled; return the `coordinates` of their series."""
    name = dataset.createVariable("station_name", str, ("station",))
    name.setncatts({"long_name": "name of the station", "cf_role": "timeseries_id"})
    for k, station in enumerate(sampling.stations):
        name[k] = station.name
    axes = {"lon": ("longitude", "degrees_east"), "lat": ("latitude", "degrees_north")}
    if not mesh.spherical:
        axes = {"x": ("projection_x_coordinate", "m"), "y": ("projection_y_coordinate", "m")}
    asked = np.array([(s.first, s.second) for s in sampling.stations], dtype=float).reshape(-1, 2).T
    sampled = _face_coordinates(mesh, sampling.face)
    for prefix, whose, columns in (("", "station", asked), ("face_", "centre of the sampled face", sampled)):
        for (axis, (standard_name, units)), column in zip(axes.items(), columns, strict=True):
            variable = dataset.createVariable(f"{prefix}{axis}", "f8", ("station",))
            words = f"{standard_name.replace('_', ' ')} of the {whose}"
            variable.setncatts({"standard_name": standard_name, "long_name": words, "units": units})
            variable[:] = column
    distance = dataset.createVariable("distance", "f8", ("station",))
    distance.setncatts({"long_name": "distance from the station to the centre of the sampled face", "units": "m"})
    distance[:] = sampling.distance
    face = dataset.createVariable("face", "i8", ("station",))
    face.setncatts({"long_name": "index of the sampled face in the mesh, from 0"})
    face[:] = sampling.face
    return " ".join(("station_name", *axes))
