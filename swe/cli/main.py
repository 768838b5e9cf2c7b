"""The command `swe`: reads the arguments, calls one verb, turns expected errors into one line and an exit code.

Nothing heavy is imported before a verb is known, so that `--help` is quick. Exit codes:

    0 done   2 case or input   3 environment   4 numerical failure, last good state saved   5 files   6 stopped on request
"""

from __future__ import annotations

import argparse
import os
import sys

from swe import __version__
from swe.errors import Stopped, SweError

EPILOG = """exit codes:
  0  done
  2  the case file or one of its inputs is wrong
  3  a part of the system is missing
  4  numerical failure; the last good state was saved
  5  a file or folder cannot be read or written
  6  stopped on request; the state was saved

Computed levels and currents are not for navigation, flood warning or design without calibration
against local gauges and licensed practice; local codes and authorities prevail."""

VERBS = {
    "check": "validate a case and its inputs; say what would run, its memory and steps",
    "mesh": "build the mesh of a case and write it as CF/UGRID netCDF",
    "run": "run a case, alone or under mpiexec",
    "report": "draw figures and print tables of a finished or running result",
    "tides": "print the table of tidal constituents at a date",
    "cite": "list the references of the methods that a case uses",
    "new": "write a commented case file to start from",
}


def main(arguments: list[str] | None = None) -> int:
    """Run one verb and return its exit code. Collective under mpiexec for `run`."""
    # One thread per rank: four ranks with two threads each on two cores ran 26 times slower. The user's own choice stands.
    for name in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
        os.environ.setdefault(name, "1")
    # A result may be read while its run goes on; HDF5 reads this when netCDF4 is first imported.
    os.environ.setdefault("HDF5_USE_FILE_LOCKING", "FALSE")
    options = parser().parse_args(arguments)
    import importlib

    verb = importlib.import_module(f"swe.cli.{options.verb}")
    try:
        code = verb.run(options) or 0
        sys.stdout.flush()
        return code
    except SweError as error:
        return _tell(error)
    except KeyboardInterrupt:  # outside the steps, where a signal is a request that all ranks agree about
        return _tell(Stopped("stopped from the keyboard before the first step or after the last; nothing was saved now"))
    except BrokenPipeError:  # whoever reads the output has seen enough
        from swe.simulation.progress import hush

        hush()
        return 0


def _tell(error: SweError) -> int:
    """Write an expected error once, not once a rank; end the job when the other ranks do not know of it."""
    mpi = sys.modules.get("mpi4py.MPI")
    alone = mpi is None or mpi.COMM_WORLD.size == 1
    if alone or mpi.COMM_WORLD.rank == 0 or not error.everywhere:
        sys.stderr.write(f"{error}\n")
        sys.stderr.flush()
    if not alone and not error.everywhere:
        mpi.COMM_WORLD.Abort(error.exit_code)
    return error.exit_code


def parser() -> argparse.ArgumentParser:
    """Return the parser of all verbs."""
    top = argparse.ArgumentParser(
        prog="swe",
        description="Water levels and currents of one basin: mesh, run under MPI, report.",
        epilog=EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    top.add_argument("--version", action="version", version=f"swe {__version__}")
    verbs = top.add_subparsers(dest="verb", required=True, metavar="VERB")
    made = {name: verbs.add_parser(name, help=text, description=text[0].upper() + text[1:] + ".") for name, text in VERBS.items()}
    for name in ("check", "mesh", "run", "cite"):
        made[name].add_argument("case", metavar="CASE", help="case file (TOML)")
    made["check"].add_argument("--ranks", type=_count, default=1, metavar="N", help="ranks to plan for (default: 1)")
    made["mesh"].add_argument("--to", metavar="FILE", help="where to write the mesh (default: results/<case>/mesh.nc)")
    run = made["run"]
    run.add_argument("--results", metavar="FOLDER", help="result folder (default: results/<case name>)")
    again = run.add_mutually_exclusive_group()
    again.add_argument("--resume", action="store_true", help="continue from the newest sound checkpoint, on any number of ranks")
    again.add_argument("--overwrite", action="store_true", help="replace an earlier result in the folder")
    run.add_argument("--quiet", action="store_true", help="no progress, only the last lines")
    made["report"].add_argument("results", metavar="FOLDER", help="result folder")
    made["tides"].add_argument("names", nargs="*", metavar="NAME", help="constituent, such as M2 (default: all)")
    made["tides"].add_argument("--date", metavar="DATE", help="date or date and time, UTC, such as 2031-03-01 (default: today)")
    made["new"].add_argument("case", metavar="CASE", help="case file to write")
    return top


def _count(text: str) -> int:
    try:
        value = int(text)
    except ValueError:
        value = 0
    if value < 1:
        raise argparse.ArgumentTypeError(f"{text}: a whole number from 1 up is needed")
    return value


if __name__ == "__main__":
    sys.exit(main())
