"""Commands on several ranks, for tests: `launch.on_ranks(3, "swe", "run", ...)`.

How mpiexec is called (root, more ranks than cores, binding, threads) stands in scripts/env.sh alone.
"""

import os
import signal
import subprocess
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
_OF_MPI = ("OMPI_COMM_", "OMPI_UNIVERSE", "OMPI_MCA_orte", "OMPI_MCA_ess", "OMPI_MCA_pmix", "PMIX_", "PMI_", "PRTE_LAUNCHED")


def environment(**more: str) -> dict[str, str]:
    """Return the environment for a new MPI job: ours without what an MPI in this very process left in it, and `more`."""
    return {name: value for name, value in os.environ.items() if not name.startswith(_OF_MPI)} | more


def command(ranks: int, *words: str | Path) -> list[str]:
    """Return the words that run `words` on `ranks` ranks of this machine."""
    return [str(ROOT / "scripts" / "launch"), str(ranks), *map(str, words)]


def on_ranks(ranks: int, *words: str | Path, timeout: float = 120, cwd: Path = ROOT, **more: str) -> subprocess.CompletedProcess:
    """Run `words` on `ranks` ranks; return exit code and all output (stdout and stderr as one text).

    timeout   s; then the job is asked to end (SIGTERM), told so 10 s later (scripts/env.sh hands a second signal on to
              mpiexec), and killed after 10 s more
    more      additional environment variables
    """
    job = subprocess.Popen(
        command(ranks, *words),
        cwd=cwd,
        env=environment(**more),
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.STDOUT,
        text=True,
        errors="replace",
        start_new_session=True,
    )
    for patience, end in ((timeout, signal.SIGTERM), (10, signal.SIGTERM), (10, signal.SIGKILL)):
        try:
            output, _ = job.communicate(timeout=patience)
            break
        except subprocess.TimeoutExpired:
            os.killpg(job.pid, end)
    else:
        output, _ = job.communicate()
    return subprocess.CompletedProcess(job.args, job.returncode, output)
