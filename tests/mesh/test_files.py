"""Mesh files: the same numbers back, readable by others, refused when damaged.

Sources: UGRID Conventions 1.0 and CF Conventions 1.11, judged by programs of others: ugrid-checker, compliance-checker, xugrid.
compliance-checker knows no cf_role but those of discrete sampling, so its lines about cf_role are false alarms.
"""

import subprocess
import sys
from dataclasses import fields, replace
from pathlib import Path

import netCDF4
import numpy as np
import pytest
import xarray
import xugrid
from waters import degrees, lake

from swe.constants import EARTH_RADIUS
from swe.errors import FileError, InputError
from swe.mesh.depth import ConstantBed
from swe.mesh.files import CONVENTIONS, define_mesh, read_mesh, write_mesh
from swe.mesh.generate import generate
from swe.mesh.lattice import periodic_hexagons
from swe.mesh.restrict import restrict
from swe.mesh.spacing import Constant
from swe.mesh.surface import Plane, Sphere
from swe.mesh.topology import with_depth

TITLE = "Mesh of an invented lake"
ABOUT = {
    "institution": "Invented Institute",
    "source": "generated",
    "history": "made by a test",
    "references": "none",
    "comment": "-",
}


@pytest.fixture(scope="module", params=["plane", "sphere"])
def mesh(request):
    water, surface = (lake(), Plane()) if request.param == "plane" else (degrees(lake(), (-179.98, 61.0)), Sphere(EARTH_RADIUS))
    made, _ = generate(water, surface, Constant(2000.0), ConstantBed(30.0), growth=0.1, least_depth=1.0, sweeps=10, seed=2)
    return with_depth(made, 20 + np.arange(made.n_faces) / 7)


@pytest.fixture(scope="module")
def path(mesh, tmp_path_factory):
    path = tmp_path_factory.mktemp("mesh") / "lake.nc"
    write_mesh(path, mesh, TITLE, ABOUT)
    return path


def same(first, second):
    for item in fields(first):
        a, b = getattr(first, item.name), getattr(second, item.name)
        if isinstance(a, np.ndarray):
            assert a.dtype == b.dtype and a.shape == b.shape and a.tobytes() == b.tobytes(), item.name
        else:
            assert a == b and type(a) is type(b), item.name
    assert first.checksum() == second.checksum()


def test_every_number_comes_back(mesh, path):
    same(mesh, read_mesh(path))


def test_a_periodic_mesh_without_border_and_a_part_of_a_mesh_come_back(mesh, tmp_path):
    for number, other in enumerate((periodic_hexagons(4, 6, 100.0), restrict(mesh, np.arange(40)))):
        write_mesh(tmp_path / f"{number}.nc", other, TITLE)
        same(other, read_mesh(tmp_path / f"{number}.nc"))


def test_ugrid_checker_finds_nothing(path):
    done = subprocess.run([Path(sys.executable).parent / "ugrid-checker", path], capture_output=True, text=True)
    assert "No problems found" in done.stdout, done.stdout


def test_cf_checker_finds_nothing_but_its_false_alarms(path):
    command = [Path(sys.executable).parent / "compliance-checker", "-t", "cf:1.11", path]
    done = subprocess.run(command, capture_output=True, text=True)
    said = [line for line in done.stdout.splitlines() if line.startswith("* ")]
    assert "Compliance Checker Report" in done.stdout
    assert [line for line in said if "cf_role" not in line] == [], done.stdout


def test_an_independent_reader_finds_faces_of_positive_area(mesh, path):
    with xarray.open_dataset(path) as dataset:
        grid = xugrid.Ugrid2d.from_dataset(dataset)
        assert dataset.attrs["Conventions"] == CONVENTIONS and dataset.attrs["title"] == TITLE
        assert dataset["depth"].attrs["location"] == "face" and dataset["depth"].attrs["positive"] == "down"
        assert dataset["depth"].values == pytest.approx(mesh.depth)
    assert grid.n_face == mesh.n_faces and grid.n_edge == mesh.n_edges and grid.n_node == mesh.n_nodes
    if not mesh.spherical:
        assert grid.area == pytest.approx(mesh.face_area, rel=1e-9)
    else:
        # degrees east of the date line lie apart by 360 from those west of it: only faces on one side
        lon = grid.node_x[
            np.where(grid.face_node_connectivity < 0, grid.face_node_connectivity[:, :1], grid.face_node_connectivity)
        ]
        one_side = np.ptp(lon, axis=1) < 180
        square = 111.19e3**2 * np.cos(np.radians(61))
        assert grid.area[one_side] * square == pytest.approx(mesh.face_area[one_side], rel=0.03)
        assert one_side.any() and not one_side.all()


