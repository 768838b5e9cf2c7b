"""The water from GeoJSON, the charts it is drawn in, and its coast.

Sources: RFC 7946 (GeoJSON); Snyder 1987 (stereographic projection): conformality and Lambert's equal area are facts of
geometry, areas of caps and zones are elementary.
"""

import json

import numpy as np
import pytest
import shapely
from waters import degrees, lake, ring, write_geojson

from swe.constants import EARTH_RADIUS
from swe.errors import InputError
from swe.mesh.coast import box_of, chart_of, charted, read_water
from swe.mesh.generation_report import true_area
from swe.mesh.shoreline import smoothed_shoreline, true_shoreline
from swe.mesh.surface import Plane, Sphere, near_longitude

SPHERE = Sphere(EARTH_RADIUS)
SQUARE = [[0, 0], [10, 0], [10, 10], [0, 10], [0, 0]]


def refused(path, surface=None):
    with pytest.raises(InputError) as caught:
        read_water(path, surface or Plane())
    text = str(caught.value)
    assert text.startswith(str(path)) and "\n" not in text
    return text


def written(tmp_path, document):
    path = tmp_path / "water.json"
    path.write_text(document if isinstance(document, str) else json.dumps(document))
    return path


@pytest.mark.parametrize("wrap", ["bare", "feature", "collection", "geometries"])
def test_holes_are_islands_however_the_polygon_is_wrapped(tmp_path, wrap):
    bare = shapely.geometry.mapping(lake())
    feature = {"type": "Feature", "properties": None, "geometry": bare}
    document = {
        "bare": bare,
        "feature": feature,
        "collection": {"type": "FeatureCollection", "features": [feature]},
        "geometries": {"type": "GeometryCollection", "geometries": [bare]},
    }[wrap]
    water = read_water(written(tmp_path, document), Plane())
    assert water.geom_type == "Polygon" and len(water.interiors) == 2
    assert water.area == pytest.approx(lake().area, rel=1e-12)


def test_parts_that_touch_are_joined_and_height_is_dropped(tmp_path):
    left = [[[0, 0, 3], [5, 0, 3], [5, 5, 3], [0, 5, 3], [0, 0, 3]]]
    water = read_water(write_geojson(tmp_path / "w.json", shapely.box(5, 0, 9, 5), shapely.Polygon(left[0])), Plane())
    assert water.geom_type == "Polygon" and water.area == 45 and not water.has_z


def test_missing_file(tmp_path):
    assert "no such file" in refused(tmp_path / "none.json")


def test_not_json_names_the_line(tmp_path):
    assert ", line 2: not JSON" in refused(written(tmp_path, '{"type": "Polygon",\n "coordinates": [[}'))


def test_not_text(tmp_path):
    path = tmp_path / "water.json"
    path.write_bytes(b"\xff\xfe\x00\x81")
    assert "cannot be read as text" in refused(path)


@pytest.mark.parametrize("document", [[1, 2], {"type": "Topology"}, {"type": "FeatureCollection", "features": 3}])
def test_json_that_is_no_geojson(tmp_path, document):
    text = refused(written(tmp_path, document))
    assert "is not a GeoJSON object" in text or "has no list of features" in text


def test_lines_are_refused_by_name(tmp_path):
    text = refused(write_geojson(tmp_path / "w.json", shapely.box(0, 0, 1, 1), shapely.LineString([(0, 0), (1, 1)])))
    assert "holds LineString" in text and "Polygon and MultiPolygon" in text


@pytest.mark.parametrize("document", [{"type": "FeatureCollection", "features": []}, {"type": "Feature", "geometry": None}])
def test_no_polygon(tmp_path, document):
    assert "holds no polygon" in refused(written(tmp_path, document))


def test_no_area(tmp_path):
    assert "no area" in refused(written(tmp_path, {"type": "Polygon", "coordinates": []}))


@pytest.mark.parametrize("rings", [[[[0, 0], [1, 1]]], [[["a", 0], [1, 0], [1, 1], ["a", 0]]], [[5]], 7])
def test_a_ring_that_cannot_be_read(tmp_path, rings):
    assert "ring that cannot be read" in refused(written(tmp_path, {"type": "Polygon", "coordinates": rings}))


def test_not_finite(tmp_path):
    assert "not finite" in refused(written(tmp_path, '{"type": "Polygon", "coordinates": [[[0,0],[1,NaN],[1,1],[0,0]]]}'))


def test_coastline_that_crosses_itself_names_the_place(tmp_path):
    bow = {"type": "Polygon", "coordinates": [[[0, 0], [10, 10], [10, 0], [0, 10], [0, 0]]]}
    text = refused(written(tmp_path, bow))
    assert "crosses itself" in text and "[5 5]" in text


