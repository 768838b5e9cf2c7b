"""Rates of change of level and velocity: the rotating shallow-water equations in vector-invariant form.

    d eta/dt = -div F                                                            F = h_e u
    d u/dt   = (q T F + T (q F))/2  -  grad( K + g eta + Phi )  +  tau_n/(rho h_e)  -  C_d |u| u/h_e  +  viscosity

    h = D + eta   depth, m; h_e two-face mean           q = mean over two nodes of (f + zeta)_v / h_v, m-1 s-1
    zeta = curl u, s-1                                  K = kinetic energy per mass, m2 s-2
    T    tangential operator: T F is the transport along t     Phi = heads of the forcing, m2 s-2

The rotation term is the energy-conserving form of Ringler et al. 2010 (J. Comput. Phys. 229, 3065): with
E = sum_e l d h_e u^2/2 + sum_i A_i g eta^2/2 the two terms T q and q T do no work because W is antisymmetric, and
grad(K + g eta) against div F cancel by summation by parts. So dE/dt = 0 at round-off without forcing and friction.

Open boundary: the level of outer faces is given (`opening`), and no difference of K acts across it.

Coast, free slip: u = 0 on border edges, zeta = 0 at coast nodes, h_v from the wet faces. The rates of border edges are zero.
Depth must be positive on all faces; nothing here checks it.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from scipy import sparse

from swe.dynamics.drag import drag
from swe.dynamics.forcing import Forcing, Head, Stress
from swe.dynamics.forcing.wind import wind_acceleration
from swe.dynamics.friction import Friction, Quadratic, damping
from swe.dynamics.opening import Opening
from swe.dynamics.physics import Physics
from swe.dynamics.viscosity import viscosity
from swe.mesh.topology import Mesh, still_edges
from swe.operators import Operators


@dataclass(frozen=True, eq=False)
class Water:
    """Everything that the rates depend on, on one (restricted) mesh.

    coriolis_node   (nn,) f, s-1
    forcing         the stresses and heads that act on the water; they add up
    opening         the open boundaries of this mesh, or None
    """

    mesh: Mesh
    operators: Operators
    physics: Physics
    coriolis_node: np.ndarray
    forcing: tuple[Forcing, ...] = ()
    opening: Opening | None = None

    def rates(self, eta: np.ndarray, u: np.ndarray, time: float) -> tuple[np.ndarray, np.ndarray]:
        """Return (d eta/dt (nf,) m s-1, du/dt (ne,) m s-2) at model time `time` (s). Not collective.

        Rates are those of the whole mesh on every face, and every edge between faces, that keep all their neighbours.
        """
        op, physics = self.operators, self.physics
        if self.opening:
            eta = self.opening.settled(eta, time)
        h_node, h_edge = self.thickness(eta)
        flow = h_edge * u
        zeta = op.curl @ u
        rate = rotation(op, self.potential_vorticity(self.coriolis_node + zeta, h_node), flow)
        rate -= bernoulli(op, physics.gravity, eta, u, self.heads(time))
        if self.stressed:
            rate += wind_acceleration(self.stress(time), physics.density, h_edge)
        if self.friction:
            rate += drag(self.friction.coefficient(h_edge), u, op.tangential @ u, h_edge)
        if physics.lateral_viscosity:
            rate += viscosity(op, physics.lateral_viscosity, u, zeta)
        if self.opening:
            self.opening.radiate(rate, u, time)
        rate[self._still] = 0.0
        return continuity(op, flow), rate

    def transport(self, eta: np.ndarray, u: np.ndarray) -> np.ndarray:
        """Return F = h_e u, (ne,), m2 s-1. Not collective."""
        return (self.operators.face_to_edge @ (self.mesh.depth + eta)) * u

    def thickness(self, eta: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return the depth of the water at nodes (nn,) and edges (ne,), m. Not collective."""
        both = self._means @ (self.mesh.depth + eta)
        return both[: self.mesh.n_nodes], both[self.mesh.n_nodes :]

    def potential_vorticity(self, absolute: np.ndarray, h_node: np.ndarray) -> np.ndarray:
        """Return q at edges, (ne,), m-1 s-1, of the absolute vorticity f + zeta (nn,) and the depth at nodes. Not collective."""
        return self.operators.node_to_edge @ (absolute / h_node)

    def stress(self, time: float) -> np.ndarray:
        """Return the sum of all surface stresses along n, (ne,), Pa. Not collective."""
        return sum((forcing.stress(time) for forcing in self._stresses), np.zeros(self.mesh.n_edges))

    def friction_damping(self, eta: np.ndarray, u: np.ndarray) -> np.ndarray:
        """Return the rate at which bottom friction damps a change of u, (ne,), s-1, >= 0. Not collective."""
        if self.friction is None:
            return np.zeros(self.mesh.n_edges)
        return damping(self.friction, u, self.operators.tangential @ u, self.thickness(eta)[1])

    def heads(self, time: float) -> list[np.ndarray]:
        """Return the heads of the forcing, each (nf,), m2 s-2; none for water that has none. Not collective."""
        return [forcing.head(time) for forcing in self._heads]

    @property
    def stressed(self) -> bool:
        """Whether any forcing is a stress."""
        return bool(self._stresses)

    @cached_property
    def _still(self) -> slice | np.ndarray:
        return np.flatnonzero(still_edges(self.mesh)) if self.opening else slice(self.mesh.n_inner, None)

    @cached_property
    def friction(self) -> Friction | None:
        """Bottom friction on the edges of this mesh, None where there is none."""
        law = self.physics.bottom_drag
        if isinstance(law, (int, float)):
            law = Quadratic(law) if law else None
        return law.on(self.mesh, self.operators.face_to_edge, self.physics.gravity) if law else None

    @cached_property
    def _stresses(self) -> tuple[Stress, ...]:
        return tuple(forcing for forcing in self.forcing if isinstance(forcing, Stress))

    @cached_property
    def _heads(self) -> tuple[Head, ...]:
        return tuple(forcing for forcing in self.forcing if isinstance(forcing, Head))

    @cached_property
    def _means(self) -> sparse.csr_array:
        return sparse.vstack((self.operators.face_to_node, self.operators.face_to_edge), format="csr")


def continuity(op: Operators, flow: np.ndarray) -> np.ndarray:
    """Return -div F on faces, (nf,), m s-1. Not collective."""
    rate = op.div @ flow
    return np.negative(rate, out=rate)


def rotation(op: Operators, q: np.ndarray, flow: np.ndarray) -> np.ndarray:
    """Return (q T F + T (q F))/2 on edges, (ne,), m s-2. Not collective."""
    rate = op.tangential @ (q * flow)
    rate += q * (op.tangential @ flow)
    rate *= 0.5
    return rate


def bernoulli(op: Operators, gravity: float, eta: np.ndarray, u: np.ndarray, heads: Iterable[np.ndarray] = ()) -> np.ndarray:
    """Return grad( K + g eta + sum of heads ) on edges, (ne,), m s-2. Not collective."""
    speed = op.kinetic @ (u * u)
    head = gravity * eta
    for other in heads:
        head += other
    if op.grad_inside is op.grad:
        head += speed
        return op.grad @ head
    return op.grad @ head + op.grad_inside @ speed
