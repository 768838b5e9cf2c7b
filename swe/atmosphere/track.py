"""The track of a storm from a CSV file.

    time                        date, UTC
    lon, lat  or  x, y          centre of the storm: degrees on the sphere, m on a plane
    central_pressure            hPa
    ambient_pressure            hPa
    radius_of_maximum_wind      km
    shape                       B of Holland 1980
    or maximum_wind             greatest 10 m wind of the storm (10 minute mean), its own motion taken off, m s-1

Other units where the header tells them (`sheet`). A storm must not spring up or vanish: a track that begins after the run does,
or ends before, must have the central pressure equal to the ambient one there; beyond it there is no storm.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np

from swe.atmosphere.period import Period
from swe.atmosphere.sheet import Heading, Row, rows
from swe.atmosphere.units import PRESSURE, WIND
from swe.errors import InputError
from swe.mesh.bed import METRES
from swe.mesh.surface import Surface, unit_vectors

NAMES = {
    "time": ("time", "date"),
    "lon": ("lon", "longitude"),
    "lat": ("lat", "latitude"),
    "x": ("x",),
    "y": ("y",),
    "central": ("central_pressure",),
    "ambient": ("ambient_pressure",),
    "radius": ("radius_of_maximum_wind",),
    "shape": ("shape", "b"),
    "strongest": ("maximum_wind",),
}
NEEDED = (
    "time, lon and lat (x and y on a plane), central_pressure, ambient_pressure, radius_of_maximum_wind, shape or maximum_wind"
)
USUAL = {"x": "m", "y": "m", "central": "hPa", "ambient": "hPa", "radius": "km", "strongest": "m s-1"}
"""Units where the header tells none."""

RADIUS = (1e3, 2e6)
"""Believed radii of maximum wind, m; arbitrary, wide."""

SHAPE = (0.3, 5.0)
"""Believed B; Holland 1980 expects 1 to 2.5."""

FASTEST = 60.0
"""Storms do not travel faster, m s-1; arbitrary, twice the fastest known."""


@dataclass(frozen=True, eq=False)
class TrackTable:
    """A track; (n,) each, SI.

    where       file and line of each point, for messages
    times       model times, s, rising
    places      (n, 2) input coordinates; longitudes do not jump
    central, ambient   pressures, Pa; radius of maximum wind, m
    shape       B, or None; strongest: greatest 10 m wind, m s-1, or None; one of them is there
    """

    where: tuple[str, ...]
    times: np.ndarray
    places: np.ndarray
    central: np.ndarray
    ambient: np.ndarray
    radius: np.ndarray
    shape: np.ndarray | None
    strongest: np.ndarray | None


def read_track(path: str | Path, surface: Surface, period: Period) -> TrackTable:
    """Read the track of a storm. Not collective.

    Raises InputError, one line, naming file and line: columns, numbers, dates, values that cannot be, a storm that springs up.
    """
    path = Path(path)
    table = rows(path, "the track of a storm", "time,lon,lat,central_pressure,ambient_pressure,radius_of_maximum_wind,shape")
    heading = next(table)
    columns = _columns(heading, surface)
    factors = {name: _factor(heading, columns[name], name) for name in columns if name in USUAL}
    lines = list(table)
    if len(lines) < 2:
        raise InputError(f"{path}: holds {len(lines)} points; a track needs at least 2")
    values = {
        name: np.array([factors.get(name, 1.0) * row.number(column) for row in lines])
        for name, column in columns.items()
        if name != "time"
    }
    times = np.array([period.seconds(row.date(columns["time"])) for row in lines])
    places = np.column_stack([values[axis] for axis in _axes(surface)])
    table = TrackTable(
        tuple(row.place for row in lines), times, places, values["central"], values["ambient"], values["radius"],
        values.get("shape"), values.get("strongest"),
    )  # fmt: skip
    _refuse_impossible(table, lines, surface)
    _refuse_sudden(table, period)
    return table


def _axes(surface: Surface) -> tuple[str, str]:
    return ("lon", "lat") if surface.spherical else ("x", "y")


def _columns(heading: Heading, surface: Surface) -> dict[str, int]:
    wanted = ("time", *_axes(surface), "central", "ambient", "radius")
    columns = {name: heading.find(NAMES[name]) for name in wanted}
    choice = [name for name in ("shape", "strongest") if heading.find(NAMES[name]) is not None]
    if None in columns.values() or len(choice) != 1:
        raise heading.refuse(NEEDED)
    return columns | {choice[0]: heading.find(NAMES[choice[0]])}


def _factor(heading: Heading, column: int, name: str) -> float:
    place = f"{heading.path}, line {heading.line}"
    unit = USUAL[name] if heading.units[column] is None else heading.units[column]
    if name in ("central", "ambient"):
        return PRESSURE.factor(place, unit)
    if name == "strongest":
        return WIND.factor(place, unit)
    if unit not in METRES:
        raise InputError(f"{place}: unit {unit!r} of {heading.names[column]}; allowed are {', '.join(METRES)}")
    return METRES[unit]


def _refuse_impossible(table: TrackTable, lines: list[Row], surface: Surface) -> None:
    low, high = table.central, table.ambient
    lon, lat = np.abs(table.places).T if surface.spherical else np.zeros((2, len(lines)))
    checks = [
        (
            (low < PRESSURE.least) | (high > PRESSURE.most),
            low / 100,
            "central pressure {:g} hPa; believed are 800 to 1100: check the unit",
        ),
        (low > high, low / 100, "central pressure {:g} hPa is above the ambient one; a storm is a low"),
        (
            _beyond(table.radius, RADIUS),
            table.radius / 1e3,
            "radius of maximum wind {:g} km; believed are 1 to 2000: check the unit",
        ),
        ((lon > 360) | (lat > 90), lat, "latitude {:g} or its longitude is no place on Earth: are they swapped?"),
    ]
    if table.shape is not None:
        checks.append((_beyond(table.shape, SHAPE), table.shape, "shape {:g}; believed are 0.3 to 5, usual 1 to 2.5"))
    else:
        checks.append(
            (_beyond(table.strongest, (0.0, WIND.most)), table.strongest, "maximum wind {:g} m s-1; allowed are 0 to 150")
        )
    for wrong, value, said in checks:
        if wrong.any():
            raise InputError(f"{table.where[wrong.argmax()]}: {said.format(value[wrong.argmax()])}")
    if (np.diff(table.times) <= 0).any():
        raise InputError(f"{table.where[(np.diff(table.times) <= 0).argmax() + 1]}: its time does not rise: sort the lines")
    _refuse_leap(table, surface)


def _beyond(values: np.ndarray, limits: tuple[float, float]) -> np.ndarray:
    return (values < limits[0]) | (values > limits[1])


def _refuse_leap(table: TrackTable, surface: Surface) -> None:
    """Refuse a storm that travels faster than any."""
    if surface.spherical:
        place = surface.radius * unit_vectors(table.places)
    else:
        place = table.places
    speed = np.linalg.norm(np.diff(place, axis=0), axis=1) / np.diff(table.times)
    if speed.max() > FASTEST:
        first = int((speed > FASTEST).argmax())
        raise InputError(
            f"{table.where[first + 1]}: the storm travels at {speed[first]:.0f} m s-1 to get here; "
            f"believed are up to {FASTEST:g}: check place and time"
        )


def _refuse_sudden(table: TrackTable, period: Period) -> None:
    deficit = table.ambient - table.central
    for end, outside, word in ((0, table.times[0] > 0.0, "begins"), (-1, table.times[-1] < period.length, "ends")):
        if outside and deficit[end] > 0.0:
            raise InputError(
                f"{table.where[end]}: the track {word} within the run ({period.text}) with a deficit of "
                f"{deficit[end] / 100:g} hPa; carry it on, or give it the ambient pressure in the centre there"
            )
