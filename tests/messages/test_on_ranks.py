"""Refusals on several ranks: rank 0 says the one line, all ranks leave with the same code, nobody waits for ever."""

import contextlib
import os

import pytest
from cases import DEGREES, ON_THE_SPHERE, SHORE, WITH_GRID, call, ranks, write_case, write_depth
from mpi4py import MPI

from swe.output.lock import OutputLock

comm = MPI.COMM_WORLD


def together(folder, code, *parts, changes=None, stations=None, shore=SHORE, options=(), prepare=lambda: None):
    """Let `swe run` refuse a case on all ranks of this job."""
    if comm.rank == 0:
        write_case(folder, changes, stations, shore)
        prepare()
    comm.Barrier()
    done = call(folder, "run", "lake.toml", *options)
    everyone = comm.allgather((done.code, done.err))
    assert {each for each, _ in everyone} == {code}, everyone
    assert [bool(text) for _, text in everyone] == [True] + [False] * (comm.size - 1)
    assert len(everyone[0][1].splitlines()) == 1
    assert all(part in everyone[0][1] for part in parts), everyone[0][1]
    comm.Barrier()


@pytest.mark.ranks(2, 3)
def test_all_ranks_leave_alike(tmp_path):
    together(tmp_path, 2, "did you mean east?", changes={"wind.eats": "0.1"})
    together(tmp_path, 2, "not TOML", prepare=lambda: (tmp_path / "lake.toml").write_text("title = "))
    together(tmp_path, 5, "the case file cannot be read", prepare=lambda: (tmp_path / "lake.toml").unlink())
    together(tmp_path, 2, "a coastline crosses itself", shore=[(0, 0), (20e3, 10e3), (20e3, 0), (0, 10e3), (0, 0)])
    together(tmp_path, 2, "no such file", changes=WITH_GRID)
    short = lambda: (write_depth(tmp_path / "depth.nc"), os.truncate(tmp_path / "depth.nc", 3000))  # noqa: E731
    together(tmp_path, 2, "cut short", changes=WITH_GRID, prepare=short)
    swapped = {"West": ("55.05", "7.1")}
    together(tmp_path, 2, "look swapped", changes=ON_THE_SPHERE, stations=swapped, shore=DEGREES)
    together(tmp_path, 2, "100 subdomains for a mesh of", changes={"subdomains.count": "100"})
    together(tmp_path, 2, "1 subdomains for", "every rank needs at least one", changes={"subdomains.count": "1"})
    few = {"mesh.spacing": '"5 km"', "subdomains.count": None}
    together(tmp_path, 2, f"{comm.size} subdomains for a mesh of", "allowed are 1 to 1", "use fewer ranks", changes=few)
    together(tmp_path, 5, "making the result folder failed", options=("--results", "coast.geojson"))
    together(tmp_path, 5, "nothing to resume", options=("--resume", "--results", "elsewhere"))
    (tmp_path / "used").mkdir(exist_ok=True)
    with OutputLock(tmp_path / "used") if comm.rank == 0 else contextlib.nullcontext():
        together(tmp_path, 5, "in use by process", options=("--results", "used"))


@pytest.mark.ranks(2)
def test_a_result_that_cannot_be_continued(tmp_path):
    if comm.rank == 0:
        write_case(tmp_path)
    comm.Barrier()
    assert call(tmp_path, "run", "lake.toml", "--quiet").code == 0
    together(tmp_path, 5, "holds an earlier result")
    together(tmp_path, 2, "drag.bottom was 0.0025, is 0.003", changes={"drag.bottom": "0.003"}, options=["--resume"])
    together(tmp_path, 2, "another mesh", changes={"mesh.seed": "2"}, options=["--resume"])
    ledger = tmp_path / "results" / "lake" / "ledger.nc"
    together(tmp_path, 5, "ledger.nc: not there", options=["--resume"], prepare=ledger.unlink)


def test_the_job_leaves_with_the_code_and_one_message(tmp_path):
    write_case(tmp_path, {"wind.eats": "0.1"})
    done = ranks(2, tmp_path, "run", "lake.toml")
    assert done.code == 2, done.out
    assert done.out.count("unknown key") == 1 and "Traceback" not in done.out
