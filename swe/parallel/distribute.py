"""Handing the mesh out: rank 0 holds the whole, every rank receives only its subdomains."""

from __future__ import annotations

from dataclasses import dataclass

from mpi4py import MPI

from swe.errors import InputError
from swe.mesh.topology import Mesh
from swe.parallel.partition import partition, rank_of
from swe.parallel.ranks import on_root
from swe.parallel.subdomain import Subdomain, subdomains

_TAG = 11


@dataclass(frozen=True, eq=False)
class Share:
    """What a rank knows of the mesh after the handing out.

    parts      its subdomains; count   subdomains in all
    n_faces, n_edges, n_nodes, checksum   of the whole mesh
    radius     sphere radius, m, or None on a plane
    """

    parts: list[Subdomain]
    count: int
    n_faces: int
    n_edges: int
    n_nodes: int
    checksum: str
    radius: float | None


def distribute(comm: MPI.Comm, mesh: Mesh | None, count: int, overlap: int) -> Share:
    """Cut rank 0's mesh into `count` overlapping subdomains and give every rank its own. Collective.

    Raises InputError on all ranks when the mesh has too few faces, or fewer subdomains than ranks are asked for.
    """
    if count < comm.size:
        raise InputError(
            f"{count} subdomains for {comm.size} ranks: every rank needs at least one; use fewer ranks or more subdomains"
        ).on_all_ranks()
    owner = on_root(comm, "cutting the mesh", lambda: partition(mesh, count))
    parts: list[Subdomain] = []
    if comm.rank == 0:
        for part in subdomains(mesh, owner, overlap):
            target = rank_of(part.index, count, comm.size)
            if target == 0:
                parts.append(part)
            else:
                comm.send(part, dest=target, tag=_TAG)
        facts = (mesh.n_faces, mesh.n_edges, mesh.n_nodes, mesh.checksum(), mesh.radius)
    else:
        mine = sum(rank_of(index, count, comm.size) == comm.rank for index in range(count))
        parts = [comm.recv(source=0, tag=_TAG) for _ in range(mine)]
        facts = None
    return Share(parts, count, *comm.bcast(facts, root=0))
