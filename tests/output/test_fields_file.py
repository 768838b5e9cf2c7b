"""fields.nc: conventions by two public checkers and two public readers, contents, resuming, crashes, trouble."""

import dataclasses
import os
import subprocess

import netCDF4
import numpy as np
import pytest
import xarray
from output import output_examples
from output.output_examples import START, attributes, compliance, extremes, plane, python, sphere, state, tool, write_fields

from swe import constants
from swe.errors import FileError, InputError
from swe.output.catalogue import DATUMS, velocity_names
from swe.output.fields import FieldsFile

FALSE_ALARMS = (
    # UGRID roles are outside the list of CF 9.5, which speaks of discrete sampling geometries (CF 1.11 includes UGRID, 5.9).
    "mesh_topology is not a valid cf_role value",
    "face_node_connectivity is not a valid cf_role value",
    "edge_node_connectivity is not a valid cf_role value",
    "face_edge_connectivity is not a valid cf_role value",
    "edge_face_connectivity is not a valid cf_role value",
    "There may only be one variable containing the cf_role attribute. Currently the following variables have cf_role attributes: "
    "['mesh', 'face_nodes', 'edge_nodes', 'face_edges', 'edge_faces']",
    # A boundary variable has one dimension more than its variable (CF 7.1): one for a scalar coordinate.
    "Boundary variable window_bounds specified by window should have at least two dimensions",
)

TIMES = [0.0, 90.0, 240.0]


@pytest.fixture(scope="module", params=["plane", "sphere"])
def example(request, tmp_path_factory):
    mesh = {"plane": plane, "sphere": sphere}[request.param]()
    return mesh, write_fields(tmp_path_factory.mktemp(request.param) / "fields.nc", mesh, TIMES)


def test_cf_checker_finds_nothing_but_known_false_alarms(example):
    said = compliance(example[1])
    assert [line for line in said if not any(alarm in line for alarm in FALSE_ALARMS)] == []
    assert all(any(alarm in line for line in said) for alarm in FALSE_ALARMS)  # none of the list is idle


@pytest.mark.parametrize("datum", sorted(set(DATUMS) - {"mean_sea_level"}))
def test_cf_checker_agrees_with_every_datum(datum, tmp_path):
    said = compliance(write_fields(tmp_path / "fields.nc", plane(), TIMES, datum=datum))
    assert [line for line in said if not any(alarm in line for alarm in FALSE_ALARMS)] == []


def test_cf_checker_would_find_a_wrong_name_and_unit(tmp_path):
    path = write_fields(tmp_path / "fields.nc", plane(), TIMES)
    with netCDF4.Dataset(path, "a") as dataset:
        dataset["level"].standard_name = "sea_surface_hight"
        dataset["x_velocity"].units = "kg"
    said = " ".join(compliance(path))
    assert "sea_surface_hight" in said and "x_velocity" in said


def test_ugrid_checker_finds_nothing(example):
    done = subprocess.run([tool("ugrid-checker"), str(example[1])], capture_output=True, text=True, timeout=60)
    assert done.returncode == 0 and "No problems found" in done.stdout, done.stdout


def test_a_general_reader_opens_it_lazily_and_understands_time(example):
    mesh, path = example
    with xarray.open_dataset(path) as dataset:
        assert not dataset["level"].variable._in_memory
        assert list(dataset["level"].sizes) == ["time", "face"]
        first = np.datetime64(START.replace(tzinfo=None), "ns")
        assert (dataset["time"].values == first + np.array(TIMES).astype("timedelta64[s]")).all()
        assert (dataset["highest_level_time"].values == first + np.timedelta64(120, "s")).all()


@pytest.mark.filterwarnings("ignore:numba is not installed")
def test_a_mesh_reader_finds_the_same_mesh_with_faces_counterclockwise(example):
    import xugrid

    mesh, path = example
    with xugrid.open_dataset(path) as dataset:
        grid = dataset.ugrid.grid
        assert (grid.n_face, grid.n_edge, grid.n_node) == (mesh.n_faces, mesh.n_edges, mesh.n_nodes)
        assert (grid.area > 0).all()  # clockwise faces would be negative
        if not mesh.spherical:
            assert np.allclose(grid.area, mesh.face_area, rtol=1e-12)
        assert dataset["level"].ugrid.grid is grid or dataset["level"].ugrid.grid.equals(grid)


def test_records_are_what_was_given_bit_for_bit(example):
    mesh, path = example
    names = ("level", "normal_velocity", *velocity_names(mesh.spherical))
    with netCDF4.Dataset(path) as dataset:
        assert dataset.dimensions["time"].isunlimited()
        for number, time in enumerate(TIMES):
            for name, column in zip(names, np.array(state(mesh, time), dtype=object), strict=True):
                assert np.array_equal(dataset[name][number], column.astype(float)), name
        assert np.array_equal(dataset["depth"][:], mesh.depth)
        assert np.array_equal(dataset["face_area"][:], mesh.face_area)


