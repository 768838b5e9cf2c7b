"""The demo inputs are valid, hold what the demos promise, and come from their script byte for byte."""

import json
import subprocess
import sys
from pathlib import Path

import netCDF4
import numpy as np
import pytest
import shapely

from swe.case.case import place_of
from swe.case.reading import read_case
from swe.constants import EARTH_RADIUS
from swe.mesh.bed import read_grid
from swe.mesh.coast import chart_of, charted, read_water
from swe.mesh.soundings import read_soundings
from swe.mesh.surface import Plane, Sphere

ROOT = Path(__file__).parents[2]
CONFIGS = ROOT / "configs"
SURFACES = {"gulf": Sphere(EARTH_RADIUS), "lake": Plane()}


@pytest.fixture(scope="module", params=list(SURFACES))
def name(request):
    return request.param


def water_of(name):
    return read_water(CONFIGS / name / "coast.geojson", SURFACES[name])


def flat_water(name):
    """Return the water in m on the chart of its basin."""
    water = water_of(name)
    return charted(water, SURFACES[name], chart_of(water, SURFACES[name]))


def test_script_makes_the_same_bytes(tmp_path):
    subprocess.run([sys.executable, ROOT / "scripts" / "make_demo_inputs", tmp_path], check=True)
    made = sorted(path.relative_to(tmp_path) for path in tmp_path.rglob("*") if path.is_file())
    assert [str(path) for path in made] == ["gulf/coast.geojson", "gulf/depth.nc", "lake/coast.geojson", "lake/soundings.csv"]
    for path in made:
        assert (tmp_path / path).read_bytes() == (CONFIGS / path).read_bytes(), path


def test_files_are_small():
    assert all(path.stat().st_size < 600_000 for path in CONFIGS.rglob("*") if path.is_file())


def test_case_is_accepted(name):
    case = read_case(CONFIGS / f"{name}.toml")
    assert case.start.kind == "rest" and (case.wind.east, case.wind.north) != (0.0, 0.0)
    assert case.time.duration == pytest.approx({"gulf": 2, "lake": 1}[name] * 86400.0)
    assert len(case.stations) == 3


def test_coast_is_one_valid_polygon_with_islands(name):
    water = water_of(name)
    assert water.geom_type == "Polygon" and water.is_valid
    rings = json.loads((CONFIGS / name / "coast.geojson").read_text())["features"][0]["geometry"]["coordinates"]
    islands = {"gulf": 6, "lake": 2}[name]
    assert len(water.interiors) == len(rings) - 1 == islands
    assert all(ring[0] == ring[-1] for ring in rings)


def test_size_of_the_basin(name):
    west, south, east, north = np.array(flat_water(name).bounds) / 1000.0
    longest, across = {"gulf": ((600, 900), (300, 400)), "lake": ((55, 62), (15, 24))}[name]
    assert longest[0] < east - west < longest[1] and across[0] < north - south < across[1]


def test_no_land_or_water_is_too_narrow_for_the_mesh(name):
    """Opening and closing by a third of the finest spacing changes next to nothing."""
    case = read_case(CONFIGS / f"{name}.toml")
    water = flat_water(name)
    reach = (case.mesh.finest or case.mesh.spacing) / 3.0
    for first in (reach, -reach):
        changed = water.buffer(first).buffer(-first).symmetric_difference(water).area
        assert changed < 0.003 * water.area


def test_mouth_of_the_gulf_is_one_straight_side():
    """The longest side is the mouth: on one meridian, which is a great circle, and at the western end of the water."""
    ring = np.array(water_of("gulf").exterior.coords)
    lengths = np.hypot(*np.diff(ring, axis=0).T)
    k = int(np.argmax(lengths))
    assert ring[k, 0] == ring[k + 1, 0] == ring[:, 0].min()
    assert 80.0 < lengths[k] * EARTH_RADIUS * np.pi / 180 / 1000 < 150.0
    assert (ring[:-1, 0] == ring[k, 0]).sum() == 2


