"""Overlapping subdomains: which faces and edges each one holds, owns, and takes from others.

A subdomain's faces are ordered

    [ owned | overlap layer 1 | ... | overlap layer m | ring ]

The solve part is owned + overlap (the first `mf` faces) with the edges between them (the first `ms` edges); the ring is
what the rates of the solve part need beyond it. An edge is owned by the subdomain that owns its first face. All other
edges, the cut ones included, take their values from their owner; then every face held, the ring included, can update its
own level from the transports.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from swe.errors import InputError
from swe.mesh.restrict import restrict
from swe.mesh.topology import COAST, Mesh
from swe.parallel.partition import neighbours


@dataclass(frozen=True, eq=False)
class Subdomain:
    """One overlapping part of the mesh, with everything that its rank needs to know.

    index           number of the subdomain
    mesh            the restricted mesh
    n_owned         owned faces: the first ones
    mf, ms          faces and edges of the solve part: the first ones
    owned_edges     local indices of the owned edges
    owned_nodes     local indices of the owned nodes (their face of smallest number is owned)
    rim             local indices of edges between an owned face and another's, owned by the other: where mismatch is measured
    take            (source subdomain, local edge indices) for every edge not owned
    give            (destination subdomain, local edge indices)
    take_faces, give_faces   the same for faces
    """

    index: int
    mesh: Mesh
    n_owned: int
    mf: int
    ms: int
    owned_edges: np.ndarray
    owned_nodes: np.ndarray
    rim: np.ndarray
    take: tuple[tuple[int, np.ndarray], ...]
    give: tuple[tuple[int, np.ndarray], ...]
    take_faces: tuple[tuple[int, np.ndarray], ...]
    give_faces: tuple[tuple[int, np.ndarray], ...]


def subdomains(mesh: Mesh, owner: np.ndarray, overlap: int) -> Iterator[Subdomain]:
    """Yield the subdomains of a whole mesh in their order. Not collective (rank 0 builds, then hands out).

    owner (nf,) subdomain of each face; overlap >= 1 layers.
    """
    if overlap < 1:
        raise InputError(f"overlap of {overlap} layers: at least 1 is needed, 6 is common practice")
    count = int(owner.max()) + 1
    graph = neighbours(mesh)
    held = [_faces(graph, owner, index, overlap) for index in range(count)]
    parts = [restrict(mesh, faces) for faces, _, _ in held]
    edge_owner = owner[mesh.edge_faces[:, 0]]
    needs = [_foreign(part.edge_id, edge_owner, index, _carries(part)) for index, part in enumerate(parts)]
    needs_faces = [_foreign(part.face_id, owner, index, None) for index, part in enumerate(parts)]
    for index, (part, (_, n_owned, mf)) in enumerate(zip(parts, held, strict=True)):
        inner = part.edge_faces[: part.n_inner]
        ms = int(np.count_nonzero(inner.max(axis=1) < mf))
        owned_edges = np.flatnonzero(edge_owner[part.edge_id[:ms]] == index)
        rim = np.flatnonzero((inner[:ms].min(axis=1) < n_owned) & (edge_owner[part.edge_id[:ms]] != index))
        yield Subdomain(
            index, part, n_owned, mf, ms, owned_edges, _owned_nodes(part, n_owned), rim,
            take=_take(needs[index], part.edge_id), give=_give(needs, index, part.edge_id, mesh.n_edges),
            take_faces=_take(needs_faces[index], part.face_id), give_faces=_give(needs_faces, index, part.face_id, mesh.n_faces),
        )  # fmt: skip


def _faces(graph, owner: np.ndarray, index: int, overlap: int) -> tuple[np.ndarray, int, int]:
    """Faces of a subdomain in local order, number owned, number in the solve part."""
    layer = np.flatnonzero(owner == index)
    seen = np.zeros(owner.size, dtype=bool)
    seen[layer] = True
    layers = [layer]
    for _ in range(overlap + 1):
        reach = np.unique(graph[layers[-1]].indices)
        layer = reach[~seen[reach]]
        seen[layer] = True
        layers.append(layer)
    faces = np.concatenate(layers).astype(np.int32)
    return faces, layers[0].size, faces.size - layers[-1].size


def _carries(part: Mesh) -> np.ndarray:
    """Edges through which water can pass: all but the coast."""
    passes = np.ones(part.n_edges, dtype=bool)
    passes[part.n_inner :] = part.border_kind != COAST
    return passes


def _foreign(ids: np.ndarray, owner: np.ndarray, index: int, wanted: np.ndarray | None) -> dict[int, np.ndarray]:
    """Whole-mesh indices that a subdomain holds but does not own, by owner, in its local order."""
    theirs = owner[ids] != index
    if wanted is not None:
        theirs &= wanted
    ids = ids[theirs]
    sources = owner[ids]
    return {int(source): ids[sources == source] for source in np.unique(sources)}


def _lookup(ids: np.ndarray, size: int) -> np.ndarray:
    table = np.full(size, -1, dtype=np.int64)
    table[ids] = np.arange(ids.size)
    return table


def _take(need: dict[int, np.ndarray], ids: np.ndarray) -> tuple[tuple[int, np.ndarray], ...]:
    table = _lookup(ids, int(ids.max()) + 1)
    return tuple((source, table[wanted]) for source, wanted in sorted(need.items()))


def _give(needs: list[dict[int, np.ndarray]], index: int, ids: np.ndarray, size: int) -> tuple[tuple[int, np.ndarray], ...]:
    table = _lookup(ids, size)
    return tuple((other, table[need[index]]) for other, need in enumerate(needs) if index in need)


def _owned_nodes(part: Mesh, n_owned: int) -> np.ndarray:
    """Nodes whose face of smallest whole-mesh number is owned; complete for every node of an owned face."""
    none = np.iinfo(np.int32).max
    present = part.node_faces >= 0
    ids = np.where(present, part.face_id[np.where(present, part.node_faces, 0)], none)
    local = np.take_along_axis(part.node_faces, ids.argmin(axis=1)[:, None], axis=1)[:, 0]
    touches = np.any(present & (part.node_faces < n_owned), axis=1)
    return np.flatnonzero(touches & (local < n_owned))
