"""The part of the schema that drives the water from outside: wind, air pressure, a storm, tides, open boundaries.

As in `schema`: SI numbers, angles in degrees; None where a key is not given or not used in this case.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from swe.case import units
from swe.case.inputs import InputFile
from swe.case.keys import GIVEN, OPTIONAL, REQUIRED, When, key
from swe.case.kinds import Choice, Listing, Text
from swe.case.numbers import Number, Quantity
from swe.constants import AIR_DENSITY, STANDARD_PRESSURE

STRESS = Quantity(units.STRESS, -20.0, 20.0)

WIND_LAWS = ("large-pond-1981", "garratt-1977", "wu-1982", "smith-1980", "smith-1988")
"""Published laws of surface drag, as swe.dynamics.forcing.drag_laws names them (a test compares)."""


@dataclass(frozen=True)
class WindSection:
    east: float = key(STRESS, "constant wind stress on the water towards east; along x on a plane", 0.0, '"0.2 Pa"')
    north: float = key(STRESS, "constant wind stress on the water towards north; along y on a plane", 0.0, '"0 Pa"')
    file: Path | None = key(
        InputFile("netCDF or CSV file"),
        "wind at 10 m: a CF grid in netCDF, or one station in CSV (columns time, and speed in m/s with from in degrees, "
        "or u and v); its stress joins the constant one",
        OPTIONAL,
        '"wind.nc"',
    )
    law: str | None = key(
        Choice(WIND_LAWS),
        "law of the drag of a wind on the water, for `file` and for a storm; the laws differ by a fifth in stress",
        OPTIONAL,
        '"garratt-1977"',
    )
    cap: float | None = key(
        Number(0.0, 0.02, above=True),
        "largest drag coefficient that the law may reach",
        When("wind.law", {GIVEN: OPTIONAL}),
        "0.0035",
    )
    air_density: float = key(
        Quantity(units.DENSITY, 0.5, 2.0),
        "density of the air; the default is that of the standard atmosphere at sea level, ISO 2533",
        AIR_DENSITY,
        '"1.225 kg/m3"',
    )


@dataclass(frozen=True)
class PressureSection:
    file: Path | None = key(
        InputFile("netCDF or CSV file"),
        "air pressure at mean sea level: a CF grid in netCDF, or one station in CSV (columns time and pressure in hPa)",
        OPTIONAL,
        '"pressure.nc"',
    )
    reference: float = key(
        Quantity(units.STRESS, 8e4, 1.1e5),
        "pressure under which the level beyond open boundaries is the given one; the default is the standard atmosphere",
        STANDARD_PRESSURE,
        '"1013.25 hPa"',
    )


@dataclass(frozen=True)
class StormSection:
    track: Path | None = key(
        InputFile("CSV file"),
        "track of a moving storm after Holland 1980, for use without gridded weather; needs `wind.law`; columns time, "
        "lon and lat (or x and y), central_pressure and ambient_pressure in hPa, radius_of_maximum_wind in km, shape or "
        "maximum_wind in m/s",
        OPTIONAL,
        '"storm.csv"',
    )
    reduction: float | None = key(
        Number(0.0, 1.0, above=True),
        "wind at 10 m over the gradient wind",
        When("storm.track", {GIVEN: REQUIRED}),
        "0.8",
    )
    inflow: float | None = key(
        Quantity(units.ANGLE, 0.0, 60.0),
        "angle by which the wind turns inwards",
        When("storm.track", {GIVEN: REQUIRED}),
        '"20 deg"',
    )
    translation_share: float | None = key(
        Number(0.0, 1.0),
        "share of the storm's own velocity that is added to its wind",
        When("storm.track", {GIVEN: REQUIRED}),
        "0.5",
    )


@dataclass(frozen=True)
class TideSection:
    equilibrium: tuple[str, ...] | None = key(
        Listing(Text()),
        "constituents of the equilibrium tide that act on the basin itself (swe tides lists them); only on the sphere",
        OPTIONAL,
        '["M2", "S2", "K1", "O1"]',
    )
    ramp: float = key(
        Quantity(units.TIME, 0.0, 3.15576e9),
        "time over which all tides grow smoothly from nothing; 0: they act in full from the beginning",
        0.0,
        '"1 d"',
    )


@dataclass(frozen=True)
class OpenSection:
    """Radiating after Flather 1976; the clamped law of swe.dynamics.opening is not offered, see there."""

    name: str = key(Text(), "name of the open boundary, different from all others", REQUIRED, '"western mouth"')
    line: Path = key(
        InputFile("GeoJSON file"),
        "line along the outline of the water where the basin is open; coordinates as those of the coastline",
        REQUIRED,
        '"mouth.geojson"',
    )
    constants: Path | None = key(
        InputFile("CSV file"),
        "harmonic constants beyond it: columns lon, lat (or x, y), constituent, amplitude (m), lag (degrees on Greenwich)",
        OPTIONAL,
        '"mouth.csv"',
    )
    level: float = key(
        Quantity(units.LENGTH, -100.0, 100.0),
        "mean level beyond the boundary, above the datum",
        0.0,
        '"0.1 m"',
    )
