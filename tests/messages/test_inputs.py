"""Inputs of a case that are wrong: coast, depth grid, mesh file, stations. All invented."""

import netCDF4
import numpy as np
import pytest
from cases import DEGREES, ON_THE_SPHERE, SHORE, WITH_GRID, call, write_case, write_coast, write_depth
from messages.refusals import refused

STATION = {"West": ("7.1", "55.05")}
READY = {
    "mesh.file": '"mesh.nc"',
    **dict.fromkeys(("basin.surface", "basin.coastline", "depth.constant", "depth.least", "mesh.spacing", "mesh.sweeps")),
}
"""Changes for a ready mesh."""


def cut(path, share=0.5):
    """Cut a file short."""
    content = path.read_bytes()
    path.write_bytes(content[: int(share * len(content))])


@pytest.fixture(scope="module")
def mesh(tmp_path_factory):
    """A mesh file of the lake."""
    folder = tmp_path_factory.mktemp("mesh")
    write_case(folder)
    done = call(folder, "mesh", "lake.toml", "--to", "mesh.nc")
    assert done.code == 0, done.err
    return (folder / "mesh.nc").read_bytes()


# ------------------------------------------------------------------------------------------ coast


def test_a_coastline_that_crosses_itself(tmp_path):
    write_case(tmp_path, shore=[(0, 0), (20e3, 10e3), (20e3, 0), (0, 10e3), (0, 0)])
    refused(tmp_path, 2, "coast.geojson: a coastline crosses itself", "[10000 5000]", "correct the rings there")


def test_a_coastline_that_is_not_geojson(tmp_path):
    write_case(tmp_path)
    (tmp_path / "coast.geojson").write_text('{"type": "Polygon", \n "coordinates"')
    refused(tmp_path, 2, "coast.geojson, line 2: not JSON", "give a GeoJSON file")


def test_a_coastline_with_longitude_and_latitude_swapped(tmp_path):
    swapped = [(lat, lon + 163.0) for lon, lat in DEGREES]
    write_case(tmp_path, ON_THE_SPHERE, STATION, swapped)
    refused(tmp_path, 2, "coast.geojson: position [55, 170]", "longitude and latitude look swapped; write the longitude first")


def test_a_lake_too_small_for_its_spacing(tmp_path):
    write_case(tmp_path, {"mesh.spacing": '"100 km"'})
    refused(tmp_path, 2, verbs=["run"])


# ------------------------------------------------------------------------------------------ depth grid


def test_land_everywhere(tmp_path):
    write_case(tmp_path, WITH_GRID)
    write_depth(tmp_path / "depth.nc", depth=-5.0)
    refused(tmp_path, 2, "depth.nc: depth has no water in the basin (greatest depth -5 m)", "attribute positive = down or up")


def test_shallower_than_the_least_depth_everywhere(tmp_path):
    write_case(tmp_path, WITH_GRID)
    write_depth(tmp_path / "depth.nc", depth=2.0)
    refused(tmp_path, 2, "depth.nc", "shallower than the least depth 5 m in the whole basin (deepest 2 m)", "unit", verbs=["run"])


def test_a_grid_that_does_not_cover_the_basin(tmp_path):
    write_case(tmp_path, WITH_GRID)
    write_depth(tmp_path / "depth.nc", x=(-2e3, 15e3))
    refused(
        tmp_path, 2, "depth.nc: does not cover the basin in the east: grid x -2000 to 15000", "basin x 0 to 20000", "larger grid"
    )


def test_a_grid_with_longitude_and_latitude_swapped(tmp_path):
    write_case(tmp_path, ON_THE_SPHERE | WITH_GRID, STATION, DEGREES)
    write_depth(tmp_path / "depth.nc", x=(54, 56), y=(6, 8), names=("lon", "lat"))
    refused(tmp_path, 2, "depth.nc: does not cover the basin, but would after swapping: longitude and latitude look swapped")


def test_a_grid_without_coordinates(tmp_path):
    write_case(tmp_path, WITH_GRID)
    write_depth(tmp_path / "depth.nc", names=("a", "b"))
    refused(tmp_path, 2, "depth.nc: no one-dimensional coordinates projection_x_coordinate (x) and ", "found a, b, depth")


def test_a_grid_of_the_other_surface(tmp_path):
    write_case(tmp_path, WITH_GRID)
    write_depth(tmp_path / "depth.nc", x=(6, 8), y=(54, 56), names=("lon", "lat"))
    refused(tmp_path, 2, "depth.nc: no one-dimensional coordinates", "check whether the basin is on a plane or a sphere")


