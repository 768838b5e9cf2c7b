"""A result folder as figures and tables need it: read from its files alone, finished or not.

    fields.nc     the mesh, depths, records of level and current, extremes over all steps (where the case wrote them)
    stations.nc   series at stations              ledger.nc    sums over the basin
    summary.json  what the run was and cost; comes at its end

Only fields.nc must be there. Everything else is None until the run has written it. The case keeps the text of its file in the
attributes, so that no other file is needed.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path

import netCDF4
import numpy as np

from swe.analysis.basin import Basin, unwrapped
from swe.analysis.opening import look
from swe.errors import FileError

CURRENTS = {True: ("east_velocity", "north_velocity"), False: ("x_velocity", "y_velocity")}
"""Components of the current on the sphere and on a plane."""


@dataclass(frozen=True, eq=False)
class Stations:
    """Series at named points. places (ns, 2); times (nt,) UTC; level (nt, ns) m; current (nt, ns, 2) m s-1."""

    names: tuple[str, ...]
    places: np.ndarray
    times: np.ndarray
    level: np.ndarray
    current: np.ndarray


@dataclass(frozen=True, eq=False)
class Ledger:
    """Sums over the basin: times (nt,) UTC, and by name the series (nt,), the long name and the unit."""

    times: np.ndarray
    series: dict[str, np.ndarray]
    words: dict[str, str]
    units: dict[str, str]


@dataclass(frozen=True, eq=False)
class Extreme:
    """The extreme of each face: value (nf,) and time (nf,) UTC; `origin` says over what it was taken."""

    value: np.ndarray
    time: np.ndarray
    origin: str


@dataclass(frozen=True, eq=False)
class Result:
    """What a result folder holds.

    title       of the case                     case_text   its file
    begin       of the run, UTC                 times       (nt,) of the records of fields, UTC
    variables   names of the variables in fields.nc
    stations, ledger, summary   None where the run has not written them
    """

    folder: Path
    title: str
    case_text: str
    begin: np.datetime64
    times: np.ndarray
    variables: frozenset[str]
    basin: Basin
    stations: Stations | None
    ledger: Ledger | None
    summary: dict | None

    @property
    def _fields(self) -> Path:
        return self.folder / "fields.nc"

    def level(self, record: int) -> np.ndarray:
        """Return the level (nf,) of a record, m. Not collective. Raises FileError."""
        return look(self._fields, lambda file: _plain(file["level"][record]))

    def has_currents(self) -> bool:
        """Return whether the records hold currents at faces. Not collective."""
        return set(CURRENTS[self.basin.spherical]) <= self.variables

    def current(self, record: int) -> np.ndarray:
        """Return the current (nf, 2) of a record: east and north, or x and y; m s-1. Not collective. Raises FileError."""
        names = CURRENTS[self.basin.spherical]
        return look(self._fields, lambda file: np.column_stack([_plain(file[name][record]) for name in names]))

    def has_extremes(self) -> bool:
        """Return whether the run has written extremes over all steps. Not collective. Raises FileError."""
        if "highest_level" not in self.variables:
            return False
        return bool(np.isfinite(look(self._fields, lambda file: _plain(file["highest_level"][:]))).all())

    def extreme(self, name: str) -> Extreme:
        """Return "highest_level", "lowest_level" or "strongest_current" over all steps. Not collective. Raises FileError."""
        return look(self._fields, lambda file: self._extreme(file, name))

    def highest(self) -> Extreme:
        """Return the highest level over all steps, or over the records where steps were not watched. Not collective."""
        if self.has_extremes():
            return self.extreme("highest_level")
        value, which = self.level(0), np.zeros(self.basin.area.size, dtype=int)
        for record in range(1, len(self.times)):
            level = self.level(record)
            which[level > value] = record
            value = np.maximum(level, value)
        return Extreme(value, self.times[which], f"of {len(self.times)} records")

    def _extreme(self, file: netCDF4.Dataset, name: str) -> Extreme:
        begin, end = (_moment(self.begin, seconds) for seconds in _plain(file["window_bounds"][:]))
        window = f"over all steps, {_minute(begin)} to {_minute(end)}"
        return Extreme(_plain(file[name][:]), _moment(self.begin, _plain(file[f"{name}_time"][:])), window)


def read_result(folder: str | Path) -> Result:
    """Read a result folder. Not collective. Raises FileError when there is no readable fields.nc."""
    folder = Path(folder)
    if not folder.is_dir():
        raise FileError(f"{folder}: no such folder; give the folder of a result")
    basin, times, about = look(folder / "fields.nc", lambda file: (_basin(file), _times(file), _about(file)))
    stations = look(folder / "stations.nc", _stations) if (folder / "stations.nc").is_file() else None
    ledger = look(folder / "ledger.nc", _ledger) if (folder / "ledger.nc").is_file() else None
    return Result(
        folder=folder, times=times, basin=basin, **about, summary=_summary(folder / "summary.json"), ledger=ledger,
        stations=stations and _on_map(stations, basin),
    )  # fmt: skip


def _about(file: netCDF4.Dataset) -> dict:
    attributes = {name: file.getncattr(name) for name in file.ncattrs()}
    return {
        "title": attributes.get("title", "untitled"),
        "case_text": attributes.get("case_text", ""),
        "begin": _zero(file),
        "variables": frozenset(file.variables),
    }


def _basin(file: netCDF4.Dataset) -> Basin:
    """Return the basin from the UGRID topology of the file."""
    topology = file.get_variables_by_attributes(cf_role="mesh_topology")[0]
    (x, y), (face_x, face_y) = (topology.getncattr(f"{place}_coordinates").split() for place in ("node", "face"))
    spherical = getattr(file[x], "standard_name", "") == "longitude"
    nodes, centres = (np.column_stack([_plain(file[a][:]), _plain(file[b][:])]) for a, b in ((x, y), (face_x, face_y)))
    if spherical:
        middle = float(np.degrees(np.angle(np.exp(1j * np.radians(centres[:, 0])).mean())))
        nodes[:, 0], centres[:, 0] = unwrapped(nodes[:, 0], middle), unwrapped(centres[:, 0], middle)
    face_nodes = np.ma.filled(file[topology.face_node_connectivity][:], -1)
    return Basin(spherical, nodes, centres, face_nodes, _plain(file["face_area"][:]), _plain(file["depth"][:]))


def _stations(file: netCDF4.Dataset) -> Stations | None:
    names = tuple(str(name) for name in file["station_name"][:])
    if not names:
        return None
    times, spherical = _times(file), "lon" in file.variables
    count, first_second = len(times), CURRENTS[spherical]
    x, y = ("lon", "lat") if spherical else ("x", "y")
    return Stations(
        names=names,
        places=np.column_stack([_plain(file[x][:]), _plain(file[y][:])]),
        times=times,
        level=_plain(file["level"][:, :count]).T,
        current=np.stack([_plain(file[name][:, :count]).T for name in first_second], axis=-1),
    )


def _on_map(stations: Stations, basin: Basin) -> Stations:
    """Return the stations with their longitudes unwrapped as those of the basin."""
    if not basin.spherical:
        return stations
    west, _, east, _ = basin.box
    places = np.column_stack([unwrapped(stations.places[:, 0], 0.5 * (west + east)), stations.places[:, 1]])
    return Stations(stations.names, places, stations.times, stations.level, stations.current)


def _ledger(file: netCDF4.Dataset) -> Ledger:
    times = _times(file)
    columns = {name: v for name, v in file.variables.items() if v.dimensions == ("time",) and name != "time"}
    return Ledger(
        times,
        {name: _plain(v[: len(times)]) for name, v in columns.items()},
        {name: v.long_name for name, v in columns.items()},
        {name: v.units for name, v in columns.items()},
    )


def _summary(path: Path) -> dict | None:
    if not path.is_file():
        return None
    try:
        return json.loads(path.read_text(encoding="utf-8"))
    except (OSError, ValueError) as failure:
        raise FileError(f"{path}: cannot be read as JSON ({failure}); remove it or run the case again") from None


def _times(file: netCDF4.Dataset) -> np.ndarray:
    return _moment(_zero(file), _plain(file["time"][:]))


def _zero(file: netCDF4.Dataset) -> np.datetime64:
    """Return the time from which the seconds of a file are counted."""
    time = file["time"]
    return np.datetime64(
        netCDF4.num2date(0.0, time.units, time.calendar, only_use_cftime_datetimes=False, only_use_python_datetimes=True)
    )


def _moment(begin: np.datetime64, seconds) -> np.ndarray:
    """Return times to the millisecond."""
    return begin.astype("datetime64[ms]") + np.round(1000.0 * np.asarray(seconds)).astype("timedelta64[ms]")


def _minute(time: np.datetime64) -> str:
    return np.datetime_as_string(time.astype("datetime64[m]")).replace("T", " ")


def _plain(values) -> np.ndarray:
    """Return numbers without a mask; missing ones are NaN."""
    return np.ma.filled(np.ma.asarray(values, dtype=float), np.nan)
