"""One rank of one test; conftest.py starts this under mpiexec: one_rank.py FOLDER SECONDS TEST

What this rank prints goes to FOLDER/rank-K. Nobody waits for ever: after SECONDS, and when mpiexec ends the job because
another rank failed, the stacks of all threads are written there, also from inside an MPI call.
"""

import faulthandler
import os
import signal
import sys
import time
from pathlib import Path

import pytest
from mpi4py import MPI


def main(folder: str, seconds: float, test: str) -> None:
    """Run the test; end the whole job when it fails here. Collective."""
    page = open(Path(folder) / f"rank-{MPI.COMM_WORLD.rank}", "w")
    os.dup2(page.fileno(), 1)
    os.dup2(page.fileno(), 2)
    faulthandler.register(signal.SIGTERM, file=page, chain=True)
    faulthandler.dump_traceback_later(seconds, exit=True, file=page)
    options = "-q --slow --no-header -p no:cacheprovider -o faulthandler_timeout=0 -o timeout=0".split()
    # A place of its own: the ranks would tidy up the common one at the same time and stumble over each other.
    options.append(f"--basetemp={folder}/temporary-{MPI.COMM_WORLD.rank}")
    code = pytest.main([test, *options])
    sys.stdout.flush()
    if code:
        # Time for the others to fail as well and say so; they may wait for this rank until then.
        time.sleep(1)
        MPI.COMM_WORLD.Abort(int(code))
    faulthandler.cancel_dump_traceback_later()


if __name__ == "__main__":
    main(sys.argv[1], float(sys.argv[2]), sys.argv[3])
