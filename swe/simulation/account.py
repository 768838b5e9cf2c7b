"""What a run has spent, and what it says of itself at its end (summary.json)."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from mpi4py import MPI

from swe.output.summary import versions
from swe.parallel.ranks import peak_memory
from swe.parallel.schwarz import Basin
from swe.simulation.setup import Setup


@dataclass
class Counts:
    """What a run has spent in all sessions.

    largest_mismatch, mismatch_sum   m (level-equivalent); largest_error   energy norm; wall_seconds   s
    """

    products: int = 0
    repeats: int = 0
    messages: int = 0
    bytes_sent: int = 0
    largest_mismatch: float = 0.0
    mismatch_sum: float = 0.0
    largest_error: float = 0.0
    wall_seconds: float = 0.0

    def as_dict(self) -> dict:
        return dict(vars(self))

    def with_session(self, comm: MPI.Comm, basin: Basin, wall_seconds: float) -> "Counts":
        """Return these counts and what this session has added, summed over the ranks. Collective."""
        mine = np.array([basin.products.sum(), basin.halo.messages, basin.halo.bytes_sent], dtype=np.int64)
        products, messages, sent = (int(value) for value in comm.allreduce(mine, op=MPI.SUM))
        return replace(
            self,
            products=self.products + products,
            messages=self.messages + messages,
            bytes_sent=self.bytes_sent + sent,
            wall_seconds=self.wall_seconds + wall_seconds,
        )


def account(setup: Setup, case, number: int, spent: Counts, mass_drift: float, finished: bool) -> dict:
    """Return the summary after step `number`, for write_summary; the same on all ranks but for the versions. Collective."""
    comm, plan, basin = setup.comm, setup.plan, setup.basin
    time = number * plan.step
    return {
        "case": case.name,
        "title": case.title,
        "finished": finished,
        "ranks": comm.size,
        "subdomains": plan.count,
        "faces": setup.share.n_faces,
        "edges": setup.share.n_edges,
        "mesh_checksum": setup.share.checksum,
        "stepper": case.method.stepper,
        "operator": case.method.operator,
        "action": case.method.action,
        "action_tolerance": case.method.action_tolerance,
        "mismatch_tolerance_metres": case.subdomains.mismatch_tolerance,
        "step_seconds": plan.step,
        "z": plan.z,
        "overlap": plan.overlap,
        "steps": number,
        "model_seconds": time,
        "wall_seconds": spent.wall_seconds,
        "simulated_over_real": time / max(spent.wall_seconds, 1e-9),
        "mass_drift_relative": mass_drift,
        "largest_mismatch": spent.largest_mismatch,
        "localisation_error_metres": spent.mismatch_sum,
        "largest_action_error": spent.largest_error,
        "repeats": spent.repeats,
        "products": spent.products,
        "messages": spent.messages,
        "bytes_sent": spent.bytes_sent,
        "peak_memory_bytes": comm.allreduce(peak_memory(), op=MPI.MAX),
        "phases": comm.allgather({name: round(value, 3) for name, value in basin.phases.seconds.items()}),
        "faces_by_rank": comm.allgather(sum(part.n_owned for part in basin.parts)),
        "faces_held_by_rank": comm.allgather(sum(part.mesh.n_faces for part in basin.parts)),
        "versions": versions(MPI.Get_library_version()),
        "settings": case.to_text(),
    }
