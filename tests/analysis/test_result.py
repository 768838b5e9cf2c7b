"""Reading results: values, names, files that another process writes, damaged files."""

import subprocess
import sys
from pathlib import Path

import netCDF4
import numpy as np
import pytest
from analysis.synthetic_result import BEGIN, fields_at, plane_basin, sphere_basin, write_result

from swe.analysis.basin import unwrapped
from swe.analysis.opening import look
from swe.analysis.result import CURRENTS, read_result
from swe.errors import FileError
from swe.output.catalogue import ledger_quantities, mesh_quantities, station_quantities

ROOT = Path(__file__).parents[2]


@pytest.mark.parametrize("basin", [plane_basin, sphere_basin])
def test_records_come_back(tmp_path, basin):
    mesh = basin()
    result = read_result(write_result(tmp_path, mesh))
    for k in (0, 4):
        level, _, first, second = fields_at(mesh, k)
        assert np.array_equal(result.level(k), level)
        assert np.array_equal(result.current(k), np.column_stack([first, second]))
    assert result.begin == np.datetime64(BEGIN)
    assert result.times[-1] - result.times[0] == np.timedelta64(4, "h")
    assert np.array_equal(result.basin.depth, mesh.depth)
    assert result.basin.area.sum() == pytest.approx(mesh.face_area.sum())


@pytest.mark.parametrize("spherical", [True, False])
def test_names_are_those_of_the_catalogue(spherical):
    """The reader may not import the writer's room; this test holds the two together."""
    on_mesh, at_stations = mesh_quantities(spherical, "mean_sea_level"), station_quantities(spherical, "mean_sea_level")
    assert {"level", "depth", *CURRENTS[spherical]} <= set(at_stations)
    extremes = {f"{name}{end}" for name in ("highest_level", "lowest_level", "strongest_current") for end in ("", "_time")}
    assert {"level", "depth", *CURRENTS[spherical]} | extremes <= set(on_mesh)
    wanted = {"mass_anomaly", "mass_drift", "kinetic_energy", "potential_energy", "potential_enstrophy", "mismatch", "time_error"}
    assert wanted | {"products", "repeats"} <= set(ledger_quantities())


def test_basin_across_the_date_line_stays_in_one_piece(tmp_path):
    result = read_result(write_result(tmp_path, sphere_basin()))
    west, _, east, _ = result.basin.box
    assert east - west < 3.0
    assert (result.stations.places[:, 0] > west).all() and (result.stations.places[:, 0] < east).all()


def test_unwrapped():
    assert unwrapped(np.array([-179.0, 179.0, 361.0]), 180.0) == pytest.approx([181.0, 179.0, 1.0])
    assert unwrapped(np.array([359.0, 1.0]), 0.0) == pytest.approx([-1.0, 1.0])


def test_coast_and_spacing_of_a_lattice(tmp_path):
    """Regular hexagons of spacing s have area s^2 sqrt(3)/2; border edges of the mesh are the coast."""
    mesh = plane_basin()
    basin = read_result(write_result(tmp_path, mesh)).basin
    assert basin.spacing == pytest.approx(2000.0, rel=1e-9)
    wanted = np.sort(mesh.edge_nodes[mesh.n_inner :], axis=1)
    found = np.sort(basin.coast, axis=1)
    assert sorted(map(tuple, wanted)) == sorted(map(tuple, found))
    assert basin.polygons.shape == (*mesh.face_nodes.shape, 2)


def test_highest_from_records_agrees_with_that_of_all_steps(tmp_path):
    mesh = plane_basin()
    watched = read_result(write_result(tmp_path / "a", mesh)).highest()
    seen = read_result(write_result(tmp_path / "b", mesh, names=("level",))).highest()
    assert np.array_equal(watched.value, seen.value) and np.array_equal(watched.time, seen.time)
    assert watched.origin.startswith("over all steps") and seen.origin == "of 5 records"


WRITER = """
import sys, time, netCDF4
with netCDF4.Dataset(sys.argv[1], "w") as file:
    file.createDimension("time", None)
    value = file.createVariable("value", "f8", ("time",))
    value[0] = 7.0
    file.sync()
    print("ready", flush=True)
    sys.stdin.read()
"""


@pytest.mark.parametrize("locking", ["FALSE", "TRUE"])
def test_file_held_open_by_a_writer_can_be_read(tmp_path, locking):
    """Whatever the writer does about HDF5 locks, and whether or not this process has turned them off."""
    import os

    path = tmp_path / "held.nc"
    environment = {**os.environ, "HDF5_USE_FILE_LOCKING": locking}
    writer = subprocess.Popen(
        [sys.executable, "-c", WRITER, str(path)], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True, env=environment
    )
    try:
        assert writer.stdout.readline() == "ready\n"
        assert look(path, lambda file: float(file["value"][0])) == 7.0
        reader = f"from swe.analysis.opening import look; assert look({str(path)!r}, lambda file: float(file['value'][0])) == 7.0"
        early = "import netCDF4; netCDF4.Dataset('x', 'w', diskless=True).close(); " + reader  # locks on: the copy is read
        for code in (reader, early):
            subprocess.run(
                [sys.executable, "-c", code], cwd=ROOT, check=True, env={**os.environ, "HDF5_USE_FILE_LOCKING": "TRUE"}
            )
    finally:
        writer.communicate()


def test_damaged_file_is_named(tmp_path, monkeypatch):
    monkeypatch.setattr("swe.analysis.opening.PAUSE", 0.0)
    folder = write_result(tmp_path, plane_basin())
    data = (folder / "fields.nc").read_bytes()
    (folder / "fields.nc").write_bytes(data[: len(data) // 3])
    with pytest.raises(FileError, match="fields.nc: cannot be read as netCDF"):
        read_result(folder)


def test_damaged_summary_is_named(tmp_path):
    folder = write_result(tmp_path, plane_basin())
    (folder / "summary.json").write_text("{")
    with pytest.raises(FileError, match="summary.json: cannot be read as JSON"):
        read_result(folder)


def test_torn_file_is_looked_at_again(tmp_path, monkeypatch):
    monkeypatch.setattr("swe.analysis.opening.PAUSE", 0.0)
    path = tmp_path / "file.nc"
    netCDF4.Dataset(path, "w").close()
    looks = []

    def reader(_):
        looks.append(1)
        if len(looks) < 3:
            raise RuntimeError("torn")
        return "whole"

    assert look(path, reader) == "whole" and len(looks) == 3