def test_extremes_are_tied_to_their_window(example):
    mesh, path = example
    wanted = extremes(mesh, 240.0)
    with netCDF4.Dataset(path) as dataset:
        assert np.array_equal(dataset["strongest_current"][:], wanted.strongest)
        assert np.array_equal(dataset["lowest_level_time"][:], wanted.lowest_time)
        assert dataset["highest_level"].cell_methods == "area: mean window: maximum"
        assert "window" in dataset["highest_level"].coordinates.split()
        assert list(dataset[dataset["window"].bounds][:]) == [0.0, 240.0] and dataset["window"][...] == 240.0


def test_the_file_says_what_it_is(example):
    mesh, path = example
    with netCDF4.Dataset(path) as dataset:
        assert dataset.Conventions == "CF-1.11, UGRID-1.0"
        assert dataset.comment == constants.CAUTION
        assert dataset.mesh_checksum == mesh.checksum()
        assert dataset.case_text == '[case]\nname = "bay"\n'
        assert dataset.title and dataset.history and "swe 0" in dataset.source
        assert "institution" not in dataset.ncattrs()  # ours to know, not to invent


def test_single_precision_and_choice_of_names(tmp_path):
    mesh = plane()
    path = write_fields(tmp_path / "fields.nc", mesh, TIMES, names=("level",), precision="single")
    with FieldsFile.open_for_append(path, 1e9) as file:
        file.write_extremes(extremes(mesh, 240.0))  # not chosen, so not written
    with netCDF4.Dataset(path) as dataset:
        assert dataset["level"].dtype == np.float32 and dataset["depth"].dtype == np.float64
        assert not {"x_velocity", "normal_velocity", "highest_level"} & set(dataset.variables)
        assert np.array_equal(dataset["level"][2], state(mesh, 240.0)[0].astype(np.float32))


def test_an_unknown_field_is_refused_with_those_allowed_and_makes_no_file(tmp_path):
    with pytest.raises(InputError, match="'vorticity' is not known; allowed are level, velocity, normal_velocity, extremes"):
        write_fields(tmp_path / "fields.nc", plane(), [], names=("level", "vorticity"))
    assert list(tmp_path.iterdir()) == []


def test_resuming_drops_later_records_and_equals_an_unbroken_file(tmp_path):
    mesh = plane()
    whole = write_fields(tmp_path / "whole.nc", mesh, TIMES)
    path = write_fields(tmp_path / "fields.nc", mesh, [0.0, 90.0, 100.0, 200.0])
    with FieldsFile.open_for_append(path, 90.0) as file:
        assert (file.dropped, file.count) == (2, 2)
        file.append(240.0, *state(mesh, 240.0))
        file.write_extremes(extremes(mesh, 240.0))
    with netCDF4.Dataset(whole) as one, netCDF4.Dataset(path) as other:
        assert list(one.variables) == list(other.variables) and list(one.dimensions) == list(other.dimensions)
        for name, variable in one.variables.items():
            twin = other[name]
            assert variable.ncattrs() == twin.ncattrs() and variable.chunking() == twin.chunking(), name
            assert all(np.array_equal(variable.getncattr(key), twin.getncattr(key)) for key in variable.ncattrs()), name
            assert np.ma.allequal(variable[...], twin[...]) and variable.shape == twin.shape, name
        assert other.history.splitlines()[-1].endswith("at 90 s, 2 later records dropped")
    assert sorted(item.name for item in tmp_path.iterdir()) == ["fields.nc", "whole.nc"]


def test_resuming_without_later_records_does_not_copy(tmp_path):
    path = write_fields(tmp_path / "fields.nc", plane(), TIMES)
    before = os.stat(path).st_ino
    with FieldsFile.open_for_append(path, 1e9) as file:
        assert (file.dropped, file.count) == (0, 3)
    assert os.stat(path).st_ino == before


def test_resuming_before_all_records_leaves_none(tmp_path):
    mesh = plane()
    path = write_fields(tmp_path / "fields.nc", mesh, TIMES)
    with FieldsFile.open_for_append(path, -1.0) as file:
        assert file.count == 0
        file.append(5.0, *state(mesh, 5.0))
    with netCDF4.Dataset(path) as dataset:
        assert list(dataset["time"][:]) == [5.0]


def test_time_must_increase(tmp_path):
    mesh = plane()
    path = tmp_path / "fields.nc"
    with FieldsFile.create(path, mesh, ("level",), START, attributes(mesh), "geoid", "double") as file:
        file.append(10.0, *state(mesh, 10.0))
        with pytest.raises(FileError, match="cannot follow the last one at 10 s"):
            file.append(10.0, *state(mesh, 10.0))
        file.append(20.0, *state(mesh, 20.0))
        assert file.count == 2


