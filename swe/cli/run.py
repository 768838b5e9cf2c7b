"""`swe run CASE`: run a case, alone or under mpiexec."""

from __future__ import annotations

from pathlib import Path


def run(options) -> int:
    from mpi4py import MPI

    from swe.case.reading import read_case
    from swe.parallel.ranks import agreed, install_abort_hook
    from swe.simulation.run import run_case

    comm = MPI.COMM_WORLD
    install_abort_hook(comm)
    case = None
    with agreed(comm, "reading the case"):
        case = read_case(options.case)
    folder = Path(options.results) if options.results else Path("results") / case.name
    summary = run_case(comm, case, folder, options.resume, options.overwrite, options.quiet)
    if comm.rank == 0:
        print(
            f"done: {summary['model_seconds'] / 86400:g} d in {summary['wall_seconds']:.1f} s "
            f"({summary['simulated_over_real']:,.0f} x real time), mass drift {summary['mass_drift_relative']:.1e}, "
            f"largest mismatch {summary['largest_mismatch']:.1e} m, repeats {summary['repeats']}; results in {folder}"
        )
    return 0
