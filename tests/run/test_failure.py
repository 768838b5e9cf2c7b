"""A run whose numbers mean nothing any more ends with code 4, says when and where, and can go on from the state before."""

import netCDF4
import numpy as np
import pytest
from cases import EXPLICIT, ONE_STAGE, call, write_case
from messages.refusals import in_order
from mpi4py import MPI
from run.results import checkpoints, summary

comm = MPI.COMM_WORLD
TOO_LONG = EXPLICIT | {"time.step": '"240 s"', "checkpoint.every": None}
"""Changes for an explicit step of three times the stability limit."""


def failed(folder, *words):
    done = call(folder, "run", "lake.toml", "--quiet", *words)
    assert done.code == 4, done.out + done.err
    assert summary(folder / "results" / "lake")["finished"] is False
    return done.line


def test_an_explicit_step_that_is_far_too_long(tmp_path):
    write_case(tmp_path, TOO_LONG)
    told = call(tmp_path, "check", "lake.toml")
    assert told.code == 0 and "unstable: z must stay below 2.83 with runge-kutta-4; use a step of at most " in told.out
    line = failed(tmp_path)
    last = checkpoints(tmp_path / "results" / "lake")[-1]
    in_order(
        line, f"step {last + 1} at 0 d 00:{4 * last:02d} ({240 * last} s): a face ran dry (face ", " at x ", "resting depth 20 m",
        "level -", "total depth must stay above 0 m",
        f"step {last}, is saved in results/lake/checkpoints/step-{last:012d}.checkpoint",
        "continue from there with --resume",
    )  # fmt: skip
    write_case(tmp_path, TOO_LONG | {"time.step": '"20 s"'})
    assert call(tmp_path, "run", "lake.toml", "--quiet", "--resume").code == 0
    result = summary(tmp_path / "results" / "lake")
    assert result["finished"] is True and result["steps"] == 180 and abs(result["mass_drift_relative"]) < 1e-15
    with netCDF4.Dataset(tmp_path / "results" / "lake" / "fields.nc") as data:
        assert list(data["time"][:]) == [0.0, 1200.0, 2400.0, 3600.0]
        assert np.isfinite(data["level"][:]).all()


def test_a_run_that_blows_up_within_one_step_says_so_without_warnings(tmp_path):
    """Numbers beyond all range in the first step: overflow is not a warning of numpy but the line of this program."""
    write_case(tmp_path, EXPLICIT | {"time.step": '"1 d"', "time.duration": '"2 d"', "start.height": '"19 m"',
                                     "output.fields_every": '"1 d"', "output.stations_every": '"1 d"',
                                     "output.ledger_every": '"1 d"', "checkpoint.every": None})  # fmt: skip
    in_order(failed(tmp_path), "step 1 at 0 d 00:00 (0 s): ", "step 0, is saved in")


@pytest.mark.parametrize("changes", [{}, ONE_STAGE], ids=["two-stage", "one-stage"])
def test_a_basis_that_is_too_small(changes, tmp_path):
    write_case(tmp_path, changes | {"method.largest_basis": "4"})
    in_order(
        failed(tmp_path), "step 1 at 0 d 00:00 (0 s): ", "after 4 products, allowed ", "shorten the step", "step 0, is saved in"
    )
    write_case(tmp_path, changes)
    assert call(tmp_path, "run", "lake.toml", "--quiet", "--resume").code == 0
    assert call(tmp_path, "run", "lake.toml", "--quiet", "--results", "anew").code == 0
    with (
        netCDF4.Dataset(tmp_path / "results" / "lake" / "fields.nc") as one,
        netCDF4.Dataset(tmp_path / "anew" / "fields.nc") as two,
    ):
        assert np.array_equal(one["level"][:], two["level"][:])


def test_subdomains_that_do_not_agree(tmp_path):
    write_case(tmp_path, {"subdomains.overlap_tolerance": None, "subdomains.overlap": "1", "subdomains.repeats": "0",
                          "subdomains.mismatch_tolerance": '"1e-6 mm"'})  # fmt: skip
    in_order(
        failed(tmp_path), "step 1 at ", "the subdomains disagree by ", "after 0 repeats: allowed is 1e-09 m", "wider overlap"
    )


@pytest.mark.ranks(2)
def test_all_ranks_fail_alike(tmp_path):
    """The face that runs dry lies on one rank."""
    if comm.rank == 0:
        write_case(tmp_path, TOO_LONG)
    comm.Barrier()
    done = call(tmp_path, "run", "lake.toml", "--quiet")
    everyone = comm.allgather((done.code, done.err))
    assert [code for code, _ in everyone] == [4, 4]
    assert "a face ran dry" in everyone[0][1] and everyone[1][1] == ""
    assert summary(tmp_path / "results" / "lake")["finished"] is False