def test_island_outside_the_water(tmp_path):
    island = [[20, 20], [21, 20], [21, 21], [20, 20]]
    assert "not valid" in refused(written(tmp_path, {"type": "Polygon", "coordinates": [SQUARE, island]}))


def test_swapped_longitude_and_latitude(tmp_path):
    path = write_geojson(tmp_path / "w.json", shapely.box(54, 100, 56, 102))
    text = refused(path, SPHERE)
    assert "look swapped" in text and "[" in text


def test_metres_on_the_sphere(tmp_path):
    path = write_geojson(tmp_path / "w.json", shapely.box(3e5, 6e6, 4e5, 6.1e6))
    assert "choose the plane" in refused(path, SPHERE)


def test_a_basin_wider_than_a_region():
    with pytest.raises(InputError, match="a regional basin may reach 75"):
        chart_of(shapely.box(-80, -10, 80, 10), SPHERE)


def test_chart_goes_back_and_forth_and_keeps_angles():
    water = degrees(lake(400e3), (179.5, -61.0))
    chart = chart_of(water, SPHERE)
    points = shapely.get_coordinates(water)
    places = chart.to_chart(points)
    back = chart.from_chart(places)
    assert np.abs(near_longitude(back[:, 0], 179.5) - points[:, 0]).max() < 1e-11
    assert np.abs(back[:, 1] - points[:, 1]).max() < 1e-11
    # One step east and one north in the chart: equal lengths on the sphere per stretch, at a right angle (conformal).
    step = 1.0
    here = chart.to_sphere(places) * EARTH_RADIUS
    east = (chart.to_sphere(places + [step, 0]) * EARTH_RADIUS - here) * chart.stretch(places)[:, None]
    north = (chart.to_sphere(places + [0, step]) * EARTH_RADIUS - here) * chart.stretch(places)[:, None]
    for vector in (east, north):
        assert np.linalg.norm(vector, axis=1) == pytest.approx(step, rel=1e-6)
    assert np.abs((east * north).sum(axis=1)).max() < 1e-6


def test_true_area_of_a_zone():
    """Area between two parallels and meridians: R^2 (sin b - sin a) dlon."""
    water = shapely.box(10, 40, 20, 50)
    chart = chart_of(water, SPHERE)
    exact = EARTH_RADIUS**2 * (np.sin(np.radians(50)) - np.sin(np.radians(40))) * np.radians(10)
    assert true_area(charted(water, SPHERE, chart), chart) == pytest.approx(exact, rel=1e-6)


def test_water_split_at_the_date_line_is_one():
    water = shapely.MultiPolygon([shapely.box(178, 50, 180, 52), shapely.box(-180, 50, -177, 52)])
    chart = chart_of(water, SPHERE)
    assert charted(water, SPHERE, chart).geom_type == "Polygon"
    west, south, east, north = box_of(water, SPHERE)
    assert (west % 360, south, east - west, north) == pytest.approx((178, 50, 5, 52))


def test_distance_to_a_round_coast():
    """Inside positive, outside negative, exact against the circle up to the sagitta of its segments."""
    water = shapely.Polygon(ring((0, 0), 1000.0, corners=720))
    places = np.random.default_rng(5).uniform(-1500, 1500, (500, 2))
    distance, foot = true_shoreline(water, 20.0).nearest(places)
    assert np.abs(distance - (1000 - np.hypot(*places.T))).max() < 0.05
    assert np.hypot(*(places - foot).T) == pytest.approx(np.abs(distance))


def test_side_of_the_coast_at_corners():
    """Random places against shapely's own answer, near the corners of a star with islands."""
    star = shapely.Polygon(ring((0, 0), 100.0, 5, 0.6, 10), [ring((0, 0), 10.0, corners=3)])
    places = np.random.default_rng(8).uniform(-170, 170, (4000, 2))
    distance, _ = true_shoreline(star, 1.0).nearest(places)
    assert np.array_equal(distance > 0, shapely.contains_xy(star, places))


def test_smoothed_coast_forgets_what_is_below_the_spacing():
    """Waves of a quarter spacing vanish, a circle of ten spacings keeps its radius, an island below one is gone."""
    h = 100.0
    water = shapely.Polygon(ring((0, 0), 10 * h, 200, 0.012, 4000), [ring((0, 0), 0.3 * h)])
    coast = smoothed_shoreline(water, lambda p: np.full(len(p), h), h)
    reach = np.hypot(*coast.start.T)
    assert reach.min() > 9.7 * h and reach.max() < 10.1 * h
    assert np.ptp(reach) < 0.02 * h


def test_no_coast_is_left_of_a_pond_below_the_spacing():
    assert smoothed_shoreline(shapely.Polygon(ring((0, 0), 10.0)), lambda p: np.full(len(p), 100.0), 100.0) is None
