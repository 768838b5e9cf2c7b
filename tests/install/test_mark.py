"""The mark `ranks` itself: a suite of its own with passing, failing, waiting and skipping tests."""

import os
import re
import subprocess
import sys

import launch
import pytest

SUITE = """
import faulthandler, time
import pytest
from mpi4py import MPI
comm = MPI.COMM_WORLD

@pytest.mark.ranks(1, 2)
@pytest.mark.parametrize("word", ["a b"])
def test_passes(word, tmp_path):
    assert comm.allreduce(1) == comm.size
    (tmp_path / str(comm.rank)).touch()
    comm.Barrier()
    assert len(list(tmp_path.iterdir())) == comm.size
    assert word == "a b"

@pytest.mark.ranks(2)
def test_one_rank_fails():
    if comm.rank == 1:
        assert "found" == "wanted"
    comm.Barrier()  # rank 0 waits here

@pytest.mark.ranks(2, timeout=8)
def test_both_wait():
    comm.Recv(bytearray(1), source=1 - comm.rank)  # nobody sends

@pytest.mark.ranks(2)
def test_skips():
    pytest.skip("not today")

@pytest.mark.slow
def test_takes_long():
    pass
"""


@pytest.fixture(scope="module")
def said(tmp_path_factory) -> str:
    folder = tmp_path_factory.mktemp("suite")
    (folder / "test_suite.py").write_text(SUITE)
    (folder / "pytest.ini").write_text("[pytest]\naddopts = -p conftest\nmarkers =\n    ranks\n    slow\n")
    path = os.pathsep.join([str(launch.ROOT), str(launch.ROOT / "tests")])
    # A summary of failures (-rf) would repeat all that the ranks said.
    words = [sys.executable, "-m", "pytest", "-rp", "-p", "no:cacheprovider"]
    done = subprocess.run(words, cwd=folder, env=launch.environment(PYTHONPATH=path), text=True, capture_output=True, timeout=300)
    assert done.returncode == 1, done.stdout + done.stderr
    return done.stdout


def test_each_count_is_one_test_and_slow_is_left_out(said):
    assert "PASSED test_suite.py::test_passes[a b-1ranks]" in said or "PASSED test_suite.py::test_passes[1ranks-a b]" in said
    assert re.search(r"2 failed, 2 passed, 1 skipped, 1 deselected", said)


def test_a_failing_rank_speaks_and_the_waiting_one_shows_its_stack(said):
    part = said.split("test_one_rank_fails[2ranks]: exit code", 1)[1].split("test_both_wait[2ranks]: exit code")[0]
    waiting, failing = part.split("----- rank 1 of 2 -----")
    assert "assert 'found' == 'wanted'" in failing
    assert re.search(r"test_suite.py\", line \d+ in test_one_rank_fails", waiting)


def test_a_deadlock_ends_with_the_stacks_of_all_ranks(said):
    part = said.split("test_both_wait[2ranks]: exit code", 1)[1]
    pages = re.split(r"----- rank \d of 2 -----", part)[1:]
    assert len(pages) == 2
    # Once at its own timeout, and perhaps once more when the job is ended.
    assert all(re.search(r"test_suite.py\", line \d+ in test_both_wait", page) for page in pages)
