"""What ranks agree on."""

import math

import numpy as np
import pytest
from mpi4py import MPI

from swe.errors import CaseError, FileError, InputError
from swe.parallel.partition import block
from swe.parallel.ranks import agreed, on_root
from swe.parallel.reductions import total

comm = MPI.COMM_WORLD


@pytest.mark.ranks(1, 3)
def test_one_rank_s_error_is_raised_on_every_rank():
    last = comm.size - 1
    with pytest.raises(InputError, match=f"trouble of rank {last}") as caught:
        with agreed(comm, "testing"):
            if comm.rank == last:
                raise InputError(f"trouble of rank {last}")
    assert caught.value.everywhere
    comm.Barrier()


@pytest.mark.ranks(2)
def test_the_lowest_failing_rank_is_heard_and_types_survive():
    with pytest.raises(FileError, match="rank 0"):
        with agreed(comm, "testing"):
            raise FileError(f"rank {comm.rank}")
    with pytest.raises(CaseError) as caught:
        with agreed(comm, "testing"):
            if comm.rank == 1:
                raise CaseError(["first", "second"])
    assert caught.value.mistakes == ["first", "second"]


@pytest.mark.ranks(1, 2)
def test_work_on_root_returns_there_only():
    assert on_root(comm, "testing", lambda: 7) == (7 if comm.rank == 0 else None)


@pytest.mark.ranks(1, 2, 3)
def test_sum_over_subdomains_does_not_depend_on_the_ranks():
    values = np.array([[1.0, 1e16], [1e-16, 1.0], [3.0, -1e16], [0.1, 1e-3], [7.0, 2.0], [1e-9, 5.0]])
    mine = values[list(block(comm.rank, 6, comm.size))]
    assert np.array_equal(total(comm, mine), [math.fsum(column) for column in values.T])