def test_strait_between_the_great_island_and_the_mainland():
    water = flat_water("gulf")
    island = max((shapely.Polygon(ring) for ring in water.interiors), key=lambda part: part.area)
    assert 8e3 < island.distance(water.exterior) < 16e3


def test_depths_of_the_gulf():
    """Few metres at the coast, a basin beyond 1,000 m, a sill between two basins, a canyon that cuts the shelf."""
    water = water_of("gulf")
    with netCDF4.Dataset(CONFIGS / "gulf" / "depth.nc") as file:
        depth, lon, lat = (np.asarray(file[name][:], dtype=float) for name in ("depth", "lon", "lat"))
        assert file["depth"].standard_name == "sea_floor_depth_below_mean_sea_level"
        assert (file["depth"].units, file["depth"].positive) == ("m", "down")
        assert (file["lon"].units, file["lat"].units) == ("degrees_east", "degrees_north")
    inside = shapely.contains_xy(water, *np.meshgrid(lon, lat))
    assert 1000.0 < depth[inside].max() < 2000.0
    assert np.quantile(depth[inside], 0.02) < 10.0
    assert 0.2 < np.mean(depth[inside] < 100.0) < 0.7  # shelf
    assert (depth < 0.0).any()  # land
    # The deepest way from the mouth to the deepest place: its shallowest point is the sill.
    outer = depth[inside & (np.meshgrid(lon, lat)[0] < -40.0)].max()
    assert 100.0 < sill_depth(np.where(inside, depth, -1.0)) < 0.7 * outer
    # Canyon: deep water between shelf on both sides, along a section across it.
    along = np.linspace(-0.35, 0.35, 71)
    section = read_grid(CONFIGS / "gulf" / "depth.nc", Sphere(EARTH_RADIUS), water).at(
        np.column_stack([-33.8 + 0.4 * along, 44.42 - along])
    )[0]
    middle = section[25:46].max()
    assert middle > 300.0 and section[:20].min() < 0.5 * middle and section[-20:].min() < 0.5 * middle


def sill_depth(depth):
    """Return the depth at which the west end and the deepest place become one water when the level is lowered no further."""
    from scipy.ndimage import label

    goal, start = np.unravel_index(np.argmax(depth), depth.shape), np.argmax(depth[:, 4])
    low, high = 0.0, float(depth[start, 4])
    while high - low > 1.0:
        middle = 0.5 * (low + high)
        part = label(depth >= middle)[0]
        low, high = (middle, high) if part[start, 4] == part[goal] != 0 else (low, middle)
    return low


def test_depth_grid_covers_the_gulf():
    water = water_of("gulf")
    bed = read_grid(CONFIGS / "gulf" / "depth.nc", Sphere(EARTH_RADIUS), water)  # refuses a grid that does not
    depth, _ = bed.at(np.array(water.representative_point().coords))
    assert np.isfinite(depth).all()


def test_soundings_of_the_lake():
    water = water_of("lake")
    table = np.loadtxt(CONFIGS / "lake" / "soundings.csv", delimiter=",", skiprows=1)
    assert 1500 < len(table) < 2500
    assert table[:, 2].min() == 3.0 and 55.0 < table[:, 2].max() <= 61.0
    assert shapely.contains_xy(water.buffer(2.0), table[:, :2]).all()
    assert np.isfinite(read_soundings(CONFIGS / "lake" / "soundings.csv", Plane(), water).at(table[:, :2])[0]).all()


def test_stations_are_in_the_water(name):
    case = read_case(CONFIGS / f"{name}.toml")
    water = water_of(name)
    for station in case.stations:
        assert water.contains(shapely.Point(place_of(station))), station.name


def test_first_station_of_the_gulf_is_in_the_strait():
    case, surface, water = read_case(CONFIGS / "gulf.toml"), SURFACES["gulf"], water_of("gulf")
    point = shapely.Point(chart_of(water, surface).to_chart(np.array([place_of(case.stations[0])]))[0])
    flat = flat_water("gulf")
    island = max((shapely.Polygon(ring) for ring in flat.interiors), key=lambda part: part.area)
    assert point.distance(island) < 12e3 and point.distance(flat.exterior) < 12e3
