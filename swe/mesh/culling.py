"""Which wet centres become faces: the largest connected body of water, without dead ends.

Two centres are neighbours when a Delaunay edge joins them. A face with fewer than two wet neighbours is a dead end: it
cannot pass water on, its level follows its only neighbour, and a narrow inlet that is one face wide is no inlet. Dead ends
are taken off until none is left; the rest stays connected.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components


@dataclass(frozen=True, eq=False)
class Culled:
    """kept (n,) bool; bodies: the indices of the centres of each smaller body of water, largest first; dead_ends: indices."""

    kept: np.ndarray
    bodies: list[np.ndarray]
    dead_ends: np.ndarray


def cull(triangles: np.ndarray, wet: np.ndarray) -> Culled:
    """Choose the faces among the wet centres. Not collective.

    triangles (nt, 3) Delaunay triangles of all centres; wet (n,) bool
    """
    pairs = np.vstack([triangles[:, [0, 1]], triangles[:, [1, 2]], triangles[:, [2, 0]]])
    pairs = np.unique(np.sort(pairs, axis=1), axis=0)
    bodies = _bodies(pairs[wet[pairs].all(axis=1)], wet)
    kept = np.zeros_like(wet)
    if bodies:
        kept[bodies[0]] = True
    before = kept.copy()
    while True:
        inner = pairs[kept[pairs].all(axis=1)]
        thin = kept & (np.bincount(inner.ravel(), minlength=len(wet)) < 2)
        if not thin.any():
            return Culled(kept, bodies[1:], np.flatnonzero(before & ~kept))
        kept = kept & ~thin


def _bodies(pairs: np.ndarray, wet: np.ndarray) -> list[np.ndarray]:
    """Return the connected bodies of wet centres, most centres first, of equals the one with the smallest index."""
    graph = coo_array((np.ones(len(pairs), dtype=np.int8), (pairs[:, 0], pairs[:, 1])), shape=(len(wet), len(wet)))
    label = connected_components(graph, directed=False)[1]
    members = np.flatnonzero(wet)
    members = members[np.argsort(label[members], kind="stable")]
    bodies = np.split(members, np.flatnonzero(np.diff(label[members])) + 1) if members.size else []
    return sorted(bodies, key=lambda body: (-len(body), body[0]))
