"""The weather of one station, from a CSV file, taken to be the same in all of the basin.

    time        date, UTC
    wind        speed and from: direction the wind blows from, degrees clockwise from north (y on a plane); may be empty in a calm
                or u and v: components towards east and north (x and y on a plane)
    pressure    at mean sea level; may be left out

Wind in m s-1 and pressure in hPa, unless the header tells another unit. What is linear in time are the components, not speed
and direction.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from swe.atmosphere.period import Period, covering
from swe.atmosphere.record import Uniform
from swe.atmosphere.sheet import Heading, Row, rows
from swe.atmosphere.units import PRESSURE, WIND, Kind
from swe.errors import InputError

NAMES = {
    "time": ("time", "date"),
    "speed": ("speed", "wind_speed"),
    "from": ("from", "wind_from_direction"),
    "u": ("u", "eastward_wind", "x_wind"),
    "v": ("v", "northward_wind", "y_wind"),
    "pressure": ("pressure", "air_pressure_at_mean_sea_level"),
}
EXAMPLE = "time,speed,from,pressure"
USUAL = {"speed": "m s-1", "u": "m s-1", "v": "m s-1", "pressure": "hPa"}
"""Units where the header tells none."""


@dataclass(frozen=True)
class Station:
    """wind: record of two components, m s-1, or None; pressure: record of one, Pa, or None."""

    wind: Uniform | None
    pressure: Uniform | None


def read_station(path: str | Path, period: Period) -> Station:
    """Read the record of a station for a period. Not collective.

    Raises InputError, one line, naming the file and the line or the dates: columns, numbers, dates, times that do not rise,
    period not covered, a gap, values that cannot be.
    """
    path = Path(path)
    table = rows(path, "wind or pressure of a station", EXAMPLE)
    columns = _Columns.of(next(table))
    kept = list(_needed(table, columns, period))
    times = np.array([time for time, _, _ in kept])
    part = covering(str(path), times, period, lambda index: period.date(times[index]))
    dates = tuple(period.date(time) for time in times[part])
    values = np.array([value for _, value, _ in kept]).reshape(times.size, -1)[part]
    wind, pressure = (Uniform(str(path), times[part], values[:, some], dates) for some in (slice(0, 2), slice(-1, None)))
    return Station(wind if columns.wind else None, pressure if columns.pressure else None)


@dataclass(frozen=True)
class _Columns:
    """Numbers of the columns and the factors of their units, by our names; of what is in the file."""

    number: dict[str, int]
    factor: dict[str, float]

    @classmethod
    def of(cls, heading: Heading) -> "_Columns":
        number = {name: heading.find(spellings) for name, spellings in NAMES.items()}
        number = {name: column for name, column in number.items() if column is not None}
        pairs = [pair for pair in (("speed", "from"), ("u", "v")) if any(name in number for name in pair)]
        whole = all(name in number for pair in pairs for name in pair)
        if "time" not in number or len(pairs) > 1 or not whole or not (pairs or "pressure" in number):
            raise heading.refuse("time, and speed and from, or u and v, or pressure, or one of the pairs and pressure")
        direction = number.get("from")
        if direction is not None and heading.units[direction] not in (None, "deg", "degree", "degrees"):
            raise InputError(f"{heading.path}, line {heading.line}: unit {heading.units[direction]!r} of from; allowed is deg")
        return cls(number, {name: _factor(heading, number[name], name) for name in USUAL if name in number})

    @property
    def wind(self) -> bool:
        return "speed" in self.number or "u" in self.number

    @property
    def pressure(self) -> bool:
        return "pressure" in self.number

    def values(self, row: Row) -> list[float]:
        """Return the two components of the wind and the pressure, as far as they are there, SI."""
        values = self._components(row) if self.wind else []
        if self.pressure:
            values.append(self._value(row, "pressure", PRESSURE))
        return values

    def _components(self, row: Row) -> list[float]:
        if "u" in self.number:
            return [self._value(row, name, WIND) for name in ("u", "v")]
        speed = self._value(row, "speed", WIND)
        if speed < 0:
            raise InputError(f"{row.place}: speed is {speed:g}; allowed is 0 and more")
        if speed == 0 and not row.fields[self.number["from"]]:
            return [0.0, 0.0]
        direction = row.number(self.number["from"])
        if not -360 <= direction <= 360:
            raise InputError(f"{row.place}: from is {direction:g}; allowed are -360 to 360 degrees")
        return [-speed * math.sin(math.radians(direction)), -speed * math.cos(math.radians(direction))]

    def _value(self, row: Row, name: str, kind: Kind) -> float:
        value = self.factor[name] * row.number(self.number[name])
        kind.believe(row.place, np.array([value]))
        return value


def _factor(heading: Heading, column: int, name: str) -> float:
    kind = PRESSURE if name == "pressure" else WIND
    unit = heading.units[column]
    return kind.factor(f"{heading.path}, line {heading.line}", USUAL[name] if unit is None else unit)


def _needed(table: Iterator[Row], columns: _Columns, period: Period) -> Iterator[tuple[float, list[float], Row]]:
    """Yield (model time, values, row) from the last row not after the beginning to the first not before the end."""
    held = None
    for row in table:
        time = period.seconds(row.date(columns.number["time"]))
        if held is not None and time <= held[0]:
            raise InputError(f"{row.place}: {period.date(time)} follows {period.date(held[0])}; times must rise: sort the lines")
        if held is not None and time > 0:
            yield held
        held = time, columns.values(row), row
        if time >= period.length:
            break
    if held is not None:
        yield held
