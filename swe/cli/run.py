"""`swe run CASE`: run a case, alone or under mpiexec."""

from __future__ import annotations

from pathlib import Path


def run(options) -> int:
    from mpi4py import MPI

    from swe.case.reading import read_case
    from swe.parallel.ranks import install_abort_hook, on_root
    from swe.simulation.run import run_case

    comm = MPI.COMM_WORLD
    install_abort_hook(comm)
    # Rank 0 reads, so that a file that is edited meanwhile cannot give the ranks different cases.
    case = comm.bcast(on_root(comm, "reading the case", read_case, options.case), root=0)
    folder = Path(options.results) if options.results else Path("results") / case.name
    summary = run_case(comm, case, folder, options.resume, options.overwrite, options.quiet)
    if comm.rank == 0:
        print(
            f"done: {summary['model_seconds'] / 86400:g} d in {summary['wall_seconds']:.1f} s "
            f"({summary['simulated_over_real']:,.0f} x real time), mass drift {summary['mass_drift_relative']:.1e}, "
            f"largest mismatch {summary['largest_mismatch']:.1e} m, repeats {summary['repeats']}; results in {folder}"
        )
    return 0
