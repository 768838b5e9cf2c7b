"""The inputs that prepare.py makes of open data are what the packages hold, and the program reads them.

Heights and shares, and roughly the corners of the coast, were taken from the packages earlier by other means. Other bounds
are loose and have no source but the look of the map.
"""

import json
import shutil
import subprocess
import sys
from pathlib import Path

import netCDF4
import numpy as np
import prepare
import pytest
import shapely

from swe.case.case import place_of
from swe.case.reading import read_case
from swe.constants import EARTH_RADIUS
from swe.mesh.bed import read_grid
from swe.mesh.coast import chart_of, charted, read_water
from swe.mesh.generation_report import true_area
from swe.mesh.surface import Sphere

SURFACE = Sphere(EARTH_RADIUS)


@pytest.fixture(scope="module")
def made(tmp_path_factory):
    return prepare.prepare(tmp_path_factory.mktemp("real"))


@pytest.fixture(scope="module")
def water(made):
    return read_water(made.case.parent / "coast.geojson", SURFACE)


def grid_points():
    """Return longitude, latitude and height of all points of the depth grid."""
    longitude, latitude, height = prepare.heights()
    return *(axis.ravel() for axis in np.meshgrid(longitude - 360.0, latitude)), height.ravel()


def test_heights_are_those_of_the_package():
    longitude, latitude, height = prepare.heights()
    assert height.shape == (91, 120)
    assert (latitude[0], latitude[-1]) == pytest.approx((48.016, 49.984), abs=1e-3)
    assert (longitude[0], longitude[-1]) == pytest.approx((234.017, 237.983), abs=1e-3)
    assert (height.min(), height.max()) == (-1437.0, 2205.0)
    assert np.mean(height < 0) == pytest.approx(0.44, abs=0.005)
    assert -height[height < 0].mean() == pytest.approx(99.6, abs=0.05)


def test_coast_has_about_the_corners_that_were_counted_in_the_box():
    """1,352 were counted by other means, how is not recorded: lakes or not, closing points of rings or not.

    Counted here: land with closing points 1,333, without 1,201; with lakes 1,385 and 1,249. None is 1,352, so this is a
    check of size only. That each ring is read whole is checked on reading, by its number of points and its limits.
    """
    longitude, latitude, _ = prepare.heights()
    box = shapely.box(longitude[0] - 360.0, latitude[0], longitude[-1] - 360.0, latitude[-1])
    land = prepare.land_in(box)
    assert all(part.is_valid for part in land)
    corners = sum(int(shapely.contains_xy(box, np.array(part.exterior.coords)).sum()) for part in land)
    assert corners == pytest.approx(1352, rel=0.05)


def test_water_is_one_valid_polygon_inside_the_depth_grid(made, water):
    assert water.geom_type == "Polygon" and water.is_valid
    assert len(water.interiors) == made.islands > 30
    longitude, latitude, _ = prepare.heights()
    assert prepare.inner_box(longitude - 360.0, latitude).buffer(1e-9).contains(water)
    assert read_grid(made.case.parent / "depth.nc", SURFACE, water).centre is not None  # a grid that is too small is refused


def test_area_of_the_water(made, water):
    """Two projections agree, and so does the share of wet points of the depth grid, which knows nothing of the coast."""
    chart = chart_of(water, SURFACE)
    assert true_area(charted(water, SURFACE, chart), chart) == pytest.approx(1e6 * made.area, rel=1e-4)
    x, y, height = grid_points()
    box = shapely.box(*water.bounds)
    inside = shapely.contains_xy(box, x, y)
    share = np.average(height[inside] < 0, weights=np.cos(np.radians(y[inside])))
    assert made.area == pytest.approx(share * prepare.area(box), rel=0.2)  # lakes and lost inlets are wet on the grid


def test_coast_and_depth_come_to_lie_on_each_other(water):
    """Nearly all grid points in the water are wet, and fewer when the coast is moved by one step of the grid."""
    x, y, height = grid_points()

    def wet_share(polygon):
        return np.mean(height[shapely.contains_xy(polygon, x, y)] < 0)

    assert wet_share(water) > 0.95
    for dx, dy in ((0.067, 0.0), (-0.067, 0.0), (0.0, 0.045), (0.0, -0.045)):
        assert wet_share(shapely.affinity.translate(water, dx, dy)) < wet_share(water) - 0.01


def test_small_islands_and_other_waters_are_left_out_and_counted(made):
    box = shapely.box(0.0, 0.0, 1.0, 1.0)
    land = [shapely.box(0.2, -1.0, 0.25, 2.0), shapely.box(0.5, 0.5, 0.51, 0.51), shapely.box(0.7, 0.7, 0.9, 0.9)]
    water, small, apart = prepare.water_of(box, land, smallest=5.0)
    assert (len(water.interiors), len(small), len(apart)) == (1, 1, 1)
    assert prepare.area(small[0]) == pytest.approx((0.01 * 111.19) ** 2, rel=1e-3)
    assert made.islands_left_out > 50 and made.islands_left_out_area < 0.005 * made.area
    assert made.waters_left_out_area < 0.005 * made.area


def test_case_is_accepted_and_stations_are_in_the_water(made, water):
    case = read_case(made.case)
    assert [station.name for station in case.stations] == list(prepare.STATIONS)
    assert all(water.contains(shapely.Point(place_of(station))) for station in case.stations)


def test_licence_and_origin_are_in_the_files(made):
    feature = json.loads((made.case.parent / "coast.geojson").read_text())["features"][0]["properties"]
    assert "LGPL-3" in feature["licence"] and "GSHHG" in feature["attribution"]
    with netCDF4.Dataset(made.case.parent / "depth.nc") as file:
        assert "matplotlib" in file.license and "topobathy.npz" in file.source and "origin" in file.comment


def findings(path):
    """Return what another program, with the CF table of names, finds wrong in a file."""
    checker = Path(sys.executable).parent / "compliance-checker"
    done = subprocess.run([checker, "-t", "cf:1.11", "-c", "strict", path], capture_output=True, text=True, timeout=120)
    assert "Compliance Checker Report" in done.stdout, done.stdout + done.stderr
    return [line for line in done.stdout.splitlines() if line.startswith("* ")]


def test_depth_file_follows_the_conventions(made, tmp_path):
    """Nothing is found in the file, and a misspelt name is found."""
    depth = made.case.parent / "depth.nc"
    assert findings(depth) == []
    shutil.copy(depth, tmp_path / "misspelt.nc")
    with netCDF4.Dataset(tmp_path / "misspelt.nc", "a") as file:
        file["elevation"].standard_name = "height_above_mean_see_level"
    assert any("height_above_mean_see_level" in line for line in findings(tmp_path / "misspelt.nc"))


def test_command_line(tmp_path):
    command = [sys.executable, prepare.__file__, tmp_path / "there", "--spacing", "3"]
    done = subprocess.run(command, capture_output=True, text=True, timeout=60, check=True)
    assert "left out" in done.stdout
    assert read_case(tmp_path / "there" / "salish.toml").mesh.spacing == 3000.0