def test_arrays_of_another_mesh_are_refused(tmp_path):
    mesh = plane()
    with FieldsFile.create(tmp_path / "f.nc", mesh, ("level", "extremes"), START, attributes(mesh), "geoid", "double") as file:
        with pytest.raises(ValueError, match="level has shape"):
            file.append(0.0, *(column[:-1] for column in state(mesh, 0.0)))
        with pytest.raises(ValueError, match="highest_level"):
            file.write_extremes(dataclasses.replace(extremes(mesh, 1.0), highest=np.zeros(3)))


@pytest.mark.parametrize("content", [None, b"", b"CDF nonsense", "classic"], ids=["missing", "empty", "nonsense", "foreign"])
def test_resuming_from_no_fields_file_is_one_clear_line(content, tmp_path):
    path = tmp_path / "fields.nc"
    if content == "classic":
        netCDF4.Dataset(path, "w").close()
    elif content is not None:
        path.write_bytes(content)
    with pytest.raises(FileError) as failure:
        FieldsFile.open_for_append(path, 0.0)
    assert str(path) in str(failure.value) and "anew" in str(failure.value) and "\n" not in str(failure.value)


WRITER = """
import sys
from pathlib import Path
from output.output_examples import *
mesh = plane()
file = FieldsFile.create(Path(sys.argv[1]), mesh, CHOICES, START, attributes(mesh), "geoid", "double")
number = 0
while True:
    file.append(60.0 * number, *state(mesh, 60.0 * number))
    print(number, flush=True)
    number += 1
"""


@pytest.mark.parametrize("records", [1, 4, 9])
def test_a_killed_writer_leaves_every_synced_record(records, tmp_path):
    path, mesh = tmp_path / "fields.nc", plane()
    writer = output_examples.start(WRITER, path)
    for _ in range(records):
        writer.stdout.readline()
    told = records + len(output_examples.kill(writer))
    with netCDF4.Dataset(path) as dataset:
        assert dataset["time"].size >= told
        for number in range(told):
            assert dataset["time"][number] == 60.0 * number
            assert np.array_equal(dataset["normal_velocity"][number], state(mesh, 60.0 * number)[1])
    with FieldsFile.open_for_append(path, 60.0 * (told - 1)) as file:  # and the run can go on
        file.append(60.0 * told, *state(mesh, 60.0 * told))
        assert file.count == told + 1


def test_a_running_result_can_be_looked_at_and_the_viewer_does_not_disturb_the_writer(tmp_path):
    done = python(
        """
import subprocess, sys, os
from pathlib import Path
from output.output_examples import *
mesh, path = plane(), Path(sys.argv[1])
file = FieldsFile.create(path, mesh, CHOICES, START, attributes(mesh), "geoid", "double")
file.append(0.0, *state(mesh, 0.0))
viewer = 'import netCDF4, sys; d = netCDF4.Dataset(sys.argv[1]); print(d["time"].size, flush=True); sys.stdin.read()'
clean = {key: value for key, value in os.environ.items() if key != "HDF5_USE_FILE_LOCKING"}
pipes = dict(stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True)
with subprocess.Popen([sys.executable, "-c", viewer, path], env=clean, **pipes) as other:
    print(other.stdout.readline().strip())
    file.append(60.0, *state(mesh, 60.0))
    file.close()
    FieldsFile.open_for_append(path, 60.0).close()
    other.stdin.close()
print("written")
""",
        tmp_path / "fields.nc",
    )
    assert done.stdout.split() == ["1", "written"], done.stderr


def test_a_full_disk_is_one_clear_line_and_earlier_records_stay(tmp_path):
    """A limit of file size stands for the full disk: the write fails in the middle of the file library either way."""
    path = tmp_path / "fields.nc"
    done = python(
        """
import resource, sys
from pathlib import Path
from output.output_examples import *
from swe.errors import FileError, InputError
mesh, path = plane(), Path(sys.argv[1])
number = 0
try:
    with FieldsFile.create(path, mesh, CHOICES, START, attributes(mesh), "geoid", "double") as file:
        file.append(0.0, *state(mesh, 0.0))
        file.append(1.0, *state(mesh, 1.0))
        resource.setrlimit(resource.RLIMIT_FSIZE, (path.stat().st_size + 20_000, resource.RLIM_INFINITY))
        for number in range(2, 100):
            file.append(float(number), *state(mesh, float(number)))
except FileError as failure:
    print(number)
    print(failure)
""",
        path,
    )
    number, line = done.stdout.splitlines()
    assert done.returncode == 0 and int(number) < 99, done.stderr
    assert line.startswith(f"{path}: writing the records from ") and "failed" in line and "free space" in line


def test_a_folder_that_is_not_there_or_is_a_file(tmp_path):
    mesh = plane()
    (tmp_path / "file").write_text("here first")
    for place in (tmp_path / "absent" / "fields.nc", tmp_path / "file" / "fields.nc", "/proc/fields.nc"):
        with pytest.raises(FileError, match="making the file failed"):
            FieldsFile.create(place, mesh, ("level",), START, attributes(mesh), "geoid", "double")
