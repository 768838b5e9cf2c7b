"""Upper bound of the spectral radius of gravity waves on a mesh.

The squares of the frequencies are the eigenvalues of K x = lambda A x on faces, K the stiffness of the edges:

    (K x)_i = sum_e w_e (x_i - x_other),     w_e = g D_e l_e / d_e

K is a sum of small matrices, one for each node: the edges that end there, each with half its weight, join its (at most
three) faces. If the area of each face is shared out among its nodes, A_i = sum_v a_iv, the largest eigenvalue of the whole
is at most the largest of the small problems K_v x = lambda a_v x: an exact, local bound. The shares follow the weights,
a_iv = A_i (K_v)_ii / sum_v (K_v)_ii; then the scaled small matrix has the diagonal r_i = sum_e w_e / A_i and the eigenvalue
zero, and the other two solve a quadratic equation:

    lambda = ( t + (t^2 - 4 s)^(1/2) ) / 2,     t = sum r_i,     s = sum of its three principal minors

On regular hexagons the bound is sharp: rho^2 = 6 g D / d^2. It never exceeds the circle bound 2 max r_i.
Source of the element bound: Fried 1972, J. Sound Vib. 22, 407 (from memory); the shares are our own.
"""

from __future__ import annotations

import numpy as np

from swe.mesh.topology import Mesh, gradient_distance

ROUND_OFF = 8.0 * np.finfo(float).eps
"""Error of t^2 - 4 s over t^2: it must not lower the bound where the roots are equal; it raises it by 2e-8 at most."""


class GravityBound:
    """The bound for the first `mf` faces and the first `ms` edges of a mesh, for any depth."""

    def __init__(self, mesh: Mesh, mf: int, ms: int, gravity: float):
        self._shape = gravity * (mesh.edge_length / gradient_distance(mesh))[:ms]
        self._faces = mesh.edge_faces[:ms]
        self._area = mesh.face_area[:mf]
        nodes = np.unique(mesh.edge_nodes[:ms])
        corner = mesh.node_faces[nodes]
        self._corner = np.where((corner >= 0) & (corner < mf), corner, mf)  # mf and ms stand for "none"
        self._joint = _joints(mesh, nodes, ms)

    def __call__(self, depth_edge: np.ndarray) -> float:
        """Return the bound of the frequencies, s-1, for the depth on edges (ms,), m. Not collective."""
        weight = self._shape * depth_edge
        ratio = np.zeros(self._area.size + 1)
        ratio[:-1] = np.bincount(self._faces.ravel(), np.repeat(weight, 2), self._area.size) / self._area
        r = ratio[self._corner]
        half = 0.5 * np.append(weight, 0.0)[self._joint]  # half[:, k] joins corners k and k + 1
        stiffness = half + np.roll(half, 1, axis=1)
        other = np.roll(stiffness, -1, axis=1)
        with np.errstate(divide="ignore", invalid="ignore"):
            coupling = np.where(half > 0.0, half**2 / (stiffness * other), 0.0)
        minors = (r * np.roll(r, -1, axis=1) * (1.0 - coupling)).sum(axis=1)
        trace = r.sum(axis=1)
        root = np.sqrt(np.maximum(trace**2 - 4.0 * minors, 0.0) + ROUND_OFF * trace**2)
        return float(np.sqrt(0.5 * (trace + root).max(initial=0.0)))


def _joints(mesh: Mesh, nodes: np.ndarray, ms: int) -> np.ndarray:
    """Edge between corners k and k + 1 of each of `nodes`, (n, 3); `ms` where there is none."""
    place = np.full(mesh.n_nodes, -1)
    place[nodes] = np.arange(nodes.size)
    joint = np.full((nodes.size, 3), ms)
    edge = np.arange(ms)
    for end in (0, 1):
        node = mesh.edge_nodes[:ms, end]
        corner = mesh.node_faces[node]
        first, second = mesh.edge_faces[:ms, 0, None], mesh.edge_faces[:ms, 1, None]
        following = np.roll(corner, -1, axis=1)
        match = ((corner == first) & (following == second)) | ((corner == second) & (following == first))
        joint[place[node], match.argmax(axis=1)] = edge
    return joint
