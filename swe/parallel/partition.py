"""Which subdomain owns a face, and which rank owns a subdomain.

The dual graph of the mesh is cut by multilevel k-way partitioning (Karypis & Kumar 1998, SIAM J. Sci. Comput. 20, 359).
A face weighs what it costs: the number of its inner edges, which is the number of non-zeros that it brings to a product.
"""

from __future__ import annotations

import numpy as np
import pymetis
from scipy.sparse import csr_matrix

from swe.errors import InputError
from swe.mesh.topology import Mesh

LEAST_FACES = 8
"""Owned faces below which a subdomain makes no sense: its overlap would be many times its own size."""


def neighbours(mesh: Mesh) -> csr_matrix:
    """Return the symmetric adjacency of faces, (nf, nf). Not collective."""
    first, second = mesh.edge_faces[: mesh.n_inner].T
    ones = np.ones(2 * mesh.n_inner, dtype=np.int8)
    pairs = (np.concatenate([first, second]), np.concatenate([second, first]))
    return csr_matrix((ones, pairs), shape=(mesh.n_faces, mesh.n_faces))


def partition(mesh: Mesh, count: int) -> np.ndarray:
    """Return the subdomain, 0 to count - 1, that owns each face, (nf,) int32. Not collective.

    Raises InputError when there are too few faces for `count` subdomains.
    """
    most = max(1, mesh.n_faces // LEAST_FACES)
    if count > most:
        raise InputError(
            f"{count} subdomains for a mesh of {mesh.n_faces} faces: allowed are 1 to {most} (at least {LEAST_FACES} faces "
            f"each); use fewer ranks or fewer subdomains a rank, or a finer mesh"
        )
    if count == 1:
        return np.zeros(mesh.n_faces, dtype=np.int32)
    graph = neighbours(mesh)
    weights = np.diff(graph.indptr)
    _, owner = pymetis.part_graph(count, pymetis.CSRAdjacency(graph.indptr, graph.indices), vweights=weights.tolist())
    owner = np.asarray(owner, dtype=np.int32)
    empty = np.setdiff1d(np.arange(count), owner)
    if empty.size:
        raise InputError(
            f"{count} subdomains for a mesh of {mesh.n_faces} faces: {empty.size} of them would own nothing; use fewer"
        )
    return owner


def rank_of(subdomain: int, count: int, ranks: int) -> int:
    """Return the rank of a subdomain: contiguous, evenly sized blocks. Not collective."""
    base, more = divmod(count, ranks)
    large = more * (base + 1)
    return subdomain // (base + 1) if subdomain < large else more + (subdomain - large) // base


def block(rank: int, count: int, ranks: int) -> range:
    """Return the subdomains of a rank, the inverse of `rank_of`. Not collective."""
    base, more = divmod(count, ranks)
    begin = rank * base + min(rank, more)
    return range(begin, begin + base + (rank < more))