def test_coordinates_are_those_of_the_mesh(mesh, path):
    with netCDF4.Dataset(path) as dataset:
        for place in ("face", "edge", "node"):
            xyz = getattr(mesh, f"{place}_xyz")
            if mesh.spherical:
                lon, lat = (np.radians(dataset[f"{place}_{axis}"][:]) for axis in ("lon", "lat"))
                direction = np.column_stack([np.cos(lat) * np.cos(lon), np.cos(lat) * np.sin(lon), np.sin(lat)])
                assert np.abs(direction - xyz / np.linalg.norm(xyz, axis=1)[:, None]).max() < 1e-15 * 4
            else:
                assert np.array_equal(dataset[f"{place}_x"][:], xyz[:, 0]) and np.array_equal(dataset[f"{place}_y"][:], xyz[:, 1])


def test_the_topology_part_alone_for_other_files(mesh, tmp_path):
    """Data on faces and edges beside it pass the checker as well."""
    with netCDF4.Dataset(tmp_path / "other.nc", "w") as dataset:
        dataset.Conventions = CONVENTIONS
        places = define_mesh(dataset, mesh)
        for place in ("face", "edge", "node"):
            data = dataset.createVariable(f"data_{place}", "f4", (place,))
            data.setncatts(places.attributes(place) | {"long_name": "data", "units": "m"})
            data[:] = 1.0
        assert "kite_area" not in dataset.variables
    done = subprocess.run([Path(sys.executable).parent / "ugrid-checker", tmp_path / "other.nc"], capture_output=True, text=True)
    assert "No problems found" in done.stdout, done.stdout


def refused(kind, path):
    with pytest.raises(kind) as caught:
        read_mesh(path)
    assert str(caught.value).startswith(str(path)) and "\n" not in str(caught.value)
    return str(caught.value)


def test_missing_file(tmp_path):
    assert "no such mesh file" in refused(FileError, tmp_path / "none.nc")


def test_file_cut_short(path, tmp_path):
    cut = tmp_path / "cut.nc"
    cut.write_bytes(path.read_bytes()[:-5000])
    assert "cut short" in refused(FileError, cut)


def test_file_of_another_kind(tmp_path):
    text = tmp_path / "text.nc"
    text.write_text("a mesh")
    assert "not a readable netCDF file" in refused(FileError, text)
    foreign = tmp_path / "foreign.nc"
    with netCDF4.Dataset(foreign, "w") as dataset:
        dataset.createDimension("x", 3)
    assert "not a mesh file of this program: mesh, face_xyz, node_xyz, edge_xyz and 19 more missing" in refused(
        InputError, foreign
    )


def test_altered_number(path, tmp_path):
    copy = tmp_path / "copy.nc"
    copy.write_bytes(path.read_bytes())
    with netCDF4.Dataset(copy, "a") as dataset:
        dataset["depth"][3] += 1e-9
    assert "altered" in refused(FileError, copy)


def test_file_without_one_array(mesh, path, tmp_path):
    copy = tmp_path / "copy.nc"
    copy.write_bytes(path.read_bytes())
    with netCDF4.Dataset(copy, "a") as dataset:
        dataset.renameVariable("kite_area", "other")
    assert "kite_area missing" in refused(InputError, copy)


def test_a_failed_write_leaves_the_old_file(mesh, tmp_path):
    path = tmp_path / "lake.nc"
    write_mesh(path, mesh, TITLE)
    before = path.read_bytes()
    with pytest.raises(TypeError):
        write_mesh(path, mesh, TITLE, {"comment": object()})
    assert path.read_bytes() == before and list(tmp_path.iterdir()) == [path]
    write_mesh(path, replace(mesh, depth=mesh.depth + 1), TITLE)
    assert np.array_equal(read_mesh(path).depth, mesh.depth + 1)


def test_folder_that_is_not_there(mesh, tmp_path):
    with pytest.raises(FileError, match="cannot be written"):
        write_mesh(tmp_path / "none" / "lake.nc", mesh, TITLE)
