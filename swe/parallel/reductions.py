"""Sums over subdomains that do not depend on how these are spread over ranks, and gathering of whole fields.

A sum of partial sums is taken in the order of the subdomains with `math.fsum`, which rounds once.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from mpi4py import MPI

from swe.parallel.subdomain import Subdomain


def total(comm: MPI.Comm, partial: np.ndarray) -> np.ndarray:
    """Return the sums over all subdomains of all ranks, (k,). Collective.

    partial   (local subdomains, k) partial sums of this rank's subdomains
    """
    columns = partial.shape[1]
    counts = np.array(comm.allgather(partial.size))
    everything = np.empty(counts.sum())
    comm.Allgatherv(np.ascontiguousarray(partial).ravel(), (everything, counts))
    rows = everything.reshape(-1, columns)
    return np.array([math.fsum(rows[:, column]) for column in range(columns)])


class Assembly:
    """Moves owned values between the subdomains and whole-mesh arrays on rank 0.

    where   "face" or "edge"
    size    number of faces or edges of the whole mesh
    """

    def __init__(self, comm: MPI.Comm, parts: Sequence[Subdomain], where: str, size: int):
        self.comm, self.size = comm, size
        self._owned = [np.arange(part.n_owned) if where == "face" else part.owned_edges for part in parts]
        ids = [getattr(part.mesh, f"{where}_id") for part in parts]
        self._mine = np.concatenate([i[o] for i, o in zip(ids, self._owned, strict=True)]).astype(np.int64)
        self._held = np.concatenate(ids).astype(np.int64)
        self._splits = np.cumsum([i.size for i in ids])[:-1]
        self._counts = np.array(comm.allgather(self._mine.size))
        self._places = np.empty(self._counts.sum(), dtype=np.int64) if comm.rank == 0 else None
        comm.Gatherv(self._mine, (self._places, self._counts) if comm.rank == 0 else None)

    def gather(self, values: Sequence[np.ndarray]) -> np.ndarray | None:
        """Return the whole array on rank 0 (zero where nobody owns, as on coast edges), None elsewhere. Collective."""
        mine = np.concatenate([np.asarray(v, dtype=float)[o] for v, o in zip(values, self._owned, strict=True)])
        received = np.empty(self._counts.sum()) if self.comm.rank == 0 else None
        self.comm.Gatherv(mine, (received, self._counts) if self.comm.rank == 0 else None)
        if received is None:
            return None
        whole = np.zeros(self.size)
        whole[self._places] = received
        return whole

    def scatter(self, whole: np.ndarray | None) -> list[np.ndarray]:
        """Return to every subdomain its part, all that it holds, of rank 0's whole array. Collective."""
        wanted = self.comm.gather(self._held, root=0)
        parts = [whole[ids] for ids in wanted] if self.comm.rank == 0 else None
        return np.split(self.comm.scatter(parts, root=0), self._splits)
