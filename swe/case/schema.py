"""The schema of the case file: the keys of every section, with kind, range, need or default, and meaning.

Values are SI numbers, angles degrees, times of day UTC. A key that is optional and not given, or not used in this case,
is None. Defaults stand only where accuracy is not concerned or where the value is the plain common choice; a run shows
all of them. What sets the accuracy of a run (spacing, step, tolerances) has no default.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

from swe.case import units
from swe.case.inputs import InputFile, Moment
from swe.case.keys import ABSENT, GIVEN, OPTIONAL, REQUIRED, Same, When, key
from swe.case.kinds import Choice, Listing, Switch, Text
from swe.case.numbers import Number, Quantity, Whole
from swe.constants import GRAVITY, SEA_WATER_DENSITY

EXPONENTIAL = ("two-stage", "one-stage")
"""Steppers that form the action of an exponential."""

PLANE_COORDINATE = Quantity(units.LENGTH, -1e8, 1e8)
LONGITUDE = Quantity(units.ANGLE, -180.0, 360.0)
LATITUDE = Quantity(units.ANGLE, -90.0, 90.0)
DEPTH = Quantity(units.LENGTH, 0.0, 12e3, above=True)
SPACING = Quantity(units.LENGTH, 0.0, 2e6, above=True)
INTERVAL = Quantity(units.TIME, 0.0, 3.15576e9, above=True)
RELATIVE = Number(0.0, 0.1, above=True)


def _with_exponential(need):
    return When("method.stepper", dict.fromkeys(EXPONENTIAL, need))


def _without_mesh_file(need):
    return When("mesh.file", {ABSENT: need})


@dataclass(frozen=True)
class BasinSection:
    surface: str | None = key(
        Choice(("plane", "sphere")),
        'what the basin lies on: "plane", coordinates x and y; "sphere", the mean Earth, longitude and latitude',
        _without_mesh_file(REQUIRED),
        '"plane"',
    )
    coastline: Path | None = key(
        InputFile("GeoJSON file"),
        "outline of the water, islands as holes; coordinates in m on a plane, in degrees on the sphere",
        _without_mesh_file(REQUIRED),
        '"coast.geojson"',
    )


@dataclass(frozen=True)
class DepthSection:
    constant: float | None = key(DEPTH, "one depth everywhere", _without_mesh_file(OPTIONAL), '"40 m"')
    grid: Path | None = key(
        InputFile("netCDF file after the CF conventions"),
        "depth on a grid of coordinates",
        _without_mesh_file(OPTIONAL),
        '"depth.nc"',
    )
    variable: str | None = key(
        Text(),
        "variable of the grid file; without it the file's attributes tell",
        When("depth.grid", {GIVEN: OPTIONAL}),
        '"depth"',
    )
    soundings: Path | None = key(
        InputFile("CSV file"),
        "depths at scattered points",
        _without_mesh_file(OPTIONAL),
        '"soundings.csv"',
    )
    datum: str = key(
        Choice(("mean_sea_level", "geoid", "geopotential_datum", "reference_ellipsoid", "lake")),
        'what levels and depths are measured from, as a standard name in the files tells; "lake", the local datum of a lake',
        "mean_sea_level",
        '"lake"',
    )
    least: float | None = key(
        DEPTH,
        "least depth: shallower water is deepened to it, because cells never fall dry",
        _without_mesh_file(REQUIRED),
        '"5 m"',
    )


@dataclass(frozen=True)
class MeshSection:
    file: Path | None = key(
        InputFile("mesh file of this program (netCDF)"),
        "a ready mesh, in place of basin, depth and all other keys here",
        OPTIONAL,
        '"mesh.nc"',
    )
    spacing: float | None = key(
        SPACING,
        "distance between neighbouring cell centres, the same everywhere",
        _without_mesh_file(OPTIONAL),
        '"2 km"',
    )
    finest: float | None = key(
        SPACING,
        "least distance between neighbouring cell centres, in place of `spacing`",
        _without_mesh_file(OPTIONAL),
        '"500 m"',
    )
    coarsest: float | None = key(
        SPACING,
        "largest distance between neighbouring cell centres",
        When("mesh.finest", {GIVEN: REQUIRED}),
        '"4 km"',
    )
    grade_by: tuple[str, ...] | None = key(
        Listing(Choice(("coast", "depth", "areas"))),
        "what makes cells finer: nearness of the coast, small depth, areas of one's own",
        When("mesh.finest", {GIVEN: REQUIRED}),
        '["coast"]',
    )
    growth: float | None = key(
        Number(0.0, 1.0, above=True),
        "largest growth of the spacing per distance: 0.15 is 150 m more spacing each km",
        When("mesh.finest", {GIVEN: 0.15}),
        "0.15",
    )
    areas: Path | None = key(
        InputFile("GeoJSON file"),
        "polygons with cells of their own spacing",
        When("mesh.finest", {GIVEN: OPTIONAL}),
        '"areas.geojson"',
    )
    area_spacing: float | None = key(
        SPACING,
        "spacing within the areas",
        When("mesh.areas", {GIVEN: REQUIRED}),
        '"500 m"',
    )
    sweeps: int | None = key(
        Whole(0, 1000),
        "sweeps of Lloyd's method, which even the cells out; more give rounder cells",
        _without_mesh_file(50),
        "50",
    )
    seed: int | None = key(
        Whole(0, 2**31 - 1),
        "seed of the random first points; the same seed gives the same mesh",
        _without_mesh_file(1),
        "1",
    )


@dataclass(frozen=True)
class EarthSection:
    rotation: str = key(
        Choice(("none", "f-plane", "sphere")),
        'Coriolis parameter f: "none", 0; "f-plane", that of one latitude everywhere; "sphere", that of each place',
        REQUIRED,
        '"f-plane"',
    )
    latitude: float | None = key(LATITUDE, "latitude of the f-plane", When("earth.rotation", {"f-plane": REQUIRED}), '"54 deg"')
    gravity: float = key(
        Quantity(units.ACCELERATION, 0.0, 100.0, above=True),
        "acceleration of gravity; the default is the standard value of the 3rd CGPM, 1901",
        GRAVITY,
        '"9.80665 m/s2"',
    )
    density: float = key(
        Quantity(units.DENSITY, 500.0, 2000.0),
        "density of the water; the default is common practice for sea water",
        SEA_WATER_DENSITY,
        '"1025 kg/m3"',
    )


@dataclass(frozen=True)
class DragSection:
    bottom: float = key(
        Number(0.0, 0.1),
        "drag coefficient of the quadratic bottom stress; the default is common practice",
        0.0025,
        "0.0025",
    )
    manning: float | None = key(
        Number(0.0, 0.2, above=True),
        "roughness n of Manning's law, in place of `bottom`: drag coefficient g n^2 / h^(1/3)",
        OPTIONAL,
        "0.025",
    )
    viscosity: float = key(
        Quantity(units.VISCOSITY, 0.0, 1e6),
        "lateral eddy viscosity",
        0.0,
        '"10 m2/s"',
    )


@dataclass(frozen=True)
class StartSection:
    kind: str = key(
        Choice(("rest", "hump", "file")),
        'water at the beginning: "rest", level 0; "hump", at rest with a raised level; "file", as a file tells',
        "rest",
        '"hump"',
    )
    file: Path | None = key(
        InputFile("netCDF file of fields of this program or after the CF conventions"),
        "fields of an earlier run on the same mesh, or a level above the datum on a grid of coordinates, at rest; "
        "the last time counts",
        When("start.kind", {"file": REQUIRED}),
        '"fields.nc"',
    )
    height: float | None = key(
        Quantity(units.LENGTH, -100.0, 100.0),
        "level H in the middle of the hump, H exp(-(r / radius)^2) at the distance r from there",
        When("start.kind", {"hump": REQUIRED}),
        '"1 m"',
    )
    radius: float | None = key(
        Quantity(units.LENGTH, 0.0, 2e7, above=True),
        "distance from the middle where the hump is 1/e of its height",
        When("start.kind", {"hump": REQUIRED}),
        '"20 km"',
    )
    x: float | None = key(
        PLANE_COORDINATE, "middle of the hump; x and y are needed on a plane", When("start.kind", {"hump": OPTIONAL}), '"50 km"'
    )
    y: float | None = key(
        PLANE_COORDINATE, "middle of the hump; x and y are needed on a plane", When("start.kind", {"hump": OPTIONAL}), '"40 km"'
    )
    lon: float | None = key(
        LONGITUDE, "middle of the hump; lon and lat are needed on the sphere", When("start.kind", {"hump": OPTIONAL}), "-40.5"
    )
    lat: float | None = key(
        LATITUDE, "middle of the hump; lon and lat are needed on the sphere", When("start.kind", {"hump": OPTIONAL}), "43.2"
    )


@dataclass(frozen=True)
class TimeSection:
    begin: datetime = key(Moment(), "date and time of the beginning", REQUIRED, "2031-01-01T00:00:00Z")
    duration: float = key(INTERVAL, "length of the run, a whole multiple of the step", REQUIRED, '"10 d"')
    step: float = key(
        Quantity(units.TIME, 0.0, 86400.0, above=True),
        "time step; sets the accuracy in time, so there is no default",
        REQUIRED,
        '"120 s"',
    )


@dataclass(frozen=True)
class MethodSection:
    stepper: str = key(
        Choice((*EXPONENTIAL, "runge-kutta-4")),
        "time stepping: exponential with two stages or with one, or the classical explicit method for comparison",
        REQUIRED,
        '"one-stage"',
    )
    operator: str | None = key(
        Choice(("wave", "jacobian")),
        'what the exponential is taken of: "wave", linear waves about rest; "jacobian", all rates about the current state',
        When("method.stepper", {"two-stage": REQUIRED, "one-stage": "jacobian"}),
        '"wave"',
    )
    rotation_in_operator: bool | None = key(
        Switch(),
        "rotation is part of the wave operator; without it a product is cheaper and the error of a step larger",
        When("method.operator", {"wave": True}),
        "true",
    )
    refresh_depth: bool | None = key(
        Switch(),
        "the wave operator follows the current depth, step by step; without it the resting depth stands",
        When("method.operator", {"wave": True}),
        "true",
    )
    friction_in_operator: bool | None = key(
        Switch(),
        "bottom friction damps within the wave operator; keeps long steps stable in metres of water, at the cost of arnoldi",
        When("method.operator", {"wave": False}),
        "true",
    )
    action: str | None = key(
        Choice(("lanczos", "chebyshev", "arnoldi")),
        "how the exponential acts on a vector; the first two need the wave operator",
        When("method.operator", {"wave": "lanczos", "jacobian": "arnoldi"}),
        '"lanczos"',
    )
    action_tolerance: float | None = key(
        RELATIVE,
        "allowed error of one action over the size of the change in one step, in the energy norm",
        _with_exponential(REQUIRED),
        "1e-5",
    )
    largest_basis: int | None = key(
        Whole(2, 1000),
        "largest basis or degree of an action; one that needs more fails, and a smaller step helps",
        _with_exponential(120),
        "120",
    )


@dataclass(frozen=True)
class SubdomainsSection:
    count: int | None = key(
        Whole(1, 1_000_000),
        "number of subdomains in all, so that results do not depend on the number of ranks",
        OPTIONAL,
        "16",
    )
    per_rank: int | None = key(
        Whole(1, 10_000),
        "number of subdomains of each rank",
        When("subdomains.count", {ABSENT: 1}),
        "1",
    )
    overlap: int | None = key(
        Whole(1, 100),
        "layers of cells by which a subdomain reaches into its neighbours",
        _with_exponential(OPTIONAL),
        "6",
    )
    overlap_tolerance: float | None = key(
        RELATIVE,
        "in place of `overlap`: the layers are chosen so that the Bessel tail of the step is below this",
        _with_exponential(OPTIONAL),
        "1e-6",
    )
    mismatch_tolerance: float | None = key(
        Quantity(units.LENGTH, 0.0, 1.0, above=True),
        "allowed difference between overlapping subdomains in one step, as a level; above it the step is repeated",
        _with_exponential(REQUIRED),
        '"0.1 mm"',
    )
    repeats: int | None = key(
        Whole(0, 50),
        "repeats allowed in one step; a mismatch that is still too large then ends the run",
        _with_exponential(3),
        "3",
    )


@dataclass(frozen=True)
class OutputSection:
    fields_every: float = key(INTERVAL, "interval of the fields, a whole multiple of the step", REQUIRED, '"1 h"')
    stations_every: float | None = key(
        INTERVAL,
        "interval of the station series, a whole multiple of the step; needed where there are stations",
        OPTIONAL,
        '"10 min"',
    )
    ledger_every: float = key(
        INTERVAL,
        "interval of the ledger of volume and energy, a whole multiple of the step",
        Same("output.fields_every"),
        '"1 h"',
    )
    fields: tuple[str, ...] | None = key(
        Listing(Text()), "names of the fields to write; without it the usual ones", OPTIONAL, '["level"]'
    )


@dataclass(frozen=True)
class CheckpointSection:
    every: float | None = key(
        INTERVAL,
        "interval of saved states in model time, a whole multiple of the step; without it only a stopped run saves one",
        OPTIONAL,
        '"1 d"',
    )


@dataclass(frozen=True)
class StationSection:
    name: str = key(Text(), "name of the station, different from all others", REQUIRED, '"pier"')
    x: float | None = key(PLANE_COORDINATE, "place; x and y are needed on a plane", OPTIONAL, '"10 km"')
    y: float | None = key(PLANE_COORDINATE, "place; x and y are needed on a plane", OPTIONAL, '"20 km"')
    lon: float | None = key(LONGITUDE, "place; lon and lat are needed on the sphere", OPTIONAL, "-40.5")
    lat: float | None = key(LATITUDE, "place; lon and lat are needed on the sphere", OPTIONAL, "43.2")
