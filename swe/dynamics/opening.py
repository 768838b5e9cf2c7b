"""Open boundaries: the sea beyond is one more neighbour, known from outside.

Outer faces lie beyond the boundary; their level is that on the boundary line, half a face distance from the inner centre:

    clamped      eta = eta_b(t)
    radiating    eta = eta_b(t) + (D/g)^(1/2) (u_out - u_b(t))         Flather 1976, Mem. Soc. R. Sci. Liege 6(10), 141

u_out is the velocity out to sea on the boundary edge and eta_b, u_b the level and current of the outside. With the second
law the rate of an edge is that with eta_b alone plus

    d u_out/dt  =  ...  -  (c / (d/2)) (u_out - u_b) / (n . N),      c = (g D)^(1/2)

n the edge's normal, N that of the boundary: the edges of hexagons zigzag about its line, and a wave that comes straight at
the line has u_out = u (n . N) (`facing`). This damping is stiff and belongs into the linear operators, which it makes
dissipative. A wave that leaves is let go; what the outside brings comes in with eta_b and u_b.

The clamped law is right for small waves (tests/published/test_open_boundary.py) but grew at an inflow of 1 m/s in a gulf with
a tide of 0.7 m, with and without viscosity, and with the difference of K across the boundary left out: no case offers it yet.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.spatial import cKDTree

from swe.mesh.topology import Mesh, gradient_distance, open_edges

REACH = 4.0
"""Face distances over which the normal of a boundary is averaged: two zigzags to either side; arbitrary."""

LEAST_FACING = 0.25
"""Least n . N: edges nearly along the boundary carry nothing worth radiating and must not become stiffer still; arbitrary."""

Series = Callable[[float], np.ndarray]
"""Values at a model time (s)."""


@dataclass(frozen=True, eq=False)
class Opening:
    """The open boundaries of one (restricted) mesh.

    faces     (k,) outer faces; level(time) -> (k,) eta_b, m
    edges     (m,) edges across the boundary; sign (m,) +1 where their normal points out
    damp      (m,) c / (d/2) / (n . N), s-1; 0 on clamped edges
    current   time -> (m,) u_b, outward, m s-1; None: the outside brings no current
    """

    faces: np.ndarray
    level: Series
    edges: np.ndarray
    sign: np.ndarray
    damp: np.ndarray
    current: Series | None = None

    @property
    def radiating(self) -> bool:
        """Whether any edge radiates, so that the linear operators are dissipative."""
        return bool(np.any(self.damp))

    def settled(self, eta: np.ndarray, time: float) -> np.ndarray:
        """Return `eta` (nf,) with the given level on outer faces at `time` (s). Not collective."""
        eta = eta.copy()
        eta[self.faces] = self.level(time)
        return eta

    def radiate(self, rate: np.ndarray, u: np.ndarray, time: float) -> None:
        """Add the radiating part to the rates of velocity (ne,), in place. Not collective."""
        beyond = 0.0 if self.current is None else self.sign * self.current(time)
        rate[self.edges] -= self.damp * (u[self.edges] - beyond)

    def damping(self, ms: int) -> np.ndarray:
        """Return the damping of the first `ms` edges, (ms,), s-1. Not collective."""
        out = np.zeros(ms)
        here = self.edges < ms
        out[self.edges[here]] = self.damp[here]
        return out


def facing(mesh: Mesh) -> np.ndarray:
    """Return n . N of every edge across an open boundary of a WHOLE mesh, (m,), in the order of `open_edges`. Not collective.

    N is the mean of the outward normals within REACH of the edge, weighted by length: that of a straight line through them.
    """
    edges, _, _, sign = open_edges(mesh)
    if not edges.size:
        return np.zeros(0)
    outward = sign[:, None] * mesh.edge_normal[edges]
    tree = cKDTree(mesh.edge_xyz[edges])
    near = tree.query_ball_point(mesh.edge_xyz[edges], REACH * mesh.edge_distance[edges])
    mean = np.array([(mesh.edge_length[edges[k], None] * outward[k]).sum(axis=0) for k in near])
    mean /= np.linalg.norm(mean, axis=1, keepdims=True)
    return np.clip((outward * mean).sum(axis=1), LEAST_FACING, 1.0)


def opening_of(
    mesh: Mesh, level: Series, gravity: float, radiating: bool | np.ndarray, facing: np.ndarray, current: Series | None = None
) -> Opening | None:
    """Return the open boundaries of a mesh, None where it has none. Not collective.

    level       time -> level beyond every outer face of `mesh`, in the order of np.flatnonzero(mesh.face_outer), m
    radiating   for all boundary edges, or (m,) for each, in the order of `open_edges`
    facing      (m,) n . N of each boundary edge, taken from the whole mesh
    current     time -> outward velocity beyond every boundary edge (m,), m s-1
    """
    faces = np.flatnonzero(mesh.face_outer)
    if not faces.size:
        return None
    edges, inner, _, sign = open_edges(mesh)
    damp = np.sqrt(gravity * mesh.depth[inner]) / gradient_distance(mesh)[edges] / facing
    return Opening(faces, level, edges, sign, np.where(radiating, damp, 0.0), current)
