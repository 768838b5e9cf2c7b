"""What a finished run leaves behind: files, conventions, the summary, the report, the references. Plane and sphere."""

import json
import math
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

import netCDF4
import numpy as np
import pytest
import xarray
from cases import DEGREES, EXPLICIT, ON_THE_SPHERE, ONE_STAGE, SHORE, call, surroundings, write_case
from output.output_examples import compliance, tool
from output.test_fields_file import FALSE_ALARMS
from run.results import summary

from swe.case.reading import read_case
from swe.constants import CAUTION
from swe.mesh.files import read_mesh
from swe.output.summary import REQUIRED

KINDS = {"plane": ({}, None, SHORE), "sphere": (ON_THE_SPHERE, {"West": ("7.05", "55.05"), "East": ("7.28", "55.05")}, DEGREES)}
FILES = ("fields.nc", "stations.nc", "ledger.nc")


@dataclass(frozen=True)
class Example:
    folder: Path
    case: Path

    @property
    def result(self) -> Path:
        return self.folder / "results" / "lake"


@pytest.fixture(scope="module", params=KINDS)
def example(request, tmp_path_factory):
    folder = tmp_path_factory.mktemp(request.param)
    changes, stations, shore = KINDS[request.param]
    case = write_case(folder, changes, stations, shore)
    done = call(folder, "run", "lake.toml")
    assert done.code == 0 and done.err == "", done.err
    assert done.out.splitlines()[-1].startswith("done: 0.0416667 d in ") and done.out.endswith("results in results/lake\n")
    return Example(folder, case)


def test_every_file_is_there_and_no_other(example):
    found = sorted(str(path.relative_to(example.result)) for path in example.result.rglob("*") if path.is_file())
    states = [f"checkpoints/step-{step:012d}.checkpoint" for step in (24, 30)]
    assert found == sorted([*FILES, "mesh.nc", "summary.json", *states])


def test_the_summary_says_all_that_it_must_and_means_it(example):
    said = json.loads((example.result / "summary.json").read_text())
    assert set(REQUIRED) <= set(said) and said["caution"] == CAUTION
    assert (said["case"], said["finished"], said["ranks"], said["subdomains"]) == ("lake", True, 1, 3)
    assert (said["steps"], said["step_seconds"], said["model_seconds"]) == (30, 120.0, 3600.0)
    assert (said["stepper"], said["operator"], said["action"]) == ("two-stage", "wave", "lanczos")
    mesh = read_mesh(example.result / "mesh.nc")
    assert (said["faces"], said["edges"], said["mesh_checksum"]) == (mesh.n_faces, mesh.n_edges, mesh.checksum())
    assert 1 <= said["overlap"] <= 30 and 1 < said["z"] < 20
    assert 0 < said["wall_seconds"] < 600
    assert math.isclose(said["simulated_over_real"], 3600.0 / said["wall_seconds"])
    assert abs(said["mass_drift_relative"]) < 1e-15
    assert 0 < said["largest_mismatch"] <= 1e-4 and said["repeats"] == 0
    assert said["largest_mismatch"] <= said["localisation_error_metres"] <= 30 * said["largest_mismatch"]
    assert said["products"] > 30 * 3 and said["messages"] == said["bytes_sent"] == 0  # three subdomains, one rank
    assert 20e6 < said["peak_memory_bytes"] < 4e9
    assert sum(said["faces_by_rank"]) == mesh.n_faces and said["faces_held_by_rank"][0] >= mesh.n_faces
    (phases,) = said["phases"]
    assert {"set-up", "stages", "exchange", "agreement", "output"} <= set(phases)
    assert 0 <= sum(phases.values()) <= 1.1 * said["wall_seconds"]
    assert {"swe", "python", "numpy", "mpi", "netCDF", "HDF5"} <= set(said["versions"])
    assert said["not_finite"] == []


def test_the_settings_of_the_summary_are_a_case_that_runs_the_same(example, tmp_path):
    (tmp_path / "lake.toml").write_text(summary(example.result)["settings"])
    assert read_case(tmp_path / "lake.toml") == read_case(example.case)


def test_every_file_tells_what_it_is(example):
    mesh = read_mesh(example.result / "mesh.nc")
    for name in FILES:
        with netCDF4.Dataset(example.result / name) as data:
            assert data.title == "Tarrow Lake, a test"
            assert data.comment == CAUTION
            assert data.case_text == example.case.read_text()
            assert data.mesh_checksum == mesh.checksum()
            assert data.references.count("\n") > 5 and "Ringler" in data.references
            assert data.history.endswith("written by swe 0.1.0") and data.source.startswith("swe 0.1.0: ")


def test_times_are_those_of_the_case(example):
    for name, minutes in (("fields.nc", 20), ("stations.nc", 4), ("ledger.nc", 4)):
        with xarray.open_dataset(example.result / name) as data:
            wanted = np.datetime64("2031-01-01T00:00:00") + np.arange(0, 61, minutes) * np.timedelta64(1, "m")
            assert (data["time"].values == wanted).all()


def test_conventions(example):
    for name in FILES:
        said = compliance(example.result / name)
        if name == "fields.nc":
            said = [line for line in said if not any(alarm in line for alarm in FALSE_ALARMS)]
        assert said == [], name
    done = subprocess.run([tool("ugrid-checker"), example.result / "fields.nc"], capture_output=True, text=True, timeout=60)
    assert done.returncode == 0 and "No problems found" in done.stdout, done.stdout