@pytest.mark.parametrize("share", [0.02, 0.5, 0.95])
def test_a_grid_cut_short(share, tmp_path):
    write_case(tmp_path, WITH_GRID)
    write_depth(tmp_path / "depth.nc")
    cut(tmp_path / "depth.nc", share)
    refused(tmp_path, 2, "depth.nc: not a netCDF file, or cut short (", "fetch it again")


def test_a_grid_with_an_unknown_unit(tmp_path):
    write_case(tmp_path, WITH_GRID)
    write_depth(tmp_path / "depth.nc", attributes={"standard_name": "sea_floor_depth_below_geoid", "units": "fathom"})
    refused(tmp_path, 2, "depth.nc: unit 'fathom' of depth; allowed are m, ")


# ------------------------------------------------------------------------------------------ mesh file


@pytest.mark.parametrize("share", [0.02, 0.5, 0.99])
def test_a_mesh_cut_short(share, mesh, tmp_path):
    write_case(tmp_path, READY)
    (tmp_path / "mesh.nc").write_bytes(mesh)
    cut(tmp_path / "mesh.nc", share)
    refused(tmp_path, 5, "mesh.nc: not a readable netCDF file, or cut short (", "write the mesh again")


def test_a_mesh_that_is_no_mesh(tmp_path):
    write_case(tmp_path, READY)
    write_depth(tmp_path / "mesh.nc")
    refused(tmp_path, 2, "mesh.nc: not a mesh file of this program: mesh, face_xyz", "made by the mesh command")


def test_a_mesh_that_was_altered(mesh, tmp_path):
    write_case(tmp_path, READY)
    (tmp_path / "mesh.nc").write_bytes(mesh)
    with netCDF4.Dataset(tmp_path / "mesh.nc", "a") as data:
        data["depth"][7] = 19.0
    refused(tmp_path, 5, "mesh.nc: the arrays differ from the checksum stored with them", "write the mesh again")


def test_a_ready_mesh_is_not_built(mesh, tmp_path):
    write_case(tmp_path, READY)
    (tmp_path / "mesh.nc").write_bytes(mesh)
    done = call(tmp_path, "mesh", "lake.toml")
    assert done.code == 2 and "[mesh] file: the case names a ready mesh; there is nothing to build" in done.line


# ------------------------------------------------------------------------------------------ stations


def test_stations_on_land_are_all_told_with_their_lines(tmp_path):
    write_case(tmp_path, stations={"Hill": ('"12 km"', '"15 km"'), "Pier": ('"2 km"', '"5 km"'), "Far": ('"40 km"', '"5 km"')})
    said = refused(tmp_path, 2, "[station 1] name = 'Hill': 5,000 m from", "allowed is 1,000 m", "'Far': 20,000 m from", lines=2)
    assert all(
        line.startswith("lake.toml:") and line.endswith("correct its coordinates (x before y) or leave it out") for line in said
    )


def test_a_station_with_longitude_and_latitude_swapped(tmp_path):
    write_case(tmp_path, ON_THE_SPHERE, {"West": ("55.05", "7.1")}, DEGREES)
    refused(tmp_path, 2, "[station 1] name = 'West'", "longitude and latitude look swapped")


def test_a_station_on_land_beside_a_ready_mesh(mesh, tmp_path):
    write_case(tmp_path, READY, {"Hill": ('"2 km"', '"15 km"')})
    (tmp_path / "mesh.nc").write_bytes(mesh)
    refused(tmp_path, 2, "station 'Hill' at (2000, 15000): ", "from the nearest water; allowed is", "leave it out")


# ------------------------------------------------------------------------------------------ how many subdomains


def test_more_subdomains_than_the_faces_allow(tmp_path):
    write_case(tmp_path, {"subdomains.count": "100"})
    refused(
        tmp_path, 2, "100 subdomains for ", "faces: allowed are 1 to 28 (at least 8 faces each)", "use fewer", verbs=["check"]
    )
    done = call(tmp_path, "run", "lake.toml")
    assert done.code == 2 and "100 subdomains for a mesh of 230 faces: allowed are 1 to 28" in done.line
    done = call(tmp_path, "check", "lake.toml", "--ranks", "200")
    assert done.code == 2 and "100 subdomains for 200 ranks: every rank needs at least one" in done.line


def test_the_shore_of_the_tests_is_a_sound_one(tmp_path):
    """What the refusals above change is what is wrong with them."""
    write_case(tmp_path, WITH_GRID)
    write_coast(tmp_path / "coast.geojson", SHORE)
    write_depth(tmp_path / "depth.nc", slope=1e-3)
    assert call(tmp_path, "check", "lake.toml").code == 0
    assert np.isfinite(netCDF4.Dataset(tmp_path / "depth.nc")["depth"][:]).all()
