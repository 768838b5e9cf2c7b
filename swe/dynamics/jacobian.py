"""The Jacobian of the rates about the current state, all terms, on the first mf faces and ms edges.

With F = h_e u, c_ee' = (q_e + q_e') T_ee' / 2, and M for means (M_e faces to edges, M_v faces to nodes, N nodes to edges):

    d(d eta/dt)  = -div( h_e du + u M_e d eta )
    d(du/dt)     = c ( h_e du + u M_e d eta )  +  G ( curl du - q_v M_v d eta ) / h_v  -  grad( K' du + g d eta )
                   + (a + b T) du + s M_e d eta + V du
    G_ev         = ( diag(T F) N + T diag(F) N )_ev / 2,        q_v = (f + zeta)_v / h_v,   K' du = 2 kinetic (u du)

a, b, s: derivatives of bottom drag and wind stress by u_n, u_t and h_e (`drag`); V: `viscosity`. Heads of the forcing do not
depend on the state and have no part. Every entry is a sum of few products of known vectors, so the pattern is found once, and
the data are

    data = P z

with a constant sparse P and the vector z of all c u, G / h_v, G q_v / h_v, u, h_e, s and one, of what has the places of T
(c h, K', b T, V) and of what is diagonal (K', a, V): one sparse product per refill.

Rim: the transport through edges beyond the first ms counts as given, so that the level rows are exactly -div transport(x) on
those edges; only faces on the rim feel the difference. The velocity rows have every dependence on the unknowns.

Energy weights (g A_i, l_e d_e h_e), h_e current depth, as in `wave`. Not skew: flow, friction and the change of q are in it.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from scipy import sparse

from swe.dynamics.bounds import GravityBound
from swe.dynamics.drag import drag_derivatives
from swe.dynamics.equations import Water
from swe.dynamics.viscosity import viscosity_matrix
from swe.mesh.topology import gradient_distance
from swe.operators.products import Assembly, Places, Refill, terms
from swe.operators.sparse import compressed


@dataclass(frozen=True, eq=False)
class CurrentOperator:
    """The Jacobian at one state; satisfies the contract of the exponential room.

    matrix      J, (size, size) CSR, unscaled: S = diag(weights) J diag(1/weights) is applied, not stored
    weights     (size,) square roots of (g A_i, l_e d_e h_e)
    depth_edge  (ms,) h_e, m; flow_edge (ms,) u, m s-1
    """

    factory: "JacobianFactory"
    matrix: sparse.csr_array
    weights: np.ndarray
    depth_edge: np.ndarray
    flow_edge: np.ndarray
    skew: bool = False

    @property
    def size(self) -> int:
        return self.weights.size

    def product(self, y: np.ndarray) -> np.ndarray:
        """Return S y, (size,). Not collective."""
        return self.weights * (self.matrix @ (y / self.weights))

    def apply(self, x: np.ndarray) -> np.ndarray:
        """Return J x, (size,), in unscaled variables (m s-1, m s-2). Not collective."""
        return self.matrix @ x

    def transport(self, x: np.ndarray) -> np.ndarray:
        """Return h_e du + u M_e d eta, (ms,), m2 s-1: the level rows of J x are -div of it. Not collective."""
        mf = self.factory.mf
        return self.depth_edge * x[mf:] + self.flow_edge * (self.factory.mean @ x[:mf])

    @cached_property
    def radius(self) -> float:
        """Upper bound of the spectral radius, s-1: the local bound of gravity waves plus (|rest|_1 |rest|_inf)^(1/2)."""
        return self.factory.radius(self)


class JacobianFactory:
    """The pattern of the Jacobian of one solve part, and the map that refills it. Not collective."""

    def __init__(self, water: Water, mf: int, ms: int):
        op, mesh = water.operators, water.mesh
        self.water, self.mf, self.ms = water, mf, ms
        self.mean = op.face_to_edge[:ms, :mf]
        self._bound = GravityBound(mesh, mf, ms, water.physics.gravity)
        self._turn = op.tangential[:ms]
        self._rough = water.friction and water.friction.part(slice(ms))
        self._turn_at = Places.of(self._turn)
        self._row_count = np.diff(self._turn.indptr)
        self._lift, self._lift_own = _split(-2.0 * (op.grad_inside @ op.kinetic), self._turn_at, mesh.n_inner)
        viscous = viscosity_matrix(op, water.physics.lateral_viscosity)
        self._viscous, self._viscous_own = _split(viscous, self._turn_at, mesh.n_inner)
        self._corner_at, self._corner = _corners(water, self._turn_at)
        self._refill = self._assemble()
        self._refill.segment["one"][:] = 1.0
        self._waves = self._gravity_places()
        # what is given on outer faces enters through the remainder, as from a neighbouring subdomain
        self._given = np.flatnonzero(np.append(mesh.face_outer[:mf], np.zeros(ms, dtype=bool))[self._refill.places.columns])
        self._shape_weights = (mesh.edge_length * gradient_distance(mesh))[:ms]

    def at(self, eta: np.ndarray, u: np.ndarray, time: float) -> CurrentOperator:
        """Return the Jacobian at (eta (nf,), u (ne,)) and model time `time` (s); later calls leave it alone. Not collective."""
        water, op, ms, z = self.water, self.water.operators, self.ms, self._refill.segment
        if water.opening:
            eta = water.opening.settled(eta, time)
        h_node, h_edge = water.thickness(eta)
        q_node = (water.coriolis_node + op.curl @ u) / h_node
        flow = h_edge * u
        self._turning(op.node_to_edge @ q_node, h_edge, u)
        z["corner"][:] = self._corner @ np.concatenate((self._turn @ flow, self._turn.data * flow[self._turn_at.columns]))
        z["corner"] /= h_node[self._corner_at.columns]
        np.multiply(z["corner"], q_node[self._corner_at.columns], out=z["corner q"])
        z["u"][:], z["h"][:] = u, h_edge
        np.multiply(u[:ms], self._lift_own, out=z["own"])
        if water.physics.lateral_viscosity:
            z["turn"] += self._viscous
            z["own"] += self._viscous_own
        if water.opening:
            z["own"] -= water.opening.damping(ms)
        if "by h" in z:
            self._friction(u, h_edge[:ms], time)
        area = water.physics.gravity * water.mesh.face_area[: self.mf]
        weights = np.sqrt(np.concatenate((area, self._shape_weights * h_edge[:ms])))
        matrix = self._refill.matrix()
        matrix.data[self._given] = 0.0
        return CurrentOperator(self, matrix, weights, h_edge[:ms].copy(), u[:ms].copy())

    def radius(self, operator: CurrentOperator) -> float:
        """Return the bound of the spectral radius of `operator`, s-1. Not collective."""
        rows, columns = self._refill.places.rows, self._refill.places.columns
        level, head, slope = self._waves
        rest = operator.matrix.data.copy()
        rest[level] = 0.0
        rest[head] -= slope
        scaled = np.abs(rest) * operator.weights[rows] / operator.weights[columns]
        norms = [np.bincount(index, scaled, operator.size).max() for index in (rows, columns)]
        return self._bound(operator.depth_edge) + float(np.sqrt(norms[0] * norms[1]))

    def _turning(self, q: np.ndarray, h_edge: np.ndarray, u: np.ndarray) -> None:
        """Fill c u and, where T has its places, c h - 2 grad kinetic u."""
        z, other = self._refill.segment, self._turn_at.columns
        c = np.repeat(q[: self.ms], self._row_count)
        c += q[other]
        c *= self._turn.data
        c *= 0.5
        u_other = u[other]
        np.multiply(c, u_other, out=z["turn u"])
        c *= h_edge[other]
        u_other *= self._lift
        np.add(c, u_other, out=z["turn"])

    def _friction(self, u: np.ndarray, h_edge: np.ndarray, time: float) -> None:
        """Add the derivatives of bottom drag and wind stress by u_n and u_t; fill those by h_e."""
        ms, physics, z = self.ms, self.water.physics, self._refill.segment
        z["by h"][:] = 0.0
        if self._rough:
            coefficient, power = self._rough.coefficient(h_edge), self._rough.power
            by_u, by_t, z["by h"][:] = drag_derivatives(coefficient, power, u[:ms], self._turn @ u, h_edge)
            z["own"] += by_u
            z["turn"] += np.repeat(by_t, self._row_count) * self._turn.data
        z["by h"] -= self.water.stress(time)[:ms] / (physics.density * h_edge**2)

    def _assemble(self) -> Refill:
        water, mf, ms, mesh = self.water, self.mf, self.ms, self.water.mesh
        turn, corner = self._turn_at.size, self._corner_at.size
        lengths = {"turn": turn, "turn u": turn, "corner": corner, "corner q": corner, "own": ms, "one": 1}
        lengths |= {"u": mesh.n_edges, "h": mesh.n_edges}
        if water.friction or water.stressed:
            lengths["by h"] = ms
        assembly = Assembly((mf + ms, mf + ms), lengths)
        self._level_rows(assembly)
        self._velocity_rows(assembly)
        if "by h" in lengths:
            at = Places.of(self.mean)
            assembly.add(mf + at.rows, at.columns, "by h", at.rows, self.mean.data)
        return assembly.finish()

    def _level_rows(self, assembly: Assembly) -> None:
        """-div( h_e du + u M_e d eta ) on the first ms edges."""
        out = self.water.operators.div[: self.mf, : self.ms]
        at = Places.of(out)
        assembly.add(at.rows, self.mf + at.columns, "h", at.columns, -out.data)
        face, column, source, mean = terms(at, self.mean)
        assembly.add(face, column, "u", at.columns[source], -out.data[source] * mean)

    def _velocity_rows(self, assembly: Assembly) -> None:
        """c u M_e d eta + G ( curl du - q_v M_v d eta ) / h_v - grad( g d eta ), and what has the places of T or is diagonal."""
        op, mf, ms, at = self.water.operators, self.mf, self.ms, self._turn_at
        assembly.add(mf + at.rows, mf + at.columns, "turn", np.arange(at.size), 1.0)
        assembly.add(mf + np.arange(ms), mf + np.arange(ms), "own", np.arange(ms), 1.0)
        edge, face, source, mean = terms(at, op.face_to_edge[:, :mf])
        assembly.add(mf + edge, face, "turn u", source, mean)
        edge, other, source, curl = terms(self._corner_at, op.curl)
        assembly.add(mf + edge, mf + other, "corner", source, curl)
        edge, face, source, mean = terms(self._corner_at, op.face_to_node[:, :mf])
        assembly.add(mf + edge, face, "corner q", source, -mean)
        slope = op.grad[:ms, :mf]
        at = Places.of(slope)
        assembly.add(mf + at.rows, at.columns, "one", 0, -self.water.physics.gravity * slope.data)

    def _gravity_places(self) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """Indices in the data of the gravity-wave part: level rows by velocity, velocity rows by level with their values."""
        places, mf = self._refill.places, self.mf
        level = np.flatnonzero((places.rows < mf) & (places.columns >= mf))
        slope = self.water.operators.grad[: self.ms, :mf]
        at = Places.of(slope)
        return level, places.find(mf + at.rows, at.columns), -self.water.physics.gravity * slope.data


def _split(matrix: sparse.sparray, turn_at: Places, n_inner: int) -> tuple[np.ndarray, np.ndarray]:
    """Entries of an edge-by-edge matrix at the places of T, and its diagonal (ms,). It has none elsewhere but on borders."""
    ms = turn_at.shape[0]
    part = matrix.tocsr()[:ms]
    part.sort_indices()
    at = Places.of(part)
    beside = (at.columns < n_inner) & (at.columns != at.rows)
    values = np.zeros(turn_at.size)
    values[turn_at.find(at.rows[beside], at.columns[beside])] = part.data[beside]
    return values, part.diagonal()


def _corners(water: Water, turn_at: Places) -> tuple[Places, sparse.csr_array]:
    """Places of G (ms, nn), and the map of its data from (T F (ms,), data of T times F): half of N on either."""
    ms, half = turn_at.shape[0], water.operators.node_to_edge
    own = Places.of(half[:ms])
    edge, node, source, share = terms(turn_at, half)
    places = Places.union((ms, half.shape[1]), (own.rows, own.columns), (edge, node))
    rows = np.concatenate((places.find(own.rows, own.columns), places.find(edge, node)))
    columns = np.concatenate((own.rows, ms + source))
    values = 0.5 * np.concatenate((half[:ms].data, share))
    return places, compressed(rows, columns, values, (places.size, ms + turn_at.size))