@pytest.mark.filterwarnings("ignore:numba is not installed")
def test_general_readers(example):
    import xugrid

    mesh = read_mesh(example.result / "mesh.nc")
    with xarray.open_dataset(example.result / "fields.nc") as data:
        assert not data["level"].variable._in_memory and data["level"].shape == (4, mesh.n_faces)
    with xugrid.open_dataset(example.result / "fields.nc") as data:
        assert (data.ugrid.grid.area > 0).all() and data.ugrid.grid.n_face == mesh.n_faces


def test_the_numbers_hang_together(example):
    """The same state in fields, stations, ledger and extremes; the hump of the case at the beginning."""
    mesh = read_mesh(example.result / "mesh.nc")
    with netCDF4.Dataset(example.result / "fields.nc") as fields, netCDF4.Dataset(example.result / "stations.nc") as stations:
        level = fields["level"][:]
        assert 0.3 < level[0].max() <= 0.5 and 0 <= level[0].min() < 1e-3
        assert (fields["highest_level"][:] >= level.max(axis=0)).all() and (fields["lowest_level"][:] <= level.min(axis=0)).all()
        assert list(fields["window_bounds"][:]) == [0.0, 3600.0]
        face = stations["face"][:]
        assert np.array_equal(stations["level"][:, ::5].T, level[:, face])
        assert list(stations["station_name"][:]) == ["West", "East"]
        volume = 1025.0 * (level * mesh.face_area).sum(axis=1)
    with netCDF4.Dataset(example.result / "ledger.nc") as ledger:
        assert np.allclose(ledger["mass_anomaly"][::5], volume, rtol=1e-12)
        assert np.abs(ledger["mass_drift"][:]).max() < 1e-15
        assert ledger["largest_speed"][0] == 0.0 and 0.01 < ledger["largest_speed"][-1] < 1.0
        assert np.allclose(ledger["highest_level"][::5], level.max(axis=1), rtol=0, atol=0)
        assert (np.diff(ledger["products"][:]) > 0).all() and ledger["products"][-1] == summary(example.result)["products"]


@pytest.mark.parametrize("example", ["plane"], indirect=True)  # both surfaces: tests/analysis
def test_the_report(example):
    done = call(example.folder, "report", "results/lake")
    assert done.code == 0 and done.err == ""
    assert done.out.startswith("Tarrow Lake, a test\n===================\nfinished\n")
    pictures = [line for line in done.out.splitlines() if line.endswith(".png")]
    assert {Path(line).name for line in pictures} >= {"depth.png", "highest-level.png", "stations.png", "ledger.png", "work.png"}
    assert all((example.folder / line).read_bytes()[:4] == b"\x89PNG" for line in pictures)
    written = (example.result / "report.md").read_text()
    assert "West" in written and example.case.read_text().strip() in written and CAUTION in written


TOPICS = {
    "two-stage": "two-stage exponential step",
    "one-stage": "exponential Rosenbrock-Euler step",
    "runge-kutta-4": "classical Runge-Kutta step",
    "lanczos": "Lanczos action",
    "chebyshev": "Chebyshev action",
    "arnoldi": "Arnoldi action",
    "sphere": "areas on the sphere",
    "mesh": "mesh",
    "decay": "decay of entries, overlap from the Bessel tail",
}


@pytest.mark.parametrize(
    "changes, used",
    [
        ({}, {"two-stage", "lanczos", "mesh", "decay"}),
        ({"method.action": '"chebyshev"'}, {"two-stage", "chebyshev", "mesh", "decay"}),
        ({"method.operator": '"jacobian"'}, {"two-stage", "arnoldi", "mesh", "decay"}),
        (ONE_STAGE, {"one-stage", "arnoldi", "mesh", "decay"}),
        (EXPLICIT, {"runge-kutta-4", "mesh"}),
        (ON_THE_SPHERE, {"two-stage", "lanczos", "mesh", "decay", "sphere"}),
    ],
)
def test_exactly_the_methods_of_the_case_are_cited(changes, used, tmp_path):
    stations = {"West": ("7.05", "55.05")} if changes is ON_THE_SPHERE else None
    write_case(tmp_path, changes, stations)
    done = call(tmp_path, "cite", "lake.toml")
    assert done.code == 0
    topics = {line.split(": ")[0] for line in done.out.splitlines()}
    assert topics & set(TOPICS.values()) == {TOPICS[name] for name in used}
    always = {
        "operators on the staggered mesh",
        "energy-conserving equations",
        "overlapping subdomains",
        "partition into subdomains",
    }
    assert always <= topics
    assert all(
        any(year in line for year in map(str, range(1900, 2030))) or "Conventions" in line for line in done.out.splitlines()
    )


def test_help_imports_nothing_heavy():
    code = (
        "import sys\nfrom swe.cli.main import main\n"
        "try:\n    main(['--help'])\nexcept SystemExit as left:\n    assert left.code == 0\n"
        "heavy = {'numpy', 'scipy', 'netCDF4', 'mpi4py', 'shapely', 'matplotlib', 'pymetis'} & set(sys.modules)\n"
        "assert not heavy, heavy\n"
    )
    done = subprocess.run([sys.executable, "-c", code], env=surroundings(), capture_output=True, text=True, timeout=60)
    assert done.returncode == 0, done.stderr
    for word in ("check", "mesh", "run", "report", "cite", "new", "exit codes", "not for navigation"):
        assert word in done.stdout
