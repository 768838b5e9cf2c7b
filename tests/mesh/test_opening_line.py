"""Open boundaries of generated meshes: a row of outer faces beyond the line, and nowhere else."""

import json

import numpy as np
import pytest
import shapely

from swe.dynamics.opening import facing
from swe.errors import InputError
from swe.mesh.depth import ConstantBed
from swe.mesh.generate import generate
from swe.mesh.opening_line import OpenLine, read_line
from swe.mesh.spacing import Constant
from swe.mesh.surface import Plane, Sphere
from swe.mesh.topology import open_edges, still_edges

WATER = shapely.from_wkt("POLYGON((0 0, 40000 2000, 50000 20000, 30000 30000, 0 26000, 0 0))")
MOUTH = OpenLine("mouth", shapely.from_wkt("LINESTRING(0 0, 0 26000)"))


def made(water=WATER, surface=None, lines=(MOUTH,), spacing=2000.0):
    return generate(
        water,
        surface or Plane(),
        Constant(spacing),
        ConstantBed(20.0),
        growth=0.15,
        least_depth=5.0,
        sweeps=30,
        seed=1,
        openings=lines,
    )[0]


def test_outer_faces_are_one_row_along_the_line():
    mesh = made()
    outer = mesh.face_xyz[mesh.face_outer]
    assert 11 <= len(outer) <= 16
    assert np.all((outer[:, 0] < 0.0) & (outer[:, 0] > -2000.0))
    edges, inner, beyond, sign = open_edges(mesh)
    assert np.array_equal(np.unique(beyond), np.flatnonzero(mesh.face_outer))
    assert not mesh.face_outer[inner].any()
    assert np.all(sign * mesh.edge_normal[edges, 0] < 0.0)  # out to sea is west
    assert mesh.edge_length[edges] @ np.abs(mesh.edge_normal[edges, 0]) == pytest.approx(26e3, rel=0.05)
    assert np.median(facing(mesh)) == pytest.approx(np.sqrt(3) / 2, abs=0.06)  # rows of hexagons lie along the line
    assert np.all(still_edges(mesh)[mesh.n_inner :])


def test_without_a_line_nothing_is_open():
    mesh = made(lines=())
    assert not mesh.face_outer.any() and open_edges(mesh)[0].size == 0 and facing(mesh).size == 0


def test_the_same_on_the_sphere():
    water = shapely.from_wkt("POLYGON((-30 50, -29.4 50, -29.4 50.3, -30 50.3, -30 50))")
    mesh = made(water, Sphere(6.37122e6), (OpenLine("west", shapely.from_wkt("LINESTRING(-30 50, -30 50.3)")),))
    longitude = np.degrees(np.arctan2(mesh.face_xyz[:, 1], mesh.face_xyz[:, 0]))
    assert 10 <= np.count_nonzero(mesh.face_outer) <= 20
    assert np.all(longitude[mesh.face_outer] < -30.0)


def test_a_line_away_from_the_water_is_refused():
    with pytest.raises(
        InputError, match="open boundary 'far': no face of the water lies along its line; draw it along the outline"
    ):
        made(lines=(OpenLine("far", shapely.from_wkt("LINESTRING(90000 0, 90000 9000)")),))


@pytest.mark.parametrize(
    "text, message",
    [
        ("no json", r"not GeoJSON"),
        (json.dumps({"type": "Point", "coordinates": [0, 0]}), r"holds Point; an open boundary is a LineString"),
        (json.dumps({"type": "FeatureCollection", "features": []}), r"holds nothing; an open boundary is a LineString"),
    ],
)
def test_mistakes_of_a_line_file(tmp_path, text, message):
    path = tmp_path / "mouth.geojson"
    path.write_text(text)
    with pytest.raises(InputError, match=message):
        read_line(path, "mouth")


def test_a_missing_line_file_is_named(tmp_path):
    with pytest.raises(InputError, match=r"mouth\.geojson: cannot be read"):
        read_line(tmp_path / "mouth.geojson", "mouth")


def test_lines_of_a_collection_are_one_boundary(tmp_path):
    path = tmp_path / "mouth.geojson"
    parts = [{"type": "LineString", "coordinates": [[0, a], [0, b]]} for a, b in ((0, 13000), (13000, 26000))]
    path.write_text(
        json.dumps(
            {"type": "FeatureCollection", "features": [{"type": "Feature", "properties": {}, "geometry": g} for g in parts]}
        )
    )
    assert read_line(path, "mouth").line.length == 26000.0
