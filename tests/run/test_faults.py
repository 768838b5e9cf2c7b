"""What no program can prevent: a rank that is killed, a full disk, a defect. The job ends; what was written can be used."""

import os
import shutil
import signal
import subprocess
import sys
import time

import launch
import netCDF4
import pytest
from cases import call, children, started_on_ranks, surroundings, wait_for_claim, wait_until, write_case
from messages.refusals import in_order
from run.results import checkpoints, different, summary

MANY_RECORDS = {"output.fields_every": '"2 min"'}
LONG = {"time.duration": '"20 d"', "checkpoint.every": '"20 min"'}


@pytest.mark.parametrize("victim", [0, pytest.param(1, marks=pytest.mark.slow)])
def test_a_killed_rank_ends_the_job_and_what_was_written_goes_on(victim, tmp_path):
    write_case(tmp_path, LONG)
    result = tmp_path / "results" / "lake"
    with started_on_ranks(2, tmp_path, "run", "lake.toml", "--quiet") as job:
        wait_until(lambda: list((result / "checkpoints").glob("step-*.checkpoint")), job)
        (mpiexec,) = children(job.pid)
        os.kill(children(mpiexec)[victim], signal.SIGKILL)
        job.communicate(timeout=60)  # no rank waits for ever
    assert job.returncode not in (0, 6)
    wait_for_claim(result)
    assert not (result / "summary.json").exists() and (result / "in-use").exists()
    step = checkpoints(result)[-1]
    for name in ("fields.nc", "stations.nc", "ledger.nc"):
        with netCDF4.Dataset(result / name) as data:
            assert data["time"][-1] >= 120.0 * step - 1200.0
    write_case(tmp_path, LONG | {"time.duration": f'"{2 * step + 20} min"'})
    done = call(tmp_path, "run", "lake.toml", "--resume")
    assert done.code == 0, done.err
    in_order(done.out, "in-use: taken over from process", f"resumed at {step // 720} d", f"step {step}", "done: ")
    assert call(tmp_path, "run", "lake.toml", "--quiet", "--results", "unbroken").code == 0
    assert different(result, tmp_path / "unbroken") == []


DEFECT = """
import sys
from mpi4py import MPI
from swe.cli.main import main
from swe.errors import NumericalFailure
from swe.steppers.two_stage import TwoStage
stage, calls = TwoStage.stage, []
def broken(self, *rest):
    calls.append(1)
    if len(calls) == 7 and MPI.COMM_WORLD.rank == 1:
        raise {error}
    return stage(self, *rest)
TwoStage.stage = broken
sys.exit(main(sys.argv[1:]))
"""


@pytest.mark.parametrize(
    "error, code, parts",
    [
        (
            "ZeroDivisionError('a defect')",
            1,
            ("Traceback", "ZeroDivisionError: a defect", "rank 1 of 2: unexpected error, the job is ended"),
        ),
        ("NumericalFailure('no number here, and rank 0 does not know')", 4, ("no number here, and rank 0 does not know",)),
    ],
    ids=["unexpected", "not agreed"],
)
def test_an_error_of_one_rank_ends_the_job(error, code, parts, tmp_path):
    """The other rank waits for a message that never comes; it must not wait for ever."""
    write_case(tmp_path)
    words = [sys.executable, "-c", DEFECT.format(error=error), "run", "lake.toml", "--quiet"]
    began = time.monotonic()
    job = launch.on_ranks(2, *words, cwd=tmp_path, timeout=60, **surroundings())
    assert time.monotonic() - began < 50  # long before the time-out
    assert job.returncode == code, job.stdout
    in_order(job.stdout, *parts)
    assert job.stdout.count(parts[-1]) == 1
    wait_for_claim(tmp_path / "results" / "lake")
    assert call(tmp_path, "run", "lake.toml", "--overwrite", "--quiet").code == 0


FULL = """
import resource, sys
from mpi4py import MPI  # MPI has files of its own, which the limit would hit first
from swe.cli.main import main
resource.setrlimit(resource.RLIMIT_FSIZE, (int(sys.argv[1]), resource.RLIM_INFINITY))
sys.exit(main(sys.argv[2:]))
"""


@pytest.mark.parametrize("limit", [20_000, 300_000], ids=["mesh", "a record"])
def test_a_file_that_may_not_grow_is_one_line(limit, tmp_path):
    """A limit of file size: the write fails in the middle of the file library."""
    write_case(tmp_path, MANY_RECORDS)
    words = [sys.executable, "-W", "error", "-c", FULL, str(limit), "run", "lake.toml", "--quiet"]
    done = subprocess.run(words, cwd=tmp_path, env=surroundings(), capture_output=True, text=True, timeout=60)
    assert done.returncode == 5, done.stderr
    assert len(done.stderr.splitlines()) == 1 and "Traceback" not in done.stderr
    in_order(done.stderr, "results/lake/", "space")
    assert not (tmp_path / "results" / "lake" / "in-use").exists()
    assert call(tmp_path, "run", "lake.toml", "--overwrite", "--quiet").code == 0


@pytest.fixture
def disk(tmp_path):
    """A disk of its own, in memory, and the function that changes its size (bytes)."""
    place = tmp_path / "disk"
    place.mkdir()
    if subprocess.run(["mount", "-t", "tmpfs", "-o", "size=64m", "tmpfs", place], capture_output=True).returncode:
        pytest.skip("needs the right to mount a small disk")
    yield place, lambda size: subprocess.run(["mount", "-o", f"remount,size={size // 1024}k", place], check=True)
    subprocess.run(["umount", place], check=True)


def test_a_full_disk_is_one_line_and_with_space_the_run_goes_on(disk, tmp_path):
    place, resize = disk
    write_case(tmp_path, MANY_RECORDS | {"checkpoint.every": '"4 min"'})
    assert call(tmp_path, "run", "lake.toml", "--quiet", "--results", "whole").code == 0
    size = sum(path.stat().st_size for path in (tmp_path / "whole").rglob("*"))
    for share in (0.75, 0.85, 0.95):  # of what the run needs
        resize(int(share * size))
        done = call(tmp_path, "run", "lake.toml", "--quiet", "--results", place / "lake", "--overwrite")
        assert done.code == 5, (share, done)
        in_order(done.line, "disk/lake/", " failed (", "MB free on that disk", "free space on that disk or choose another folder")
        assert not (place / "lake" / "in-use").exists()
        assert checkpoints(place / "lake")
        resize(10 * size)
        done = call(tmp_path, "run", "lake.toml", "--quiet", "--results", place / "lake", "--resume")
        assert done.code == 0, done.err
        assert different(place / "lake", tmp_path / "whole") == [] and summary(place / "lake")["finished"] is True
        shutil.rmtree(place / "lake")
