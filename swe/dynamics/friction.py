"""Laws of bottom friction: the drag coefficient of the quadratic law.

    quadratic   C_d given                        p = 0        Chezy's C of open channels: C_d = g / C^2
    Manning     C_d = g n^2 / h^(1/3)            p = 1/3      n in s m^-1/3

so that C_d = c h_e^-p on every edge. The coefficient or n may differ from place to place: given on faces, meaned to edges.
Conversions n = 0.025, h = 10 m: C_d = 2.85e-3, C = h^(1/6)/n = 58.7 m^(1/2) s-1. Common values: C_d 0.001 to 0.005, n 0.02 to
0.03 (common practice, no source). Source: Manning 1891, Trans. Inst. Civ. Eng. Ireland 20, 161 (from memory).

How fast friction acts, C_d |u|/h, limits explicit steps: with friction in the remainder the two-stage method is unstable where
dt C_d |u|/h exceeds 1 (a change of a steady current decays with twice that rate, and for it the stages are those of Heun's
method). With friction in the wave operator, linearised about the current (`wave`, `damping`), there is no such limit, balances
of forcing and friction are kept exactly, and the order stays 2. Measured in a channel of irregular depth near 1.5 m, Manning's
n 0.03, gusts, currents to 1.2 m s-1, faces of 500 m, rotation, over 8 h; largest error of the level over its range:

    dt C_d |u|/h                    0.65       1.3        2.6        6.5       13
    remainder                       2.1e-3     unstable
    wave operator                   2.6e-4     7.9e-4     1.9e-3     9.6e-3    2.4e-2
    one-stage, whole Jacobian       1.4e-4     6.1e-4     2.8e-3     3.4e-2    8.2e-2
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from scipy import sparse

from swe.dynamics.drag import drag_derivatives
from swe.mesh.topology import Mesh

OnFaces = Callable[[Mesh], np.ndarray]
"""Values on the faces of a (restricted) mesh, (nf,)."""


class FrictionLaw(Protocol):
    """A law for any mesh."""

    def on(self, mesh: Mesh, face_to_edge: sparse.csr_array, gravity: float) -> "Friction":
        """Return the friction on the edges of `mesh`. Not collective."""


@dataclass(frozen=True, eq=False)
class Friction:
    """C_d = c h_e^-p on the edges of one mesh: c (ne,) or one number for all; p = 0 or 1/3."""

    c: float | np.ndarray
    power: float

    def coefficient(self, h_edge: np.ndarray) -> float | np.ndarray:
        """Return C_d at depths on the edges (ne,), m. Not collective."""
        return self.c / np.cbrt(h_edge) if self.power else self.c

    def part(self, edges: slice) -> "Friction":
        """Return the friction on some of the edges. Not collective."""
        return self if np.ndim(self.c) == 0 else Friction(self.c[edges], self.power)


@dataclass(frozen=True, eq=False)
class Quadratic:
    """C_d given, >= 0: one number, or a function that gives it on the faces of a mesh."""

    coefficient: float | OnFaces

    def on(self, mesh: Mesh, face_to_edge: sparse.csr_array, gravity: float) -> Friction:
        return Friction(_on_edges(self.coefficient, mesh, face_to_edge), 0.0)


@dataclass(frozen=True, eq=False)
class Manning:
    """n given, s m^-1/3, >= 0: one number, or a function that gives it on the faces of a mesh."""

    n: float | OnFaces

    def on(self, mesh: Mesh, face_to_edge: sparse.csr_array, gravity: float) -> Friction:
        n = _on_edges(self.n, mesh, face_to_edge)
        return Friction(gravity * n * n, 1.0 / 3.0)


def damping(friction: Friction, u: np.ndarray, u_t: np.ndarray, h_edge: np.ndarray) -> np.ndarray:
    """Return C_d (|u| + u_n^2/|u|) / h on edges, (ne,), s-1: the diagonal of the Jacobian of `drag`, sign changed.

    Between one and two times C_d |u|/h; what the diagonal lacks, u_t's part, is at most half of it. Twice C_d |u|/h everywhere
    was as stable and three times less accurate. Not collective.
    """
    return -drag_derivatives(friction.coefficient(h_edge), friction.power, u, u_t, h_edge)[0]


def _on_edges(value: float | OnFaces, mesh: Mesh, face_to_edge: sparse.csr_array) -> float | np.ndarray:
    return face_to_edge @ value(mesh) if callable(value) else float(value)
