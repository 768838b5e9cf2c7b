"""What ranks must agree on: that all of them got here, that one of them failed, that the run shall stop.

Expected failures (a file, a case, a bad step) are agreed: the failing rank's error is raised on every rank, so that all
leave by the same door. Unexpected ones abort the job, because the other ranks would wait for ever in their next message.
"""

from __future__ import annotations

import signal
import sys
import traceback
from contextlib import contextmanager

from mpi4py import MPI

from swe.errors import SweError


@contextmanager
def agreed(comm: MPI.Comm, doing: str):
    """Run local work that may raise a `SweError` on some ranks and raise it on all of them. Collective.

    The error of the lowest failing rank is the one that all raise. Nothing in the block may communicate.
    `doing` names the work for the message of an error without one.
    """
    error: SweError | None = None
    try:
        yield
    except SweError as caught:
        error = caught
    failed = comm.allreduce(comm.rank if error is not None else comm.size, op=MPI.MIN)
    if failed == comm.size:
        return
    kind, text = comm.bcast((type(error), str(error)) if comm.rank == failed else None, root=failed)
    if error is not None and comm.rank == failed:
        raise error.on_all_ranks()
    raise _rebuilt(kind, text or f"rank {failed} failed while {doing}").on_all_ranks()


def on_root(comm: MPI.Comm, doing: str, work, *arguments):
    """Run `work(*arguments)` on rank 0; return its result there, None elsewhere; raise its error everywhere. Collective."""
    result = None
    with agreed(comm, doing):
        if comm.rank == 0:
            result = work(*arguments)
    return result


def _rebuilt(kind: type, text: str) -> SweError:
    error = kind.__new__(kind)
    Exception.__init__(error, text)
    if hasattr(kind, "mistakes") or kind.__name__ == "CaseError":
        error.mistakes = text.splitlines()
    return error


def install_abort_hook(comm: MPI.Comm) -> None:
    """Make any uncaught exception of this rank end the whole job. Not collective."""

    def hook(kind, value, trace):
        traceback.print_exception(kind, value, trace)
        sys.stderr.write(f"rank {comm.rank} of {comm.size}: unexpected error, the job is ended\n")
        sys.stderr.flush()
        if comm.size > 1:
            comm.Abort(1)

    sys.excepthook = hook


class StopRequest:
    """Remembers that a signal asked the run to stop; the flag rides in the reduction at the end of a step."""

    def __init__(self) -> None:
        self.asked = False
        self._before: dict[int, object] = {}

    def __enter__(self) -> "StopRequest":
        for number in (signal.SIGTERM, signal.SIGINT, signal.SIGUSR1):
            self._before[number] = signal.signal(number, self._note)
        return self

    def __exit__(self, *_) -> None:
        for number, handler in self._before.items():
            signal.signal(number, handler)

    def _note(self, number, frame) -> None:
        self.asked = True


def peak_memory() -> int:
    """Return the largest resident memory of this process so far, bytes. Not collective."""
    import resource

    unit = 1 if sys.platform == "darwin" else 1024
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * unit
